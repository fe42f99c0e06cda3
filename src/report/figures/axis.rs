//! Axes: a range of numbers, where its ticks stand and what they say.

/// How numbers are laid along an axis.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Scale {
    /// Equal steps are equal lengths.
    Linear,
    /// Equal ratios are equal lengths.
    Logarithmic,
}

/// One axis of a plot.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Axis {
    scale: Scale,
    first: f64,
    last: f64,
}

/// Wanted number of labelled ticks on a linear axis.
const WANTED_LABELS: f64 = 6.0;

impl Axis {
    /// An axis that shows all of `numbers` with `margin` to spare at both ends, as a part of the whole length.
    /// `None` where there is nothing to show. A logarithmic axis leaves out what is not positive.
    pub fn around(scale: Scale, numbers: impl Iterator<Item = f64>, margin: f64) -> Option<Self> {
        let shown = numbers
            .filter(|number| number.is_finite() && (scale == Scale::Linear || *number > 0.0))
            .map(|number| {
                if scale == Scale::Linear {
                    number
                } else {
                    number.ln()
                }
            });
        let (low, high) = shown.fold(None, |range: Option<(f64, f64)>, number| {
            let (low, high) = range.unwrap_or((number, number));
            Some((low.min(number), high.max(number)))
        })?;
        let width = high - low;
        // A single number still gets a visible range: 5 % of it to both sides.
        let spare = if width > 0.0 {
            margin * width
        } else if scale == Scale::Linear {
            (0.05 * low.abs()).max(1e-9)
        } else {
            0.05
        };
        let (low, high) = (low - spare, high + spare);
        Some(match scale {
            Scale::Linear => Self {
                scale,
                first: low,
                last: high,
            },
            Scale::Logarithmic => Self {
                scale,
                first: low.exp(),
                last: high.exp(),
            },
        })
    }

    /// Where a number stands: 0 at the start of the axis, 1 at its end; held to that range.
    pub fn position(&self, number: f64) -> f64 {
        let part = match self.scale {
            Scale::Linear => (number - self.first) / (self.last - self.first),
            Scale::Logarithmic if number <= 0.0 => 0.0,
            Scale::Logarithmic => (number / self.first).ln() / (self.last / self.first).ln(),
        };
        part.clamp(0.0, 1.0)
    }

    /// Whether a number lies on the axis; its ends do, whatever the last bits of a logarithm.
    pub fn shows(&self, number: f64) -> bool {
        const ROUNDING: f64 = 1e-9;
        let spare = match self.scale {
            Scale::Linear => ROUNDING * (self.last - self.first),
            Scale::Logarithmic => ROUNDING * number,
        };
        self.first - spare <= number && number <= self.last + spare
    }

    /// Ticks that carry a label.
    pub fn labelled_ticks(&self) -> Vec<(f64, String)> {
        let ticks = match self.scale {
            Scale::Linear => self.linear_ticks(),
            Scale::Logarithmic => self.logarithmic_ticks(),
        };
        let decimals = ticks.iter().map(|tick| decimals_of(*tick)).max().unwrap_or(0);
        ticks
            .into_iter()
            .map(|tick| match self.scale {
                Scale::Linear => (tick, format!("{tick:.decimals$}")),
                Scale::Logarithmic => (tick, format!("{tick}")),
            })
            .collect()
    }

    /// Ticks without a label between the others: the integers of every decade of a logarithmic axis.
    pub fn small_ticks(&self) -> Vec<f64> {
        match self.scale {
            Scale::Linear => Vec::new(),
            Scale::Logarithmic => self.multiples(&[1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0, 9.0]),
        }
    }

    /// The coarsest of some customary sets of ticks that has enough of them to let a reader interpolate.
    fn logarithmic_ticks(&self) -> Vec<f64> {
        let sets: [(&[f64], usize); 4] = [
            (&[1.0], 4),
            (&[1.0, 2.0, 5.0], 3),
            (&[1.0, 1.5, 2.0, 3.0, 5.0, 7.0], 3),
            (
                &[
                    1.0, 1.2, 1.4, 1.6, 1.8, 2.0, 2.5, 3.0, 3.5, 4.0, 5.0, 6.0, 7.0, 8.0, 9.0,
                ],
                4,
            ),
        ];
        sets.iter()
            .map(|(set, fewest)| (self.multiples(set), *fewest))
            .find(|(ticks, fewest)| ticks.len() >= *fewest)
            .map_or_else(|| self.linear_ticks(), |(ticks, _)| ticks)
    }

