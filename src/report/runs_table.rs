//! runs.csv: one row per run, refused ones too.

use crate::fits::Verdict;
use crate::parameters::written;

use super::table::csv_text;

/// Columns of runs.csv.
const HEADER: [&str; 10] = [
    "sheet",
    "run",
    "temperature_K",
    "frames",
    "frames_cut",
    "block_frames",
    "slowest_relaxation_ps",
    "effective_samples",
    "verdict",
    "note",
];

/// What became of one run.
#[derive(Clone, Debug, PartialEq)]
#[allow(non_snake_case)] // The unit in a column's name is spelled as the unit is.
pub struct RunSummary {
    /// Name of the sheet.
    pub sheet: String,
    /// Name of the run.
    pub run: String,
    /// Stated temperature, in K.
    pub temperature_K: f64,
    /// Whole frames read.
    pub frames: usize,
    /// Of these, cut as equilibration; `None` where the run was refused before the cut.
    pub frames_cut: Option<usize>,
    /// Frames of a full block.
    pub block_frames: usize,
    /// Integrated autocorrelation time of the slowest mode used, in ps, where known.
    pub slowest_relaxation_ps: Option<f64>,
    /// Effective samples of the slowest mode used.
    pub effective_samples: Option<f64>,
    /// The run's verdict.
    pub verdict: Verdict,
    /// Why, when it is not good.
    pub note: String,
}

/// The text of runs.csv.
#[must_use]
pub fn runs_csv(runs: &[RunSummary]) -> String {
    let rows = runs.iter().map(|run| {
        vec![
            run.sheet.clone(),
            run.run.clone(),
            written(Some(run.temperature_K)),
            run.frames.to_string(),
            run.frames_cut
                .map_or_else(String::new, |frames| frames.to_string()),
            run.block_frames.to_string(),
            written(run.slowest_relaxation_ps),
            written(run.effective_samples),
            verdict_word(run.verdict).to_owned(),
            run.note.clone(),
        ]
    });
    csv_text(&HEADER, rows)
}

/// The verdict as files spell it.
pub(super) fn verdict_word(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::Good => "good",
        Verdict::Weak => "weak",
        Verdict::Unusable => "unusable",
    }
}
