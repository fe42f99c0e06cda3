//! The likelihood of mode powers: its signed roots, the bias it is free of, limits, errors; and verdicts from modes.

use nalgebra::{DMatrix, DVector};
use planish::estimates::ModeEstimate;
use planish::fits::Verdict;
use planish::fits::mode_verdict::{advice, judge, slowest};
use planish::fits::plate_likelihood::{ModeSample, ModelPoint, PowerModel, maximise, signed_root};
use rand_distr::{Distribution, Gamma};
use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::SeedableRng;

fn sample(power: f64, effective_samples: f64) -> ModeSample {
    ModeSample {
        length: 1.0,
        power,
        effective_samples,
    }
}

#[test]
fn squared_root_is_the_deviance_and_its_slope_the_derivative() {
    for ratio in [1e-3, 0.2, 0.9, 0.999, 0.999_5, 1.0, 1.000_5, 1.002, 1.5, 30.0] {
        let ln_model = 0.7;
        let at = |ln_model: f64| signed_root(&sample(ratio * 0.7_f64.exp(), 7.0), ln_model);
        let [root, slope] = at(ln_model);
        let x: f64 = f64::ln(ratio);
        assert!(
            (root * root - 14.0 * (x.exp_m1() - x)).abs() < 1e-12 * (1.0 + root * root),
            "{ratio}"
        );
        assert!(root.abs() < 1e-12 || (root > 0.0) == (ratio > 1.0));
        let h = 1e-5;
        let difference = (at(ln_model + h)[0] - at(ln_model - h)[0]) / (2.0 * h);
        assert!(
            (slope / difference - 1.0).abs() < 1e-6,
            "{ratio}: {slope} {difference}"
        );
    }
}

/// ln m = parameter for every mode.
struct Constant(usize);

impl PowerModel for Constant {
    fn evaluate(&mut self, parameters: &[f64]) -> Option<ModelPoint> {
        Some(ModelPoint {
            ln_power: DVector::from_element(self.0, parameters[0]),
            derivatives: DMatrix::from_element(self.0, 1, 1.0),
        })
    }
}

/// With one parameter the maximum is known: m is the mean of all powers, weighed by their effective samples; and it does not
/// lean, where the mean of logarithms of single exponential samples leans by Euler's constant, exp(-0.5772) = 0.56.
#[test]
fn maximum_is_the_weighted_mean_and_is_free_of_the_bias_of_logarithms() {
    let mut generator = Xoshiro256PlusPlus::seed_from_u64(4);
    let gamma = Gamma::new(1.0, 2.0).expect("a shape");
    let samples: Vec<ModeSample> = (0..4000)
        .map(|_| sample(gamma.sample(&mut generator), 1.0))
        .collect();
    let fit = maximise(&mut Constant(samples.len()), &samples, &[0.0], &[None]).expect("a maximum");
    let mean = samples.iter().map(|sample| sample.power).sum::<f64>() / 4000.0;
    assert!((fit.parameters[0].exp() / mean - 1.0).abs() < 1e-4);
    assert!((mean / 2.0 - 1.0).abs() < 3.0 / 4000.0_f64.sqrt());
    let logarithms = (samples.iter().map(|sample| sample.power.ln()).sum::<f64>() / 4000.0).exp() / 2.0;
    assert!((logarithms / 0.5615 - 1.0).abs() < 0.1, "{logarithms}");
    let unequal = [sample(1.0, 3.0), sample(5.0, 1.0)];
    let fit = maximise(&mut Constant(2), &unequal, &[0.0], &[None]).expect("a maximum");
    assert!((fit.parameters[0].exp() - 2.0).abs() < 1e-4);
}

#[test]
fn limits_hold() {
    let samples = [sample(10.0, 50.0), sample(10.0, 50.0)];
    let fit = maximise(&mut Constant(2), &samples, &[0.5], &[Some([0.0, 1.0])]).expect("a maximum");
    assert!(
        fit.parameters[0] > 0.99 && fit.parameters[0] <= 1.0,
        "{:?}",
        fit.parameters
    );
    let inside = maximise(&mut Constant(2), &samples, &[0.5], &[Some([0.0, 5.0])]).expect("a maximum");
    assert!((inside.parameters[0] - 10.0_f64.ln()).abs() < 1e-4);
}

fn mode(length: f64, effective_samples: f64, split_r_hat: Option<f64>) -> ModeEstimate {
    ModeEstimate {
        integers: [1, 0],
        q: [length, 0.0],
        length,
        power: 1.0,
        effective_samples,
        relaxation_ps: None,
        zone_weight: 1.0,
        split_r_hat,
        block_correlation: 1.0,
        static_power: 0.0,
        static_removed: false,
    }
}

#[test]
fn verdicts_follow_the_slowest_mode() {
    let judged = |first: f64, second: f64, r_hat: Option<f64>, count: usize, frames: usize| {
        let mut modes = vec![mode(0.1200, first, r_hat), mode(0.1211, second, r_hat)];
        modes.extend((2..count).map(|index| mode(0.1 * index as f64, 300.0, Some(1.0))));
        let window: Vec<&ModeEstimate> = modes.iter().collect();
        assert_eq!(
            slowest(&window).expect("a mode").effective_samples,
            first.min(second)
        );
        judge(&window, frames)
    };
    assert_eq!(judged(20.0, 25.0, Some(1.05), 6, 300).verdict, Verdict::Good);
    assert_eq!(judged(20.0, 25.0, Some(1.05), 6, 300).note(), "");
    // Of modes within one per cent the one with fewer samples counts.
    assert_eq!(judged(25.0, 19.9, Some(1.05), 6, 300).verdict, Verdict::Weak);
    assert!(
        judged(10.0, 25.0, Some(1.05), 6, 300)
            .note()
            .contains("2.0 times as long")
    );
    assert_eq!(judged(4.9, 25.0, Some(1.05), 6, 300).verdict, Verdict::Unusable);
    assert_eq!(judged(30.0, 25.0, Some(1.1), 6, 300).verdict, Verdict::Weak);
    assert_eq!(judged(30.0, 25.0, None, 6, 300).verdict, Verdict::Weak);
    assert_eq!(judged(30.0, 25.0, Some(1.05), 5, 300).verdict, Verdict::Weak);
    assert_eq!(judged(30.0, 25.0, Some(1.05), 6, 19).verdict, Verdict::Unusable);
    assert_eq!(judge(&[], 300).verdict, Verdict::Unusable);
    assert_eq!(advice(0.05, 0.05), None);
    assert!(advice(0.1, 0.05).expect("advice").contains("4.0 times"));
}
