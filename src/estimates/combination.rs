//! Sums over modes, with errors from the spread of their block values.

use ndarray::Array2;

use super::ModeEstimate;
use crate::statistics::weighted_block_mean;

/// A weighted sum of mode powers and its standard error.
pub(super) struct Combination {
    pub(super) value: f64,
    pub(super) error: f64,
}

/// sum_m c_m <|h_m|^2> for `coefficients` (mode index, c_m).
///
/// The error is that of the mean of the sum's block values. Their correlation from block to block is the modes'
/// `block_correlation`, weighted by each mode's share c^2 <|h|^2>^2 of the variance: pooled over many modes it is far less noisy
/// than what one sum's few blocks tell. With a single block the error is that of independent Gamma means.
pub(super) fn combine_modes(
    modes: &[ModeEstimate],
    block_powers: &Array2<f64>,
    block_frames: &[usize],
    coefficients: &[(usize, f64)],
) -> Combination {
    let value = coefficients.iter().map(|&(m, c)| c * modes[m].power).sum();
    let share = |&(m, c): &(usize, f64)| (c * modes[m].power).powi(2);
    let total: f64 = coefficients.iter().map(share).sum();
    let correlation = if total > 0.0 {
        coefficients
            .iter()
            .map(|mode| share(mode) * modes[mode.0].block_correlation)
            .sum::<f64>()
            / total
    } else {
        1.0
    };
    let sums: Vec<f64> = block_powers
        .rows()
        .into_iter()
        .map(|row| coefficients.iter().map(|&(m, c)| c * row[m]).sum())
        .collect();
    let weights: Vec<f64> = block_frames.iter().map(|&f| f as f64).collect();
    let error = weighted_block_mean(&sums, &weights, Some(correlation)).map_or_else(
        || {
            let variances = coefficients
                .iter()
                .map(|mode| share(mode) / modes[mode.0].effective_samples);
            variances.sum::<f64>().sqrt()
        },
        |mean| mean.error,
    );
    Combination { value, error }
}
