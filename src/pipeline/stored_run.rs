//! One run of the plan: taken from stored blocks where they still belong to its files, measured otherwise.

use std::path::PathBuf;

use super::block_store;
use super::fingerprint::fingerprint;
use super::measure::{MeasureOptions, MeasuredRun, RunLabel, measure_run};
use super::plan::{Plan, RunPlan, SheetPlan};
use super::progress::Progress;
use super::run_error::RunError;
use super::run_problem::RunProblem;
use crate::frames::FrameError;
use crate::report::{OutputFolder, file_stem};

/// Folder of stored blocks in the output folder.
const BLOCKS: &str = "blocks";

/// The records of a run, or why there are none.
pub type RunRecords = Result<MeasuredRun, RunProblem>;

/// Takes the records of a run from the output folder, or measures it and stores them there.
///
/// # Errors
/// Only where the store cannot be written; what is wrong with the run itself is in the records' place.
pub fn stored_or_measured(
    plan: &Plan,
    sheet: &SheetPlan,
    run: &RunPlan,
    folder: &OutputFolder,
    threads: usize,
    progress: &dyn Progress,
) -> Result<RunRecords, RunError> {
    let key = match key(plan, run) {
        Ok(key) => key,
        Err(problem) => return Ok(Err(problem)),
    };
    let name: PathBuf = [
        BLOCKS,
        &file_stem(&sheet.name),
        &format!("{}.npz", file_stem(&run.name)),
    ]
    .iter()
    .collect();
    if let Some(stored) = block_store::load(&folder.path().join(&name), &key) {
        progress.note(&format!("{}/{}: taken from stored blocks", sheet.name, run.name));
        return Ok(Ok(stored));
    }
    let options = MeasureOptions::of(plan);
    let label = RunLabel {
        sheet: &sheet.name,
        run: &run.name,
    };
    let measured = measure_run(label, &run.input, &options, threads, progress);
    progress.run_finished();
    if let Ok(measured) = &measured {
        folder.write(&name, block_store::encode(measured, &key)?)?;
    }
    Ok(measured)
}

/// What stored blocks depend on: program version, settings, and the contents of the run's files.
fn key(plan: &Plan, run: &RunPlan) -> Result<String, RunProblem> {
    let mut hasher = blake3::Hasher::new();
    hasher.update(env!("CARGO_PKG_VERSION").as_bytes());
    hasher.update(plan.measured_form(run).settings.to_text().as_bytes());
    for file in run.input.trajectory.iter().flatten().chain(&run.input.topology) {
        let print = fingerprint(file).map_err(|error| FrameError::Unreadable {
            path: file.clone(),
            reason: error.to_string(),
        })?;
        hasher.update(print.as_bytes());
    }
    Ok(hasher.finalize().to_hex().to_string())
}
