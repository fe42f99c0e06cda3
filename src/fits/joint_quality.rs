//! How well one bare plate passes through all runs of a sheet, and what verdict that leaves.

use nalgebra::DMatrix;
use statrs::distribution::{ChiSquared, ContinuousCDF};

use super::Verdict;
use super::joint_likelihood::{JointFit, JointModel};
use super::lack_of_fit;
use super::mode_verdict::Judgement;
use super::plate_likelihood::{LikelihoodFit, ModelPoint};
use crate::estimates::Tension;

/// What a joint fit is called in a quantity's method.
pub(super) const METHOD: &str = "heights and cell fluctuations, joint box-scsa";

/// A lack of fit less probable than this, over all runs or cells together, makes the values weak.
const ACCEPTED_PROBABILITY: f64 = 0.01;

/// A value from several runs is good when at least this share of them is.
const GOOD_SHARE: f64 = 0.75;

/// Probability of the largest lack of fit among the runs' heights, were the plate right: that of the least of n probabilities.
/// `None` where no run has enough modes to tell.
fn heights(model: &JointModel<'_>, fit: &JointFit) -> Option<f64> {
    let share = (model.size() as f64 / model.runs.len() as f64).ceil() as usize;
    let of_runs: Vec<f64> = model
        .runs
        .iter()
        .zip(&fit.points)
        .filter_map(|(run, point)| {
            let likelihood = LikelihoodFit {
                parameters: vec![0.0; share],
                point: ModelPoint {
                    ln_power: point.ln_power.clone(),
                    derivatives: DMatrix::zeros(point.ln_power.len(), 0),
                },
                deviance: 0.0,
            };
            lack_of_fit::probability(&likelihood, run.samples())
        })
        .collect();
    let least = of_runs.iter().copied().reduce(f64::min)?;
    Some(1.0 - (1.0 - least).powi(of_runs.len() as i32))
}

/// Probability of a deviance of the cells as large, and how many cells there are. `None` without a cell.
fn cells(fit: &JointFit) -> Option<(f64, usize)> {
    let cells: Vec<_> = fit
        .points
        .iter()
        .filter_map(|point| point.cell.as_ref())
        .collect();
    let deviance: f64 = cells.iter().map(|cell| cell.residuals.norm_squared()).sum();
    let terms: usize = cells.iter().map(|cell| cell.residuals.len()).sum();
    Some((ChiSquared::new(terms as f64).ok()?.sf(deviance), cells.len()))
}

/// What was fitted and how well, for the quantities' method.
pub(super) fn describe(model: &JointModel<'_>, fit: &JointFit) -> String {
    let modes: usize = model.runs.iter().map(|run| run.samples().len()).sum();
    let temperatures = || model.runs.iter().map(|run| run.plate.run.temperature);
    let lowest = temperatures().fold(f64::INFINITY, f64::min);
    let highest = temperatures().fold(0.0, f64::max);
    let of = |probability: Option<f64>| probability.map_or("none".to_owned(), |p| format!("{p:.2}"));
    let (cell_probability, count) = cells(fit).map_or((None, 0), |(p, count)| (Some(p), count));
    let drift = if model.slopes {
        "kappa and Y linear in temperature"
    } else {
        "kappa and Y the same at every temperature"
    };
    format!(
        "{METHOD}, {} runs, {lowest:.0} to {highest:.0} K, {modes} modes, {count} cells; {drift}; probability of a lack of \
         fit as large: heights {}, cells {}",
        model.runs.len(),
        of(heights(model, fit)),
        of(cell_probability)
    )
}

/// The verdict of all joint values: good when three quarters of the sheet's runs are, and the plate passes through the data.
pub(super) fn judge(
    model: &JointModel<'_>,
    fit: &JointFit,
    runs: &[Judgement],
    excluded: &[String],
) -> Judgement {
    let mut judgement = Judgement {
        verdict: Verdict::Good,
        reasons: Vec::new(),
    };
    let good = runs.iter().filter(|run| run.verdict == Verdict::Good).count();
    if (good as f64) < GOOD_SHARE * runs.len() as f64 {
        let reason = format!(
            "{good} of {} runs are good, three quarters are needed",
            runs.len()
        );
        judgement.at_most(Verdict::Weak, reason);
    }
    for reason in excluded {
        judgement.remark(format!("left out {reason}"));
    }
    if heights(model, fit).is_some_and(|probability| probability < ACCEPTED_PROBABILITY) {
        judgement.at_most(
            Verdict::Weak,
            "one bare plate does not pass through the heights of all runs: potentials, tensions or windows differ",
        );
    }
    if cells(fit).is_some_and(|(probability, _)| probability < ACCEPTED_PROBABILITY) {
        judgement.at_most(
            Verdict::Weak,
            "the cells do not fluctuate as the plate that fits the heights: check the barostat and the held tension",
        );
    }
    if !model.slopes {
        judgement.remark(
            "kappa and Y are held fixed over temperature: slopes need three temperatures a factor of two apart",
        );
    }
    if let Some(poisson) = model.held_poisson
        && model
            .runs
            .iter()
            .any(super::joint_run::JointRun::feels_poisson_ratio)
    {
        judgement.remark(format!(
            "no cell tells Poisson's ratio, taken as {poisson} where strains are clamped"
        ));
    }
    if model
        .runs
        .iter()
        .any(|run| run.plate.run.tension == Tension::Assumed)
    {
        judgement.remark("tension taken as 0 N/m where neither the pipeline nor a thermo series states it");
    }
    judgement
}
