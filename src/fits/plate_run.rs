//! What every plate fit needs of one run: its mode samples, the window's modes, conditions and judgements.

use std::f64::consts::TAU;

use ndarray::{Array2, Axis};

use super::mode_verdict::{self, Judgement};
use super::plate_likelihood::ModeSample;
use super::window::ChosenWindow;
use super::{Condition, FitOptions, FittedValue, PlateCurve, Quantity, Verdict};
use crate::estimates::{ModeEstimate, RunEstimates, Tension};

/// One run, ready to be fitted.
pub struct PlateRun<'a> {
    /// The run.
    pub run: &'a RunEstimates,
    /// Index in the spectrum of each mode that may be fitted: in the zone, from the window's lower end, ascending in |q|.
    pub modes: Vec<usize>,
    /// Their samples.
    pub samples: Vec<ModeSample>,
    /// Their |q| in 1/A.
    pub lengths: Vec<f64>,
    /// The run's smallest |q| in the zone, in 1/A.
    pub smallest: f64,
}

impl<'a> PlateRun<'a> {
    /// `None` where the run has no mode that could be fitted.
    #[must_use]
    pub fn new(run: &'a RunEstimates, options: &FitOptions) -> Option<Self> {
        let modes = &run.spectrum.modes;
        let lower_end = options.window.map_or(0.0, |[lower, _]| lower * (1.0 - 1e-9));
        let fitted = |mode: &ModeEstimate| {
            mode.zone_weight > 0.0
                && mode.length >= lower_end
                && mode.power > 0.0
                && mode.power.is_finite()
                && mode.effective_samples > 0.0
        };
        let chosen: Vec<usize> = (0..modes.len()).filter(|&index| fitted(&modes[index])).collect();
        let samples: Vec<ModeSample> = chosen
            .iter()
            .map(|&index| ModeSample {
                length: modes[index].length,
                power: modes[index].power,
                effective_samples: modes[index].effective_samples,
            })
            .collect();
        let in_zone = modes.iter().filter(|mode| mode.zone_weight > 0.0);
        let smallest = in_zone.map(|mode| mode.length).fold(f64::INFINITY, f64::min);
        (!chosen.is_empty()).then(|| Self {
            run,
            lengths: samples.iter().map(|sample| sample.length).collect(),
            modes: chosen,
            samples,
            smallest,
        })
    }

    /// Block means of the first `count` modes, shape (blocks, modes).
    #[must_use]
    pub fn block_powers(&self, count: usize) -> Array2<f64> {
        self.run
            .spectrum
            .block_powers
            .select(Axis(1), &self.modes[..count])
    }

    /// First and last |q| of the first `count` modes, in 1/A.
    #[must_use]
    pub fn window(&self, count: usize) -> [f64; 2] {
        [self.lengths[0], self.lengths[count - 1]]
    }

    /// Conditions of a value of this run at `length` (A).
    #[must_use]
    pub fn condition(&self, length: Option<f64>) -> Condition {
        condition(self.run, length)
    }

    /// 2 pi over the smallest |q|, in A.
    #[must_use]
    pub fn longest_wave(&self) -> f64 {
        TAU / self.smallest
    }

    /// Verdict of the values read from the first `count` modes, before anything about the values themselves is known.
    #[must_use]
    pub fn judge(&self, count: usize) -> Judgement {
        let all = &self.run.spectrum.modes;
        let window: Vec<&ModeEstimate> = self.modes[..count].iter().map(|&index| &all[index]).collect();
        let mut judgement = mode_verdict::judge(&window, self.run.frames);
        for reservation in &self.run.reservations {
            judgement.at_most(Verdict::Weak, reservation.clone());
        }
        judgement
    }

    /// How the window was chosen and what the value owes to it, for a quantity's method.
    #[must_use]
    pub fn describe_window<F>(&self, chosen: &ChosenWindow<F>, value: f64) -> String {
        let [first, last] = self.window(chosen.modes);
        let moved = |change: Option<f64>| {
            change.map_or_else(
                || "no fit".to_owned(),
                |change| format!("{:+.1} %", 100.0 * change / value),
            )
        };
        let [down, up] = chosen.moves.map(moved);
        format!(
            "q {first:.3} to {last:.3} /A, {} modes; last q one step lower: {down}, higher: {up}",
            chosen.modes
        )
    }

    /// kappa(q) at each row of the spectrum that lies in the zone, from kappa of each of the spectrum's modes.
    #[must_use]
    pub fn curve(&self, count: usize, kappa_of_mode: impl Fn(usize) -> Option<f64>) -> PlateCurve {
        let mut curve = PlateCurve {
            run: self.run.name.clone(),
            window: self.window(count),
            q: Vec::new(),
            kappa: Vec::new(),
        };
        for row in &self.run.spectrum.rows {
            let values: Vec<f64> = row.modes.clone().filter_map(&kappa_of_mode).collect();
            if !values.is_empty() {
                curve.q.push(row.length);
                curve.kappa.push(values.iter().sum::<f64>() / values.len() as f64);
            }
        }
        curve
    }
}

/// Conditions of a value of `run` at `length` (A).
#[must_use]
pub fn condition(run: &RunEstimates, length: Option<f64>) -> Condition {
    Condition {
        run: Some(run.name.clone()),
        temperature: Some(run.temperature),
        tension: match run.tension {
            Tension::Stated(tension) => Some(tension),
            Tension::Measured { .. } | Tension::Assumed => None,
        },
        length,
    }
}

/// A quantity that came out of a fit; without its value where the judgement is unusable.
#[must_use]
pub fn judged(
    (name, unit): (&'static str, &'static str),
    condition: Condition,
    value: FittedValue,
    method: String,
    judgement: &Judgement,
) -> Quantity {
    Quantity {
        name,
        unit,
        condition,
        value: (judgement.verdict != Verdict::Unusable).then_some(value),
        method,
        verdict: judgement.verdict,
        note: judgement.note(),
    }
}

/// A quantity that the data cannot carry.
#[must_use]
pub fn without_value(
    (name, unit): (&'static str, &'static str),
    condition: Condition,
    method: &str,
    note: impl Into<String>,
) -> Quantity {
    Quantity {
        name,
        unit,
        condition,
        value: None,
        method: method.to_owned(),
        verdict: Verdict::Unusable,
        note: note.into(),
    }
}