    /// Every multiple of `mantissas` with a power of ten that lies on the axis.
    fn multiples(&self, mantissas: &[f64]) -> Vec<f64> {
        let first = self.first.log10().floor() as i32;
        let last = self.last.log10().ceil() as i32;
        (first..=last)
            .flat_map(|exponent| {
                mantissas
                    .iter()
                    .map(move |mantissa| as_written(*mantissa, exponent))
            })
            .filter(|tick| self.shows(*tick))
            .collect()
    }

    /// Multiples of the step among 1, 2 and 5 times a power of ten that comes nearest to the wanted number of ticks.
    fn linear_ticks(&self) -> Vec<f64> {
        let rough = (self.last - self.first) / WANTED_LABELS;
        let exponent = rough.log10().floor() as i32;
        let steps = [1.0, 2.0, 5.0, 10.0].map(|mantissa| as_written(mantissa, exponent));
        let away = |step: f64| (step / rough).ln().abs();
        let step = steps.into_iter().fold(
            rough * 100.0,
            |best, step| {
                if away(step) < away(best) { step } else { best }
            },
        );
        let first = (self.first / step).ceil() as i64;
        let last = (self.last / step).floor() as i64;
        (first..=last)
            // The product is rounded to the digits of the step, so that 3 x 0.1 is 0.3.
            .map(|count| {
                let decimals = decimals_of(step);
                format!("{:.decimals$}", count as f64 * step)
                    .parse()
                    .unwrap_or(count as f64 * step)
            })
            .collect()
    }
}

/// The double nearest to the decimal number `mantissa`e`exponent`, free of the rounding of a product.
fn as_written(mantissa: f64, exponent: i32) -> f64 {
    format!("{mantissa}e{exponent}").parse().unwrap_or(mantissa)
}

/// Digits after the point of the shortest decimal form.
fn decimals_of(number: f64) -> usize {
    let text = format!("{number}");
    text.split_once('.').map_or(0, |(_, decimals)| decimals.len())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn labels(axis: Axis) -> Vec<String> {
        axis.labelled_ticks()
            .into_iter()
            .map(|(_, label)| label)
            .collect()
    }

    #[test]
    fn logarithmic_ticks_are_customary() {
        let axis = Axis::around(Scale::Logarithmic, [0.12, 1.4].into_iter(), 0.05).expect("a range");
        assert_eq!(labels(axis), ["0.2", "0.5", "1"]);
        let axis = Axis::around(Scale::Logarithmic, [1.05, 1.75].into_iter(), 0.0).expect("a range");
        assert_eq!(labels(axis), ["1.1", "1.2", "1.3", "1.4", "1.5", "1.6", "1.7"]);
        let axis = Axis::around(Scale::Logarithmic, [0.01, 100.0].into_iter(), 0.0).expect("a range");
        assert_eq!(labels(axis), ["0.01", "0.1", "1", "10", "100"]);
    }

    #[test]
    fn linear_ticks_have_equal_digits() {
        let axis = Axis::around(Scale::Linear, [2.687, 2.701].into_iter(), 0.05).expect("a range");
        assert_eq!(
            labels(axis),
            ["2.688", "2.690", "2.692", "2.694", "2.696", "2.698", "2.700"]
        );
    }

    #[test]
    fn positions_run_from_end_to_end() {
        let axis = Axis::around(Scale::Logarithmic, [0.1, 10.0].into_iter(), 0.0).expect("a range");
        assert!((axis.position(1.0) - 0.5).abs() < 1e-12);
        assert_eq!(axis.position(-1.0), 0.0);
        assert!(Axis::around(Scale::Logarithmic, [-1.0].into_iter(), 0.0).is_none());
    }
}
