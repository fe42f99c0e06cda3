//! Autocorrelation, its integral, R-hat, blocking and block means, against closed forms, textbook rules and a general
//! statistics library. Nothing here knows of sheets.

use planish::statistics::{
    autocovariance, block_jackknife, blocking_levels, equilibration_cut, integrated_autocorrelation,
    pooled_block_correlation, split_r_hat, weighted_block_mean,
};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

/// A stationary first-order autoregression x_t = phi x_(t-1) + sqrt(1 - phi^2) noise: unit variance, rho_k = phi^k,
/// g = (1 + phi)/(1 - phi) (Priestley, Spectral Analysis and Time Series, section 3.5).
fn autoregression(phi: f64, count: usize, random: &mut Xoshiro256PlusPlus) -> Vec<f64> {
    let mut x: f64 = StandardNormal.sample(random);
    (0..count)
        .map(|_| {
            let noise: f64 = StandardNormal.sample(random);
            x = phi * x + (1.0 - phi * phi).sqrt() * noise;
            x
        })
        .collect()
}

#[test]
fn autocovariance_is_the_direct_sum() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(1);
    let series = autoregression(0.7, 37, &mut random);
    let mean = series.iter().sum::<f64>() / 37.0;
    for (lag, c) in autocovariance(&series).into_iter().enumerate() {
        let direct: f64 = (lag..37)
            .map(|t| (series[t] - mean) * (series[t - lag] - mean))
            .sum();
        assert!(
            (c - direct / 37.0).abs() < 1e-13,
            "lag {lag}: {c} against {}",
            direct / 37.0
        );
    }
}

#[test]
fn inefficiency_of_an_autoregression_is_its_closed_form() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(2);
    for phi in [0.0, 0.5, 0.9, 0.95] {
        let truth = (1.0 + phi) / (1.0 - phi);
        let series = autoregression(phi, 200_000, &mut random);
        let found = integrated_autocorrelation(&[&series]).unwrap().inefficiency;
        assert!(
            (found / truth - 1.0).abs() < 0.06,
            "phi {phi}: {found} against {truth}"
        );
    }
}

/// Short series, as real runs are: the mean of n = N/g over many of them, against the truth.
#[test]
fn effective_samples_of_short_series_are_right_on_average() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(3);
    for (phi, count) in [(0.3, 301), (0.7, 301), (0.85, 301), (0.9, 600)] {
        let truth = count as f64 * (1.0 - phi) / (1.0 + phi);
        let sets = 400;
        let mean = (0..sets)
            .map(|_| {
                let series = autoregression(phi, count, &mut random);
                integrated_autocorrelation(&[&series])
                    .unwrap()
                    .effective_samples(count)
            })
            .sum::<f64>()
            / f64::from(sets);
        assert!(
            (mean / truth - 1.0).abs() < 0.10,
            "phi {phi}: n {mean} against {truth}"
        );
    }
}

/// The error of a mean covers the truth as a normal error should, 68 % of the time, from correlated series.
#[test]
fn error_of_a_mean_covers_the_truth() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(4);
    let sets = 1000;
    let mut covered = [0; 2];
    for _ in 0..sets {
        let series = autoregression(0.8, 480, &mut random);
        let found = integrated_autocorrelation(&[&series]).unwrap();
        let mean = series.iter().sum::<f64>() / 480.0;
        let error = (found.variance / found.effective_samples(480)).sqrt();
        covered[0] += i32::from(mean.abs() < error);
        let means: Vec<f64> = series.chunks(16).map(|c| c.iter().sum::<f64>() / 16.0).collect();
        let blocks = weighted_block_mean(&means, &[16.0; 30], None).unwrap();
        covered[1] += i32::from(blocks.value.abs() < blocks.error);
    }
    for covered in covered {
        assert!(
            (640..=720).contains(&covered),
            "{covered} of {sets}, expected 683"
        );
    }
}

/// Flyvbjerg and Petersen's plateau for an autoregression is sqrt(g/N).
#[test]
fn blocking_reaches_the_plateau() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(5);
    let series = autoregression(0.8, 1 << 17, &mut random);
    let truth = (9.0 / f64::from(1 << 17)).sqrt();
    let level = blocking_levels(&series)
        .into_iter()
        .find(|l| l.block_length == 256)
        .unwrap();
    assert!(
        (level.error - truth).abs() < 3.0 * level.uncertainty,
        "{level:?} against {truth}"
    );
}

