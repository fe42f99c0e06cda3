//! How well a joint fit knows its parameters, as [`super::plate_covariance`] does for one run.

use nalgebra::{DMatrix, DVector};
use ndarray::Axis;

use super::joint_likelihood::{JointFit, JointModel};
use super::joint_run::{JointRun, RunPoint};
use super::plate_covariance::{FEWEST_BLOCKS, PlateCovariance, inverse, joined};

/// Covariance of the parameters. The inverse Fisher information is that of heights and cells; in the jackknife the heights' part of
/// it is replaced by what leaving out each block of a run says, one scoring step from the maximum, runs being independent. The
/// cells' part stays: their covariance is not kept block by block. Errors of measured tensions add to both.
///
/// `None` where the data do not determine the parameters.
pub(super) fn joint_covariance(model: &JointModel<'_>, fit: &JointFit) -> Option<PlateCovariance> {
    let size = model.size();
    let mut information = DMatrix::zeros(size, size);
    let mut spread = DMatrix::zeros(size, size);
    let mut tensions = Vec::new();
    for (run, point) in model.runs.iter().zip(&fit.points) {
        let (bare, chain) = model.bare(&fit.parameters, run.plate.run.temperature)?;
        let by_parameters = &point.by_bare * &chain;
        let mut weighted = by_parameters.clone();
        for (mut row, sample) in weighted.row_iter_mut().zip(run.samples()) {
            row *= sample.effective_samples;
        }
        let of_heights = weighted.tr_mul(&by_parameters);
        spread += score_spread(run, point, &weighted).unwrap_or_else(|| of_heights.clone());
        information += of_heights;
        if let Some(cell) = &point.cell {
            let of_cell = chain.tr_mul(&(&cell.information * &chain));
            spread += &of_cell;
            information += of_cell;
        }
        let error = run.plate.run.tension.error();
        if error > 0.0 {
            tensions.push(weighted.tr_mul(&run.by_tension(&bare, point)?) * error);
        }
    }
    let inverse = inverse(&information)?;
    let mut of_tensions = DMatrix::zeros(size, size);
    for tension in tensions {
        let shift = &inverse * tension;
        of_tensions += &shift * shift.transpose();
    }
    Some(PlateCovariance {
        jackknife: Some(&inverse * spread * &inverse + &of_tensions),
        fisher: inverse + of_tensions,
        tension: None,
    })
}

/// Variance of the score of a run's heights by the weighted jackknife over its blocks; `None` with too few of them.
fn score_spread(run: &JointRun<'_>, point: &RunPoint, weighted: &DMatrix<f64>) -> Option<DMatrix<f64>> {
    let powers = run.plate.block_powers(run.samples().len());
    let (powers, frames) = joined(&powers, &run.plate.run.spectrum.block_frames);
    let total: f64 = frames.iter().sum();
    if frames.len() < FEWEST_BLOCKS || total <= 0.0 {
        return None;
    }
    let mut mean = vec![0.0; run.samples().len()];
    for (row, frames) in powers.axis_iter(Axis(0)).zip(&frames) {
        for (mean, power) in mean.iter_mut().zip(row) {
            *mean += frames / total * power;
        }
    }
    let mut spread = DMatrix::zeros(weighted.ncols(), weighted.ncols());
    for (row, frames) in powers.axis_iter(Axis(0)).zip(&frames) {
        let deviations = row.iter().zip(&mean).zip(point.ln_power.iter());
        let deviation = DVector::from_iterator(
            mean.len(),
            deviations.map(|((power, mean), ln_power)| (power - mean) / ln_power.exp()),
        );
        let score = weighted.tr_mul(&deviation);
        let share = frames / total;
        spread += &score * score.transpose() * (share * share / (1.0 - share));
    }
    Some(spread)
}
