//! How many independent samples a mode's mean holds: from its series where kept, else from block means.
//!
//! Beyond the long waves only block sums are kept. With F frames a block, block means y_b of |h|^2 have the long-run variance
//! L = F^-1 g sigma^2, sigma^2 being the variance of a single frame's |h|^2, so g = F L/sigma^2 whatever the correlation within
//! and between blocks, underdamped oscillation and aliasing included. One mode's handful of blocks would give g to no better than
//! a factor; L and sigma^2 are pooled over neighbours in |q|, each in units of its own mean, whose relaxation is nearly its own.

use ndarray::{Array2, ArrayView2, Axis, Slice};
use num_complex::Complex64;

use super::mode_blocks::ModeBlocks;
use crate::statistics::{
    PooledBlocks, integrated_autocorrelation, neighbour_mean, pooled_block_correlation, split_r_hat,
};

/// Neighbours on either side that a mode's block statistics are pooled with: 25 modes tell g to some 10 % from 19 blocks.
const NEIGHBOURS: usize = 12;

/// What a mode's fluctuations say about its relaxation.
#[derive(Clone, Copy, Debug)]
pub(super) struct ModeStatistics {
    /// Statistical inefficiency of |h|^2, at least 1.
    pub(super) inefficiency: f64,
    /// Statistical inefficiency of h itself, at least 1.
    pub(super) height_inefficiency: f64,
    /// Long-run over plain variance of the block means of |h|^2.
    pub(super) block_correlation: f64,
    /// Split R-hat of |h|^2, where its series is kept.
    pub(super) split_r_hat: Option<f64>,
}

/// Statistics of every mode in `blocks`' order; `order` and `heights` as in [`ModeBlocks::gather`].
pub(super) fn mode_statistics(
    blocks: &ModeBlocks,
    heights: &ArrayView2<'_, Complex64>,
    order: &[usize],
) -> Vec<ModeStatistics> {
    let pooled = pooled_statistics(blocks);
    let block_frames = blocks.frames.iter().copied().max().unwrap_or(1);
    let own: Vec<Option<ModeStatistics>> = order
        .iter()
        .map(|&mode| {
            (mode < heights.ncols()).then(|| series_statistics(heights.column(mode).to_vec(), block_frames))
        })
        .collect();
    // A single block says nothing of g: the fastest of the long waves is then the nearest guide.
    let guide = own.iter().flatten().copied().last().unwrap_or(ModeStatistics {
        inefficiency: 1.0,
        height_inefficiency: 1.0,
        block_correlation: 1.0,
        split_r_hat: None,
    });
    own.into_iter()
        .enumerate()
        .map(|(place, own)| own.unwrap_or_else(|| pooled.as_ref().map_or(guide, |p| p[place])))
        .collect()
}

fn series_statistics(h: Vec<Complex64>, block_frames: usize) -> ModeStatistics {
    let power: Vec<f64> = h.iter().map(Complex64::norm_sqr).collect();
    let (real, imaginary): (Vec<f64>, Vec<f64>) = h.into_iter().map(|h| (h.re, h.im)).unzip();
    let of_power = integrated_autocorrelation(&[&power]);
    let of_height = integrated_autocorrelation(&[&real, &imaginary]);
    ModeStatistics {
        inefficiency: of_power.as_ref().map_or(1.0, |a| a.inefficiency),
        height_inefficiency: of_height.map_or(1.0, |a| a.inefficiency),
        block_correlation: of_power.map_or(1.0, |a| a.block_correlation(block_frames)),
        split_r_hat: split_r_hat(&power),
    }
}

/// Every mode's statistics from its and its neighbours' block means; `None` for fewer than two whole blocks.
fn pooled_statistics(blocks: &ModeBlocks) -> Option<Vec<ModeStatistics>> {
    let whole = Slice::from(..blocks.whole_blocks());
    let first_blocks = |of: &Array2<f64>| of.slice_axis(Axis(0), whole).to_owned();
    let frames = *blocks.frames.first()? as f64;
    let power = blocks.mean(&blocks.power);
    let scale: Vec<f64> = power.iter().map(|&p| if p > 0.0 { p } else { 1.0 }).collect();
    let amplitude: Vec<f64> = scale.iter().map(|p| p.sqrt()).collect();
    let static_power: Vec<f64> = blocks
        .mean(&blocks.real)
        .iter()
        .zip(blocks.mean(&blocks.imaginary))
        .map(|(re, im)| re * re + im * im)
        .collect();
    let of_power = pooled_block_correlation(&[first_blocks(&blocks.power).view()], &scale, NEIGHBOURS)?;
    let (real, imaginary) = (first_blocks(&blocks.real), first_blocks(&blocks.imaginary));
    let of_height = pooled_block_correlation(&[real.view(), imaginary.view()], &amplitude, NEIGHBOURS)?;
    // Single-frame variances about the sample mean, in units of the mean power (squared).
    let per_mode =
        |f: &dyn Fn(usize) -> f64| neighbour_mean(&(0..power.len()).map(f).collect::<Vec<_>>(), NEIGHBOURS);
    let power_variance = per_mode(&|m| (blocks.power_squared[m] - power[m].powi(2)) / scale[m].powi(2));
    let height_variance = per_mode(&|m| (power[m] - static_power[m]) / scale[m]);
    let inefficiency = |pooled: &PooledBlocks, variance: f64| {
        // The variance about the sample mean is short of the true one by the mean's own, L/B.
        let single = variance + pooled.long_run / blocks.frames.len() as f64;
        if single > 0.0 {
            (frames * pooled.long_run / single).max(1.0)
        } else {
            1.0
        }
    };
    let statistics = (0..power.len()).map(|m| ModeStatistics {
        inefficiency: inefficiency(&of_power[m], power_variance[m]),
        height_inefficiency: inefficiency(&of_height[m], height_variance[m]),
        block_correlation: of_power[m].correlation,
        split_r_hat: None,
    });
    Some(statistics.collect())
}
