//! From the records of a sheet's runs to its estimates: reservations stated, replicas pooled.

use std::path::Path;

use super::held_tension::{HeldTension, settle};
use super::measure::MeasuredRun;
use super::plan::{RunPlan, SheetPlan};
use super::run_problem::RunProblem;
use super::stored_run::RunRecords;
use crate::estimates::{RunEstimates, RunFacts, SheetEstimates, Tension, pool};

/// What became of one run of the plan on its way to the estimates.
#[derive(Debug)]
pub struct RunAccount {
    /// Name of the run.
    pub run: String,
    /// Name under which its values stand: its own, or that of the run it is a replica of.
    pub pooled_as: String,
    /// Stated temperature, in K.
    pub temperature: f64,
    /// Frames kept of the files; 0 for a refused run.
    pub frames: usize,
    /// Its own estimates, before pooling, or why there are none.
    pub outcome: Result<RunEstimates, RunFault>,
    /// Things to know that do not touch the verdict.
    pub notes: Vec<String>,
    /// Things the user should act on.
    pub warnings: Vec<String>,
}

/// Why a run gives no values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum RunFault {
    /// Its input is wrong: the exit status says so.
    Refused(String),
    /// There is too little of it.
    TooShort(String),
}

impl RunFault {
    /// The reason, as a sentence.
    #[must_use]
    pub fn reason(&self) -> &str {
        match self {
            Self::Refused(reason) | Self::TooShort(reason) => reason,
        }
    }
}

impl RunAccount {
    /// Takes the pipeline's folder off the paths in every phrase.
    fn write_paths_from(&mut self, folder: &Path) {
        if folder.as_os_str().is_empty() {
            return;
        }
        let prefix = folder.join("").display().to_string();
        let relative = |text: &mut String| *text = text.replace(&prefix, "");
        self.notes.iter_mut().chain(&mut self.warnings).for_each(relative);
        match &mut self.outcome {
            Ok(estimates) => estimates.reservations.iter_mut().for_each(relative),
            Err(RunFault::Refused(reason) | RunFault::TooShort(reason)) => relative(reason),
        }
    }
}

/// Estimates every run of a sheet and pools replicas.
///
/// `folder` is the pipeline's: paths in what the runs have to say are written relative to it, since that goes into results,
/// which are the same wherever the pipeline lies.
#[must_use]
pub fn estimate_sheet(
    sheet: &SheetPlan,
    records: Vec<RunRecords>,
    folder: &Path,
) -> (SheetEstimates, Vec<RunAccount>) {
    let mut accounts: Vec<RunAccount> = sheet
        .runs
        .iter()
        .zip(records)
        .map(|(run, records)| estimate_run(run, records, folder))
        .collect();
    let mut runs = Vec::new();
    for run in sheet.runs.iter().filter(|run| run.replica_of.is_none()) {
        let members: Vec<RunEstimates> = accounts
            .iter()
            .filter(|account| account.pooled_as == run.name)
            .filter_map(|account| account.outcome.as_ref().ok().cloned())
            .collect();
        match pool(members) {
            Ok(Some(mut pooled)) => {
                pooled.name.clone_from(&run.name);
                runs.push(pooled);
            }
            Ok(None) => {}
            Err(problem) => {
                for account in accounts
                    .iter_mut()
                    .filter(|account| account.pooled_as == run.name)
                {
                    account.outcome = Err(RunFault::Refused(problem.to_string()));
                }
            }
        }
    }
    (
        SheetEstimates {
            name: sheet.name.clone(),
            runs,
        },
        accounts,
    )
}

fn estimate_run(run: &RunPlan, records: RunRecords, folder: &Path) -> RunAccount {
    let mut account = RunAccount {
        run: run.name.clone(),
        pooled_as: run.replica_of.clone().unwrap_or_else(|| run.name.clone()),
        temperature: run.temperature,
        frames: 0,
        outcome: Err(RunFault::TooShort(String::new())),
        notes: Vec::new(),
        warnings: Vec::new(),
    };
    account.outcome = match records {
        Err(problem) => Err(RunFault::Refused(problem.to_string())),
        Ok(measured) => {
            account.frames = measured.history.blocks.iter().map(|block| block.frames).sum();
            account.notes.clone_from(&measured.facts.notes);
            estimates_of(run, &measured, &mut account)
        }
    };
    account.write_paths_from(folder);
    account
}

/// Estimates of a measured run. The tension needs the end of the cut, and the cut needs no tension: two steps.
fn estimates_of(
    run: &RunPlan,
    measured: &MeasuredRun,
    account: &mut RunAccount,
) -> Result<RunEstimates, RunFault> {
    let facts = RunFacts {
        name: run.name.clone(),
        temperature: run.temperature,
        tension: Tension::Assumed,
        atoms: measured.facts.atoms,
        mass: measured.facts.mass,
        reservations: Vec::new(),
    };
    let mut estimates = RunEstimates::from_history(&measured.history, facts)
        .map_err(|problem| RunFault::TooShort(problem.to_string()))?;
    let history = &measured.history;
    let first_used = history
        .first_time_ps
        .map(|first| first + history.frame_interval_ps.unwrap_or(0.0) * estimates.cut.frames_cut as f64);
    let HeldTension { tension, warnings } = settle(run, measured, first_used)
        .map_err(|problem| RunFault::Refused(RunProblem::from(problem).to_string()))?;
    account.warnings.extend(warnings);
    estimates.tension = tension;
    estimates.reservations = reservations(&estimates, measured);
    if tension == Tension::Assumed && !estimates.cell_is_fixed() {
        account
            .notes
            .push("no tension is stated and no thermo series gives one: taken as 0 N/m".to_owned());
    }
    Ok(estimates)
}

/// Why the run can be at most weak.
fn reservations(estimates: &RunEstimates, measured: &MeasuredRun) -> Vec<String> {
    let mut reservations = Vec::new();
    if let Some(hop) = &measured.facts.first_hop {
        reservations.push(format!("atoms change their place in the lattice ({hop})"));
    }
    if estimates.cell_is_fixed() && estimates.tension == Tension::Assumed {
        reservations.push(
            "the cell is fixed and its tension unknown: state `tension` or give a `thermo` series with pressures".to_owned(),
        );
    }
    if measured.facts.primitive_cells.is_none() {
        reservations.push(
            "the sites have no lattice: sums over the first zone take that of a triangular lattice as dense"
                .to_owned(),
        );
    }
    reservations
}
