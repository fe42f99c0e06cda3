//! How well a likelihood fit of mode powers knows its parameters.
//!
//! Two estimates, because each fails where the other holds. The inverse Fisher information sum_q n_q (d ln m)(d ln m)^T trusts
//! the effective samples n of each mode. The jackknife over blocks of time trusts no n, but wants many blocks: it refits
//! without each block by one scoring step from the maximum (Efron and Tibshirani, An Introduction to the Bootstrap,
//! ch. 11). Of every quantity's two variances the larger one is used.

use nalgebra::{DMatrix, DVector};
use ndarray::{Array2, Axis};

use super::plate_likelihood::{LikelihoodFit, ModeSample};

/// Neighbouring blocks are joined pairwise as long as this many are left: longer blocks are less correlated.
const LEAST_BLOCKS: usize = 16;

/// Fewer blocks than this say nothing about a variance.
pub(super) const FEWEST_BLOCKS: usize = 5;

/// Covariances of the parameters of a [`LikelihoodFit`].
#[derive(Clone, Debug, PartialEq)]
pub struct PlateCovariance {
    /// Inverse Fisher information.
    pub fisher: DMatrix<f64>,
    /// Block jackknife; `None` with too few blocks.
    pub jackknife: Option<DMatrix<f64>>,
    /// Change of the parameters per unit of the tension held, where that was measured, and its standard error in eV/A^2.
    pub tension: Option<(DVector<f64>, f64)>,
}

impl PlateCovariance {
    /// Of the fit `fit` to `samples`, whose block means are `block_powers` (blocks, modes) over `block_frames` frames each.
    /// `by_tension` is the derivative of ln m of each mode by the tension held, with the tension's standard error.
    ///
    /// `None` where the data do not determine the parameters at all.
    #[must_use]
    pub fn new(
        fit: &LikelihoodFit,
        samples: &[ModeSample],
        block_powers: &Array2<f64>,
        block_frames: &[usize],
        by_tension: Option<(&[f64], f64)>,
    ) -> Option<Self> {
        let derivatives = &fit.point.derivatives;
        let mut weighted = derivatives.clone();
        for (mut row, sample) in weighted.row_iter_mut().zip(samples) {
            row *= sample.effective_samples;
        }
        let fisher = inverse(&weighted.tr_mul(derivatives))?;
        let jackknife = jackknife(fit, samples, &weighted, &fisher, block_powers, block_frames);
        let tension = by_tension.map(|(slopes, error)| {
            let slopes = DVector::from_column_slice(slopes);
            (-(&fisher * weighted.tr_mul(&slopes)), error)
        });
        Some(Self {
            fisher,
            jackknife,
            tension,
        })
    }

    /// Variance of a quantity with gradient `gradient` by the parameters and `by_tension` by the tension at fixed parameters.
    #[must_use]
    pub fn variance(&self, gradient: &DVector<f64>, by_tension: f64) -> f64 {
        let of = |covariance: &DMatrix<f64>| (covariance * gradient).dot(gradient);
        let spread = self.jackknife.as_ref().map_or(0.0, of);
        of(&self.fisher).max(spread) + self.tension_shift(gradient, by_tension).powi(2)
    }

    /// Covariance of quantities whose gradients are the columns of `gradients`: Fisher's correlations between the larger
    /// standard errors, and the tension's share.
    #[must_use]
    pub fn of_quantities(&self, gradients: &[DVector<f64>]) -> Array2<f64> {
        let fisher = |i: usize, j: usize| (&self.fisher * &gradients[i]).dot(&gradients[j]);
        let shift = |i: usize| self.tension_shift(&gradients[i], 0.0);
        let inflation: Vec<f64> = (0..gradients.len())
            .map(|i| ((self.variance(&gradients[i], 0.0) - shift(i).powi(2)) / fisher(i, i)).sqrt())
            .collect();
        Array2::from_shape_fn((gradients.len(), gradients.len()), |(i, j)| {
            fisher(i, j) * inflation[i] * inflation[j] + shift(i) * shift(j)
        })
    }

    /// Change of a quantity for one standard error of the tension.
    fn tension_shift(&self, gradient: &DVector<f64>, by_tension: f64) -> f64 {
        self.tension
            .as_ref()
            .map_or(0.0, |(slopes, error)| (slopes.dot(gradient) + by_tension) * error)
    }
}

/// Weighted jackknife: leaving out the share w of all frames moves the parameters by -w/(1 - w) a, with a the scoring step
/// of the block's own deviation, and their variance is the sum of (1 - w) times these moves squared.
fn jackknife(
    fit: &LikelihoodFit,
    samples: &[ModeSample],
    weighted: &DMatrix<f64>,
    fisher: &DMatrix<f64>,
    block_powers: &Array2<f64>,
    block_frames: &[usize],
) -> Option<DMatrix<f64>> {
    let (powers, frames) = joined(block_powers, block_frames);
    let total: f64 = frames.iter().sum();
    if frames.len() < FEWEST_BLOCKS || total <= 0.0 {
        return None;
    }
    let mut mean = vec![0.0; samples.len()];
    for (block, row) in powers.axis_iter(Axis(0)).enumerate() {
        for (mean, power) in mean.iter_mut().zip(row) {
            *mean += frames[block] / total * power;
        }
    }
    let mut covariance = DMatrix::zeros(fisher.nrows(), fisher.ncols());
    for (block, row) in powers.axis_iter(Axis(0)).enumerate() {
        let deviation = DVector::from_iterator(
            samples.len(),
            row.iter()
                .zip(&mean)
                .zip(fit.point.ln_power.iter())
                .map(|((s, mean), ln_m)| (s - mean) / ln_m.exp()),
        );
        let step = fisher * weighted.tr_mul(&deviation);
        let share = frames[block] / total;
        covariance += &step * step.transpose() * (share * share / (1.0 - share));
    }
    Some(covariance)
}

/// Block means and frames after joining neighbours pairwise.
pub(super) fn joined(block_powers: &Array2<f64>, block_frames: &[usize]) -> (Array2<f64>, Vec<f64>) {
    let mut powers = block_powers.clone();
    let mut frames: Vec<f64> = block_frames.iter().map(|&frames| frames as f64).collect();
    while frames.len() >= 2 * LEAST_BLOCKS {
        let pairs = frames.len().div_ceil(2);
        let sums: Vec<f64> = frames.chunks(2).map(|pair| pair.iter().sum()).collect();
        powers = Array2::from_shape_fn((pairs, powers.ncols()), |(pair, mode)| {
            let of = |block: usize| {
                frames
                    .get(block)
                    .map_or(0.0, |frames| frames * powers[[block, mode]])
            };
            (of(2 * pair) + of(2 * pair + 1)) / sums[pair]
        });
        frames = sums;
    }
    (powers, frames)
}

/// Inverse of a positive matrix, scaled to a unit diagonal first: its parameters have different units.
pub(super) fn inverse(information: &DMatrix<f64>) -> Option<DMatrix<f64>> {
    let scale = information.diagonal().map(|entry| 1.0 / entry.sqrt());
    if scale.iter().any(|scale| !scale.is_finite()) {
        return None;
    }
    let scaled = DMatrix::from_fn(information.nrows(), information.ncols(), |i, j| {
        information[(i, j)] * scale[i] * scale[j]
    });
    let inverse = scaled.cholesky()?.inverse();
    Some(DMatrix::from_fn(inverse.nrows(), inverse.ncols(), |i, j| {
        inverse[(i, j)] * scale[i] * scale[j]
    }))
}
