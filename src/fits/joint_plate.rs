//! The bare plate of a sheet from all its runs together: heights and cell fluctuations through the box SCSA.

use rayon::prelude::*;

use super::cell_likelihood::CellSample;
use super::joint_covariance::joint_covariance;
use super::joint_likelihood::JointModel;
use super::joint_quality::{METHOD, describe, judge};
use super::joint_quantities::{NAMES, quantities};
use super::joint_run::JointRun;
use super::mode_verdict::Judgement;
use super::plate_run::{PlateRun, without_value};
use super::ripple_model::{RippleFit, RippleModel};
use super::window::{self, ChosenWindow};
use super::{Condition, Fit, FitOptions, Fitted, PlateModel, Verdict};
use crate::estimates::{SheetEstimates, Tension};

/// kappa, Y, b and Poisson's ratio of the bare plate, kappa and Y linear in temperature where the runs tell; by the likelihood of all
/// heights and cells ([`super::plate_likelihood`], `joint_likelihood`). Each run takes part in the window that its own fit chose.
///
/// A sheet with one run has no joint fit.
pub struct JointPlateFit;

/// Slopes in temperature need this many temperatures, the highest at least this many times the lowest.
const LEAST_TEMPERATURES: usize = 3;
const LEAST_SPREAD: f64 = 2.0;

/// Poisson's ratio where no cell tells it, in the middle of known sheets' 0.15 to 0.35: it then acts through clamped strains only.
const HELD_POISSON: f64 = 0.25;

impl Fit for JointPlateFit {
    fn name(&self) -> &'static str {
        "joint_plate"
    }

    fn fit(&self, sheet: &SheetEstimates, options: &FitOptions) -> Fitted {
        if options.plate != PlateModel::Rippled || sheet.runs.len() < 2 {
            return Fitted::default();
        }
        let mut excluded = Vec::new();
        let runs: Vec<PlateRun<'_>> = sheet
            .runs
            .iter()
            .filter_map(|run| {
                let plate =
                    PlateRun::new(run, options).filter(|plate| plate.modes.len() >= window::LEAST_MODES);
                let unknown = run.cell_is_fixed() && run.tension == Tension::Assumed;
                if plate.is_none() {
                    excluded.push(format!("{}: fewer than six modes", run.name));
                } else if unknown {
                    excluded.push(format!("{}: a fixed cell whose tension is unknown", run.name));
                }
                plate.filter(|_| !unknown)
            })
            .collect();
        fit_runs(&runs, &mut excluded, options).unwrap_or_else(|note| refused(&note, &excluded))
    }
}

/// A run with the fit of its heights alone, which chooses the window and the start.
struct Candidate<'a> {
    plate: &'a PlateRun<'a>,
    model: RippleModel<'a>,
    chosen: ChosenWindow<RippleFit>,
    judgement: Judgement,
}

fn candidate<'a>(plate: &'a PlateRun<'a>, options: &FitOptions) -> Result<Candidate<'a>, String> {
    let model = RippleModel::new(plate);
    let fit_first = |count: usize, near: Option<&RippleFit>| model.fit_first(count, near);
    let chosen = match options.window {
        Some([_, end]) => window::stated(&plate.lengths, end, fit_first),
        None => window::choose(&plate.lengths, fit_first),
    };
    let Some(chosen) = chosen else {
        return Err(format!("{}: no rippled plate fits its heights", plate.run.name));
    };
    let mut judgement = plate.judge(chosen.modes);
    if judgement.verdict == Verdict::Unusable {
        return Err(format!("{}: {}", plate.run.name, judgement.note()));
    }
    if !chosen.accepted {
        judgement.at_most(
            Verdict::Weak,
            "no window was found in which the plate passes through the heights",
        );
    }
    Ok(Candidate {
        plate,
        model,
        chosen,
        judgement,
    })
}

fn fit_runs(
    runs: &[PlateRun<'_>],
    excluded: &mut Vec<String>,
    options: &FitOptions,
) -> Result<Fitted, String> {
    let mut candidates = Vec::new();
    let found: Vec<Result<Candidate<'_>, String>> =
        runs.par_iter().map(|plate| candidate(plate, options)).collect();
    for result in found {
        match result {
            Ok(candidate) => candidates.push(candidate),
            Err(reason) => excluded.push(reason),
        }
    }
    if candidates.len() < 2 {
        return Err("fewer than two runs can take part in a joint fit".to_owned());
    }
    let start = start(&candidates);
    let judgements: Vec<Judgement> = candidates
        .iter()
        .map(|candidate| candidate.judgement.clone())
        .collect();
    let model = joint_model(candidates);
    let fit = model
        .fit(start)
        .ok_or("no one bare plate was found that fits all runs")?;
    let covariance = joint_covariance(&model, &fit).ok_or("the runs do not determine the bare plate")?;
    let judgement = judge(&model, &fit, &judgements, excluded);
    let method = describe(&model, &fit);
    Ok(quantities(&model, &fit, &covariance, &judgement, &method))
}

/// kappa, b and Y of the runs' own fits: geometric means, Y of those whose heights tell it.
fn start(candidates: &[Candidate<'_>]) -> [f64; 3] {
    let told: Vec<&Candidate<'_>> = candidates
        .iter()
        .filter(|candidate| candidate.chosen.fit.youngs_limit.is_none())
        .collect();
    let mean = |of: &[&Candidate<'_>], parameter: usize| {
        let values = of
            .iter()
            .map(|candidate| candidate.chosen.fit.likelihood.parameters[parameter]);
        values.sum::<f64>() / of.len() as f64
    };
    let all: Vec<&Candidate<'_>> = candidates.iter().collect();
    let ln_youngs = if told.is_empty() {
        mean(&all, 2)
    } else {
        mean(&told, 2)
    };
    [mean(&all, 0), mean(&all, 1), ln_youngs]
}

fn joint_model(candidates: Vec<Candidate<'_>>) -> JointModel<'_> {
    let mut temperatures: Vec<f64> = candidates
        .iter()
        .map(|candidate| candidate.plate.run.temperature)
        .collect();
    let mean_temperature = temperatures.iter().sum::<f64>() / temperatures.len() as f64;
    temperatures.sort_by(f64::total_cmp);
    temperatures.dedup();
    let runs: Vec<JointRun<'_>> = candidates
        .into_iter()
        .map(|candidate| JointRun::new(candidate.plate, candidate.model, candidate.chosen.modes))
        .collect();
    let cells = || runs.iter().filter_map(|run| run.cell.as_ref());
    let held_poisson = (!cells().any(CellSample::tells_poisson_ratio)).then_some(HELD_POISSON);
    let spread = temperatures[temperatures.len() - 1] / temperatures[0];
    JointModel {
        mean_temperature,
        slopes: temperatures.len() >= LEAST_TEMPERATURES && spread >= LEAST_SPREAD,
        held_poisson,
        runs,
    }
}

fn refused(note: &str, excluded: &[String]) -> Fitted {
    let note = std::iter::once(note)
        .chain(excluded.iter().map(String::as_str))
        .collect::<Vec<_>>()
        .join("; ");
    let bare = |&name: &(&'static str, &'static str)| {
        without_value(name, Condition::default(), METHOD, note.clone())
    };
    Fitted {
        quantities: NAMES.iter().map(bare).collect(),
        ..Fitted::default()
    }
}
