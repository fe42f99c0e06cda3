//! Every mode of a history becomes an estimate.

use ndarray::ArrayView2;
use num_complex::Complex64;

use super::mode_blocks::ModeBlocks;
use super::mode_statistics::{ModeStatistics, mode_statistics};
use super::{EstimateError, ModeEstimate, SpectrumEstimate, history_view::HistoryView};
use crate::sheet::ModeSet;
use crate::theory::PlaneCell;

/// A mean h_q that chance explains with less than this probability is a static ripple.
const STATIC_SIGNIFICANCE: f64 = 1e-3;

/// The spectrum of the blocks in `view` on the mean `cell`; `heights` are the long waves of the same frames.
pub(super) fn estimate_spectrum(
    view: &HistoryView<'_>,
    heights: &ArrayView2<'_, Complex64>,
    modes: &ModeSet,
    cell: PlaneCell,
    frame_interval_ps: Option<f64>,
) -> Result<SpectrumEstimate, EstimateError> {
    let order = order_by_length(&modes.integers, &cell);
    let mut blocks = ModeBlocks::gather(view, heights, &order)?;
    let statistics = mode_statistics(&blocks, heights, &order);
    let frames = blocks.total_frames() as f64;
    let power = blocks.mean(&blocks.power);
    let real = blocks.mean(&blocks.real);
    let imaginary = blocks.mean(&blocks.imaginary);
    let mut estimates = Vec::with_capacity(order.len());
    for (place, &mode) in order.iter().enumerate() {
        let ModeStatistics {
            inefficiency,
            height_inefficiency,
            block_correlation,
            split_r_hat,
        } = statistics[place];
        let mean = Complex64::new(real[place], imaginary[place]);
        let height_samples = frames / height_inefficiency;
        let static_removed = is_static(mean.norm_sqr(), power[place], height_samples);
        let mut estimate = ModeEstimate {
            integers: modes.integers[mode],
            q: cell.wave_vector(modes.integers[mode]),
            length: length(&cell, modes.integers[mode]),
            power: power[place],
            effective_samples: frames / inefficiency,
            relaxation_ps: frame_interval_ps.map(|interval| 0.5 * inefficiency * interval),
            zone_weight: modes.zone_weight[mode],
            split_r_hat,
            block_correlation,
            static_power: mean.norm_sqr(),
            static_removed,
        };
        if static_removed {
            let rescale = height_samples / (height_samples - 1.0);
            estimate.power = (power[place] - mean.norm_sqr()) * rescale;
            remove_static(&mut blocks, place, mean, rescale);
        }
        estimates.push(estimate);
    }
    Ok(SpectrumEstimate::new(
        cell,
        estimates,
        blocks.power,
        blocks.frames,
    ))
}

/// Indices of the modes by |q| on `cell`, ties by their integers.
pub(super) fn order_by_length(integers: &[[i32; 2]], cell: &PlaneCell) -> Vec<usize> {
    let lengths: Vec<f64> = integers.iter().map(|&m| length(cell, m)).collect();
    let mut order: Vec<usize> = (0..integers.len()).collect();
    order.sort_by(|&i, &j| {
        lengths[i]
            .total_cmp(&lengths[j])
            .then_with(|| integers[i].cmp(&integers[j]))
    });
    order
}

/// |q| of a mode on `cell`, in 1/A.
pub(super) fn length(cell: &PlaneCell, integers: [i32; 2]) -> f64 {
    let [q1, q2] = cell.wave_vector(integers);
    q1.hypot(q2)
}

/// Whether the square of a mode's mean is more than n samples of a fluctuating h explain at p < 0.001.
///
/// For n independent complex Gaussian h of mean zero, |mean h|^2 over the mean of |h|^2 is Beta(1, n - 1), so
/// p = (1 - ratio)^(n - 1) exactly (both are ratios of Gamma variates: n |mean|^2 to the whole sum).
fn is_static(static_power: f64, power: f64, samples: f64) -> bool {
    power > 0.0
        && samples > 2.0
        && (1.0 - static_power / power).max(0.0).powf(samples - 1.0) < STATIC_SIGNIFICANCE
}

/// Turns a mode's block means of |h|^2 into those of |h - mean|^2 n/(n - 1).
fn remove_static(blocks: &mut ModeBlocks, place: usize, mean: Complex64, rescale: f64) {
    for b in 0..blocks.frames.len() {
        let cross = mean.re * blocks.real[[b, place]] + mean.im * blocks.imaginary[[b, place]];
        let power = blocks.power[[b, place]] - 2.0 * cross + mean.norm_sqr();
        blocks.power[[b, place]] = power * rescale;
    }
}
