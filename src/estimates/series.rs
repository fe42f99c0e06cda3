//! A per-frame series becomes an estimate.

use super::{Estimate, Tension};
use crate::statistics::{Autocorrelation, integrated_autocorrelation, split_r_hat};

/// Mean of a per-frame series with its autocorrelation-aware error: variance g/N.
///
/// A constant series is known exactly: error 0, every frame a sample.
#[must_use]
pub fn estimate_series(series: &[f64]) -> Option<Estimate> {
    estimate_with_autocorrelation(series).map(|(estimate, _)| estimate)
}

/// As [`estimate_series`], with the autocorrelation behind the error (`None` for a constant series).
pub(super) fn estimate_with_autocorrelation(series: &[f64]) -> Option<(Estimate, Option<Autocorrelation>)> {
    if series.len() < 2 {
        return None;
    }
    let value = series.iter().sum::<f64>() / series.len() as f64;
    let autocorrelation = integrated_autocorrelation(&[series]);
    let effective_samples = autocorrelation
        .as_ref()
        .map_or(series.len() as f64, |a| a.effective_samples(series.len()));
    let error = autocorrelation
        .as_ref()
        .map_or(0.0, |a| (a.variance / effective_samples).sqrt());
    let split_r_hat = autocorrelation.as_ref().and_then(|_| split_r_hat(series));
    let estimate = Estimate {
        value,
        error,
        effective_samples,
        split_r_hat,
    };
    Some((estimate, autocorrelation))
}

/// Mean tension of a thermo series in eV/A^2, positive when it stretches; `None` for fewer than two rows.
#[must_use]
pub fn tension_from_series(series: &[f64]) -> Option<Tension> {
    let estimate = estimate_series(series)?;
    Some(Tension::Measured {
        value: estimate.value,
        error: estimate.error,
    })
}
