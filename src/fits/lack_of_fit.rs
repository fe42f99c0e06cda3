//! Whether a model's curve passes through mode powers: the lack-of-fit test with replicates.
//!
//! Modes whose lengths lie within 1 % form a ring. The deviance of all modes splits exactly into that of the modes about
//! their rings' means, which no smooth curve can change, and that of the rings' means about the model:
//!
//! ```text
//! sum 2 n (x - 1 - ln x) = sum 2 n (x/X - 1 - ln(x/X)) + sum over rings of 2 N (X - 1 - ln X),
//! x = s/m of a mode,  N = sum n of a ring,  X = sum n x/N
//! ```
//!
//! Each part over its expectation for Gamma shapes n and N measures the same dispersion where the model is right, so that
//! their ratio is nearly F distributed (Draper and Smith, Applied Regression Analysis, ch. 2), even where all n are wrong
//! by one factor.

use statrs::distribution::{ChiSquared, ContinuousCDF, FisherSnedecor};
use statrs::function::gamma::digamma;

use super::plate_likelihood::{LikelihoodFit, ModeSample};

/// Modes up to this much longer than the first of a ring belong to it.
pub const RING_WIDTH: f64 = 0.01;

/// With fewer modes beyond the first of each ring, the scatter within rings says too little about the dispersion, and the
/// effective samples are trusted.
const LEAST_REPLICATES: f64 = 8.0;

/// Probability of a lack of fit as large as that of `fit` to `samples` (ascending in length), were the model right; `None`
/// where no more rings than parameters are left.
#[must_use]
pub fn probability(fit: &LikelihoodFit, samples: &[ModeSample]) -> Option<f64> {
    let parameters = fit.parameters.len() as f64;
    let (mut rings, mut between, mut within) = (0.0, Part::default(), Part::default());
    for ring in rings_of(samples) {
        let ratio = |mode: usize| samples[mode].power / fit.point.ln_power[mode].exp();
        let total: f64 = ring.clone().map(|mode| samples[mode].effective_samples).sum();
        let mean = ring
            .clone()
            .map(|mode| samples[mode].effective_samples * ratio(mode))
            .sum::<f64>()
            / total;
        for mode in ring {
            let n = samples[mode].effective_samples;
            within.deviance += unit_deviance(n, ratio(mode) / mean);
            within.expected += expected_deviance(n);
        }
        within.expected -= expected_deviance(total);
        between.deviance += unit_deviance(total, mean);
        between.expected += expected_deviance(total);
        rings += 1.0;
    }
    let free = rings - parameters;
    if free < 1.0 {
        return None;
    }
    let lack = between.deviance / (between.expected * free / rings);
    let replicates = samples.len() as f64 - rings;
    if replicates < LEAST_REPLICATES {
        return Some(ChiSquared::new(free).ok()?.sf(lack * free));
    }
    let scatter = within.deviance / within.expected;
    Some(FisherSnedecor::new(free, replicates).ok()?.sf(lack / scatter))
}

#[derive(Default)]
struct Part {
    deviance: f64,
    expected: f64,
}

fn unit_deviance(n: f64, ratio: f64) -> f64 {
    2.0 * n * (ratio - 1.0 - ratio.ln())
}

/// Expectation of 2 n (x - 1 - ln x) for x of Gamma(n, 1/n): 2 n (ln n - digamma(n)), 1 for large n.
fn expected_deviance(n: f64) -> f64 {
    2.0 * n * (n.ln() - digamma(n))
}

/// Ranges of modes of equal length.
fn rings_of(samples: &[ModeSample]) -> Vec<std::ops::Range<usize>> {
    let mut rings = Vec::new();
    let mut first = 0;
    for mode in 1..=samples.len() {
        let ends = mode == samples.len() || samples[mode].length > samples[first].length * (1.0 + RING_WIDTH);
        if ends {
            rings.push(first..mode);
            first = mode;
        }
    }
    rings
}

#[cfg(test)]
mod tests {
    use nalgebra::{DMatrix, DVector};
    use rand_distr::{Distribution, Gamma};
    use rand_xoshiro::Xoshiro256PlusPlus;
    use rand_xoshiro::rand_core::SeedableRng;

    use super::super::plate_likelihood::{LikelihoodFit, ModeSample, ModelPoint};
    use super::probability;

    const MODES: usize = 120;

    /// Share of 400 data sets of Gamma shape 12, whose modes are said to have `stated` effective samples and whose truth lies a
    /// factor of 1 + `bend` sin above a constant model, that are rejected at 5 %.
    fn rejected(stated: f64, bend: f64) -> f64 {
        const SETS: usize = 400;
        const SHAPE: f64 = 12.0;
        let mut generator = Xoshiro256PlusPlus::seed_from_u64(2);
        let gamma = Gamma::new(SHAPE, 1.0 / SHAPE).expect("a positive shape");
        let mut count = 0;
        for _ in 0..SETS {
            let sample = |mode: usize| {
                let ring = (mode / 4) as f64;
                ModeSample {
                    length: 1.02_f64.powf(ring),
                    power: (1.0 + bend * (0.3 * ring).sin()) * gamma.sample(&mut generator),
                    effective_samples: stated,
                }
            };
            let samples: Vec<ModeSample> = (0..MODES).map(sample).collect();
            let mean = samples.iter().map(|sample| sample.power).sum::<f64>() / MODES as f64;
            let fit = LikelihoodFit {
                parameters: vec![mean.ln()],
                point: ModelPoint {
                    ln_power: DVector::from_element(MODES, mean.ln()),
                    derivatives: DMatrix::from_element(MODES, 1, 1.0),
                },
                deviance: 0.0,
            };
            count += usize::from(probability(&fit, &samples).expect("rings are left") < 0.05);
        }
        count as f64 / SETS as f64
    }

    /// A right model is rejected in 5 % of data sets (three binomial errors and the approximation: 1 to 10 %), also where the effective
    /// samples are wrong by a factor of two either way; a wrong one nearly always.
    #[test]
    fn right_models_pass_and_wrong_ones_do_not_whatever_the_effective_samples() {
        for stated in [6.0, 12.0, 24.0] {
            let share = rejected(stated, 0.0);
            assert!((0.01..0.1).contains(&share), "{stated}: {share}");
            assert!(rejected(stated, 0.3) > 0.9);
        }
    }
}