/// By hand from the definition (Gelman et al., Bayesian Data Analysis, section 11.4): halves (1, 2, 3) and (2, 3, 7),
/// W = (1 + 7)/2 = 4, B/n = (2 - 4)^2/2 = 2, R-hat^2 = (2/3 x 4 + 2)/4 = 7/6.
#[test]
fn split_r_hat_is_the_textbook_value() {
    let found = split_r_hat(&[1.0, 2.0, 3.0, 2.0, 3.0, 7.0]).unwrap();
    assert!((found - (7.0_f64 / 6.0).sqrt()).abs() < 1e-14);
    let odd = split_r_hat(&[1.0, 2.0, 3.0, 1e9, 2.0, 3.0, 7.0]).unwrap();
    assert!(
        (odd - found).abs() < 1e-14,
        "the middle value of an odd series is left out"
    );
    assert_eq!(split_r_hat(&[1.0; 10]), None);
    assert_eq!(split_r_hat(&[1.0, 2.0, 3.0]), None);
}

/// The jackknife of a mean is the textbook standard error: survival of the control group of mice in Efron and Tibshirani,
/// An Introduction to the Bootstrap, table 2.1, mean 56.22 days, standard error 14.14 (table from memory).
#[test]
fn jackknife_of_a_mean_is_its_standard_error() {
    let x: [f64; 9] = [52.0, 104.0, 146.0, 10.0, 51.0, 30.0, 40.0, 27.0, 46.0];
    let leave_out = |b: usize| Some(vec![(x.iter().sum::<f64>() - x[b]) / 8.0]);
    let error = block_jackknife(9, leave_out).unwrap()[[0, 0]].sqrt();
    assert!((error - 14.14).abs() < 0.03, "{error}");
    let mean = x.iter().sum::<f64>() / 9.0;
    let squares: f64 = x.iter().map(|v| (v - mean).powi(2)).sum();
    assert!((mean - 56.22).abs() < 0.005 && (error - (squares / 72.0).sqrt()).abs() < 1e-12);
}

/// Cuts a planted transient, and cuts next to nothing of stationary series.
#[test]
fn equilibration_cut_removes_transients_alone() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(6);
    let edges: Vec<usize> = (0..=50).map(|b| 16 * b).collect();
    let sets = 300;
    let (mut cut_frames, mut found, mut shift) = (0, 0, 0.0);
    for _ in 0..sets {
        let mut series = autoregression(0.8, 800, &mut random);
        cut_frames += equilibration_cut(&series, &edges);
        for (t, x) in series.iter_mut().enumerate() {
            *x += 6.0 * (-(t as f64) / 40.0).exp();
        }
        let cut = equilibration_cut(&series, &edges);
        found += i32::from(cut >= 32);
        shift += series[cut..].iter().sum::<f64>() / (800 - cut) as f64;
    }
    assert!(
        cut_frames < sets as usize * 800 / 20,
        "{cut_frames} frames cut of stationary series"
    );
    assert!(found > sets * 95 / 100, "{found} of {sets} transients found");
    // One standard error of such a mean is sqrt(9/800) = 0.106.
    assert!((shift / f64::from(sets)).abs() < 0.106, "mean shift {shift}");
}

/// Pooled block means give back the inefficiency of the frames behind them, and their correlation.
#[test]
fn pooled_blocks_give_the_long_run_variance() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(7);
    for (phi, frames, count) in [(0.5, 16, 19), (0.8, 16, 19), (0.9, 16, 40), (0.9, 4, 100)] {
        let truth = (1.0 + phi) / (1.0 - phi) / f64::from(frames);
        let (mut ratio, mut sets) = (0.0, 0);
        for _ in 0..40 {
            let items = 25;
            let columns: Vec<Vec<f64>> = (0..items)
                .map(|_| autoregression(phi, frames as usize * count, &mut random))
                .collect();
            let means = ndarray::Array2::from_shape_fn((count, items), |(b, i)| {
                columns[i][b * frames as usize..(b + 1) * frames as usize]
                    .iter()
                    .sum::<f64>()
                    / f64::from(frames)
            });
            let pooled = pooled_block_correlation(&[means.view()], &vec![1.0; items], items).unwrap();
            ratio += pooled[0].long_run / truth;
            sets += 1;
        }
        ratio /= f64::from(sets);
        assert!(
            (ratio - 1.0).abs() < 0.08,
            "phi {phi}, blocks of {frames}: {ratio}"
        );
    }
}
