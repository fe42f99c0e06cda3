//! A job's options, what it has of each sheet at the end, and what it leaves to say.

use std::path::PathBuf;

use super::estimate::RunAccount;
use crate::estimates::SheetEstimates;
use crate::fits::Fitted;
use crate::parameters::Sheet;
use crate::report::RunSummary;

/// How the job is carried out; nothing here touches a result.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct RunOptions {
    /// The output folder.
    pub out: PathBuf,
    /// Number of threads, at least 1.
    pub threads: usize,
}

/// What a finished job leaves to say.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct RunOutcome {
    /// The parameters of each sheet.
    pub sheets: Vec<Sheet>,
    /// Runs that were refused for their input, each with its error.
    pub refused: Vec<String>,
    /// Gates of the pipeline that were not met, each with what was found.
    pub gate_missed: Vec<String>,
}

/// One sheet at the end of the pipeline.
pub(super) struct FinishedSheet {
    /// Estimates of its runs, replicas pooled.
    pub estimates: SheetEstimates,
    /// What each fit made of them.
    pub fits: Vec<Fitted>,
    /// What became of each run of the plan.
    pub accounts: Vec<RunAccount>,
    /// Its part of the parameter file.
    pub parameters: Sheet,
    /// Its rows of runs.csv.
    pub summaries: Vec<RunSummary>,
}
