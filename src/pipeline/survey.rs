//! What a plan will cost: every run opened and its sheet found, nothing measured.

use std::time::Instant;

use serde::Serialize;

use super::measure::{MeasureOptions, project_reference};
use super::plan::{Plan, RunPlan, SheetPlan};
use super::run_problem::RunProblem;
use crate::frames::{Frame, RunFrames, ThermoSeries};
use crate::sheet::{LONG_WAVES, ProjectionScratch, reference_frame_indices};

/// One run of the plan as its files show it.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct RunSurvey {
    /// Name of its sheet.
    pub sheet: String,
    /// Name of the run.
    pub run: String,
    /// Trajectory files.
    pub files: usize,
    /// Frames in them.
    pub frames_in_files: usize,
    /// Frames used, after `from`, `to` and `stride`.
    pub frames: usize,
    /// Time between frames in ps, where known.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub frame_interval_ps: Option<f64>,
    /// Atoms of the sheet.
    pub atoms: usize,
    /// Atomic planes found.
    pub planes: usize,
    /// Primitive cells in the periodic cell, where the sites have a lattice.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub primitive_cells: Option<usize>,
    /// Independent modes (q and -q counted once).
    pub modes: usize,
    /// Smallest |q| in 1/A.
    pub smallest_q: f64,
    /// How modes are computed.
    pub transform: &'static str,
    /// Blocks that will be measured.
    pub blocks: usize,
    /// Bytes that the records will take, in memory and on disk.
    pub record_bytes: usize,
    /// Estimated seconds on one thread: the reference frames' cost a frame, times the frames.
    pub seconds_on_one_thread: f64,
    /// What reading has to say.
    pub notes: Vec<String>,
}

/// Opens every input of a run, finds its sheet in the reference frames, and counts what measuring will take.
///
/// # Errors
/// What would have the run refused.
pub fn survey_run(plan: &Plan, sheet: &SheetPlan, run: &RunPlan) -> Result<RunSurvey, RunProblem> {
    if let Some(thermo) = &run.input.thermo {
        ThermoSeries::read(thermo, run.input.engine_units)?;
    }
    let options = MeasureOptions::of(plan);
    let mut frames = RunFrames::open(&run.input)?;
    let atoms = frames.atoms().clone();
    let projection = project_reference(&mut frames, &atoms, &run.input, &options)?;
    let seconds = {
        let indices = reference_frame_indices(frames.len());
        let started = Instant::now();
        let (mut frame, mut scratch) = (Frame::empty(), ProjectionScratch::default());
        for &index in &indices {
            frames.read(index, &mut frame)?;
            projection
                .surface(&frame, &mut scratch)
                .map_err(|problem| RunProblem::Sheet {
                    place: frames.place(index).to_string(),
                    problem,
                })?;
        }
        started.elapsed().as_secs_f64() / indices.len() as f64 * frames.len() as f64
    };
    let modes = projection.modes();
    let blocks = frames.len().div_ceil(options.block_frames);
    Ok(RunSurvey {
        sheet: sheet.name.clone(),
        run: run.name.clone(),
        files: run.input.trajectory.iter().map(Vec::len).sum(),
        frames_in_files: frames.source_len(),
        frames: frames.len(),
        frame_interval_ps: frames.frame_interval_ps(),
        atoms: atoms.indices.len(),
        planes: projection.planes().count(),
        primitive_cells: projection.lattice().map(|lattice| lattice.cells),
        modes: modes.len(),
        smallest_q: modes.integers.first().map_or(0.0, |&m| {
            let [q1, q2] = projection.reference().plane_cell().wave_vector(m);
            q1.hypot(q2)
        }),
        transform: projection.transform_name(),
        blocks,
        record_bytes: record_bytes(frames.len(), blocks, modes.len()),
        seconds_on_one_thread: seconds,
        notes: frames.notes().iter().map(ToString::to_string).collect(),
    })
}

/// Bytes of the records: a complex number a frame for each long wave and nine reals a frame for the rest; for every other
/// mode and block a complex sum, two real ones and four complex lagged products.
fn record_bytes(frames: usize, blocks: usize, modes: usize) -> usize {
    const REAL: usize = 8;
    let long = modes.min(LONG_WAVES);
    frames * (2 * long + 9) * REAL + blocks * (modes - long) * (2 + 2 + 8) * REAL
}

/// Surveys every run of a plan; problems do not stop the others.
#[must_use]
pub fn survey(plan: &Plan) -> (Vec<RunSurvey>, Vec<String>) {
    let (mut surveys, mut problems) = (Vec::new(), Vec::new());
    for sheet in &plan.sheets {
        for run in &sheet.runs {
            match survey_run(plan, sheet, run) {
                Ok(survey) => surveys.push(survey),
                Err(problem) => problems.push(format!("run {}/{}: {problem}", sheet.name, run.name)),
            }
        }
    }
    (surveys, problems)
}
