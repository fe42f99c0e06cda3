//! Measuring one run: read its frames once, project and measure them block by block, on as many threads as there are.
//! Where a file can be read by many threads each reads its own blocks; else one reads for all.

use std::sync::Mutex;
use std::sync::atomic::{AtomicBool, AtomicUsize, Ordering};
use std::sync::mpsc::{Receiver, SyncSender, sync_channel};

use serde::{Deserialize, Serialize};

use super::measured_block::{BlockInProgress, BlockScratch, Fault, Outcome, measure_block};
use super::plan::Plan;
use super::progress::Progress;
use super::run_problem::RunProblem;
use crate::frames::{Cell, Frame, RunFrames, RunInput, SheetAtoms};
use crate::measurements::History;
use crate::sheet::{Positions, Projection, ProjectionScratch, reference_frame_indices};

/// What decides how a run is measured, besides its files.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct MeasureOptions {
    /// Where heights are taken to be.
    pub positions: Positions,
    /// Modes wanted beyond the first zone, up to this length in 1/A.
    pub q_max: Option<f64>,
    /// Frames in a block.
    pub block_frames: usize,
}

impl MeasureOptions {
    /// Those of a plan.
    #[must_use]
    pub fn of(plan: &Plan) -> Self {
        Self {
            positions: plan.project.positions,
            q_max: plan.spectrum.q_max,
            block_frames: plan.spectrum.block_frames,
        }
    }
}

/// A run as measured: its records, and what the frames said of the sheet.
#[derive(Clone, Debug, PartialEq)]
pub struct MeasuredRun {
    /// Records of all blocks.
    pub history: History,
    /// The sheet behind them.
    pub facts: SheetFacts,
    /// Mean (s1, s2, h) of each atom over the reference frames: scaled along a and b, height in A.
    pub sites: Vec<[f64; 3]>,
    /// Mean cell of the reference frames.
    pub cell: Cell,
}

/// What is known of the sheet and its files after measuring.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct SheetFacts {
    /// Atoms of the sheet.
    pub atoms: usize,
    /// Their mass in g/mol, where known.
    pub mass: Option<f64>,
    /// Number of atomic planes.
    pub planes: usize,
    /// Primitive cells in the periodic cell; `None` where the sites have no lattice.
    pub primitive_cells: Option<usize>,
    /// How modes were computed.
    pub transform: String,
    /// Mean height of the cell along its normal in A, which turns a pressure into a tension.
    pub cell_height: f64,
    /// Frames in the files, before `from`, `to` and `stride`.
    pub frames_in_files: usize,
    /// The first frame in which an atom had left its site, and the atom, as a phrase.
    pub first_hop: Option<String>,
    /// What reading has to say.
    pub notes: Vec<String>,
}

/// Blocks in flight between reader and workers, for each worker: bounds memory, whatever the length of the run.
const QUEUE_PER_WORKER: usize = 2;

/// Which run is being measured, for progress and messages.
#[derive(Clone, Copy, Debug)]
pub struct RunLabel<'a> {
    /// Name of its sheet.
    pub sheet: &'a str,
    /// Its own name.
    pub run: &'a str,
}

/// A block of frames on its way to a worker.
struct Batch {
    index: usize,
    first_frame: usize,
    frames: Vec<Frame>,
}

/// Measures a run on `threads` threads. Blocks are fixed runs of frames and each is measured on its own, so the records
/// do not depend on the number of threads.
///
/// # Errors
/// Where a file cannot be read or the atoms make no sheet that can be projected; the first such frame is named.
pub fn measure_run(
    label: RunLabel<'_>,
    input: &RunInput,
    options: &MeasureOptions,
    threads: usize,
    progress: &dyn Progress,
) -> Result<MeasuredRun, RunProblem> {
    let mut frames = RunFrames::open(input)?;
    let atoms = frames.atoms().clone();
    let projection = project_reference(&mut frames, &atoms, input, options)?;
    progress.run_started(label.sheet, label.run, frames.len());
    let outcomes = if threads <= 1 {
        measure_in_line(&mut frames, &projection, options.block_frames, progress)?
    } else if let Some(readers) = readers_for(&frames, options.block_frames, threads)? {
        measure_with_readers(readers, &projection, options.block_frames, progress)?
    } else {
        measure_in_parallel(&mut frames, &projection, options.block_frames, threads, progress)?
    };

    let first_hop = outcomes
        .iter()
        .find_map(|outcome| outcome.first_hop)
        .map(|(frame, atom)| {
            format!(
                "{}: atom {} left its site",
                frames.place(frame),
                atoms.indices[atom] + 1
            )
        });
    let facts = SheetFacts {
        atoms: atoms.indices.len(),
        mass: atoms.masses.as_ref().map(|masses| masses.iter().sum()),
        planes: projection.planes().count(),
        primitive_cells: projection.lattice().map(|lattice| lattice.cells),
        transform: projection.transform_name().to_owned(),
        cell_height: projection.reference().cell.height(),
        frames_in_files: frames.source_len(),
        first_hop,
        notes: frames.notes().iter().map(ToString::to_string).collect(),
    };
    let history = History {
        modes: projection.modes().clone(),
        frame_interval_ps: frames.frame_interval_ps(),
        first_time_ps: frames.first_time_ps(),
        blocks: outcomes.into_iter().map(|outcome| outcome.record).collect(),
    };
    Ok(MeasuredRun {
        history,
        facts,
        sites: projection.reference().sites.clone(),
        cell: projection.reference().cell,
    })
}

/// Reads the reference frames and finds the sheet in them.
pub(super) fn project_reference(
    frames: &mut RunFrames,
    atoms: &SheetAtoms,
    input: &RunInput,
    options: &MeasureOptions,
) -> Result<Projection, RunProblem> {
    let indices = reference_frame_indices(frames.len());
    let mut reference = Vec::with_capacity(indices.len());
    for &index in &indices {
        let mut frame = Frame::empty();
        frames.read(index, &mut frame)?;
        reference.push(frame);
    }
    if reference.is_empty() {
        return Err(RunProblem::NoFrames {
            found: frames.source_len(),
        });
    }
    Projection::new(&reference, atoms, input.normal, options.positions, options.q_max).map_err(|problem| {
        RunProblem::Sheet {
            place: frames.place(indices[0]).to_string(),
            problem,
        }
    })
}

/// A reader for each worker; `None` where a file is best read by one reader in order.
fn readers_for(
    frames: &RunFrames,
    block_frames: usize,
    threads: usize,
) -> Result<Option<Vec<RunFrames>>, RunProblem> {
    let workers = threads.min(frames.len().div_ceil(block_frames)).max(1);
    let mut readers = Vec::with_capacity(workers);
    for _ in 0..workers {
        match frames.another()? {
            Some(reader) => readers.push(reader),
            None => return Ok(None),
        }
    }
    Ok(Some(readers))
}

/// Reads, projects and measures in turn on the calling thread.
fn measure_in_line(
    frames: &mut RunFrames,
    projection: &Projection,
    block_frames: usize,
    progress: &dyn Progress,
) -> Result<Vec<Outcome>, RunProblem> {
    let mut scratch = BlockScratch::default();
    let mut outcomes = Vec::new();
    for index in 0..frames.len().div_ceil(block_frames) {
        let outcome = measure_block(frames, projection, block_frames, index, &mut scratch, progress)?;
        outcomes.push(outcome);
    }
    Ok(outcomes)
}

/// Every worker reads, projects and measures whole blocks with a reader of its own, taking them in order; results are put
/// in order of the blocks.
///
/// Where frames are at fault, the first is named: the blocks before its own were taken before it, and are finished.
fn measure_with_readers(
    readers: Vec<RunFrames>,
    projection: &Projection,
    block_frames: usize,
    progress: &dyn Progress,
) -> Result<Vec<Outcome>, RunProblem> {
    let blocks = readers
        .first()
        .map_or(0, |frames| frames.len().div_ceil(block_frames));
    let next = AtomicUsize::new(0);
    let stop = AtomicBool::new(false);
    let results: Mutex<Vec<Option<Result<Outcome, RunProblem>>>> =
        Mutex::new(std::iter::repeat_with(|| None).take(blocks).collect());
    std::thread::scope(|scope| {
        for mut frames in readers {
            let (next, stop, results) = (&next, &stop, &results);
            scope.spawn(move || {
                let mut scratch = BlockScratch::default();
                while !stop.load(Ordering::Relaxed) {
                    let index = next.fetch_add(1, Ordering::Relaxed);
                    if index >= blocks {
                        break;
                    }
                    let outcome = measure_block(
                        &mut frames,
                        projection,
                        block_frames,
                        index,
                        &mut scratch,
                        progress,
                    );
                    if outcome.is_err() {
                        stop.store(true, Ordering::Relaxed);
                    }
                    if let Ok(mut results) = results.lock() {
                        results[index] = Some(outcome);
                    }
                }
            });
        }
    });
    let results = results
        .into_inner()
        .unwrap_or_else(std::sync::PoisonError::into_inner);
    // Blocks without a result come after one at fault, at which collecting ends.
    results.into_iter().flatten().collect()
}

/// Reads on the calling thread while workers project and measure whole blocks; results are put in order of the blocks.
fn measure_in_parallel(
    frames: &mut RunFrames,
    projection: &Projection,
    block_frames: usize,
    threads: usize,
    progress: &dyn Progress,
) -> Result<Vec<Outcome>, RunProblem> {
    let blocks = frames.len().div_ceil(block_frames);
    let workers = threads.min(blocks).max(1);
    let results: Mutex<Vec<Option<Result<Outcome, Fault>>>> =
        Mutex::new(std::iter::repeat_with(|| None).take(blocks).collect());
    let (to_workers, from_reader) = sync_channel::<Batch>(QUEUE_PER_WORKER * workers);
    let (spent, reusable) = sync_channel::<Vec<Frame>>(2 * QUEUE_PER_WORKER * workers);
    let from_reader = Mutex::new(from_reader);

    let reading = std::thread::scope(|scope| {
        for _ in 0..workers {
            let spent = spent.clone();
            let (from_reader, results) = (&from_reader, &results);
            scope.spawn(move || work(projection, from_reader, &spent, results, progress));
        }
        let reading = read_batches(frames, block_frames, &to_workers, &reusable, &results);
        // The channel closes here, which ends the workers once it is empty.
        drop(to_workers);
        reading
    });

    let results = results
        .into_inner()
        .unwrap_or_else(std::sync::PoisonError::into_inner);
    let mut outcomes = Vec::with_capacity(blocks);
    for result in results {
        match result {
            Some(Ok(outcome)) => outcomes.push(outcome),
            Some(Err(fault)) => return Err(fault.at(frames)),
            // Reading stopped before this block: at a fault in an earlier one, or because a frame could not be read.
            None => break,
        }
    }
    reading.map(|()| outcomes)
}

/// Sends every block to the workers, in order; stops early when one of them has met a fault.
fn read_batches(
    frames: &mut RunFrames,
    block_frames: usize,
    to_workers: &SyncSender<Batch>,
    reusable: &Receiver<Vec<Frame>>,
    results: &Mutex<Vec<Option<Result<Outcome, Fault>>>>,
) -> Result<(), RunProblem> {
    for (index, first) in (0..frames.len()).step_by(block_frames).enumerate() {
        let faulty = results
            .lock()
            .is_ok_and(|results| results.iter().any(|result| matches!(result, Some(Err(_)))));
        if faulty {
            break;
        }
        let mut batch = reusable.try_recv().unwrap_or_default();
        let count = block_frames.min(frames.len() - first);
        batch.resize_with(count, Frame::empty);
        for (frame, number) in batch.iter_mut().zip(first..) {
            frames.read(number, frame)?;
        }
        // Workers only stop listening when they panic, and the scope passes that on.
        if to_workers
            .send(Batch {
                index,
                first_frame: first,
                frames: batch,
            })
            .is_err()
        {
            break;
        }
    }
    Ok(())
}

/// One worker: takes blocks until the reader has no more.
fn work(
    projection: &Projection,
    from_reader: &Mutex<Receiver<Batch>>,
    spent: &SyncSender<Vec<Frame>>,
    results: &Mutex<Vec<Option<Result<Outcome, Fault>>>>,
    progress: &dyn Progress,
) {
    let mut scratch = ProjectionScratch::default();
    loop {
        let batch = from_reader.lock().ok().and_then(|receiver| receiver.recv().ok());
        let Some(Batch {
            index,
            first_frame,
            frames,
        }) = batch
        else {
            return;
        };
        let mut block = BlockInProgress::new(projection);
        let mut fault = None;
        for (number, frame) in (first_frame..).zip(&frames) {
            if let Err(found) = block.observe(number, frame, &mut scratch) {
                fault = Some(found);
                break;
            }
            progress.frames_done(1, frame.positions.len());
        }
        if let Ok(mut results) = results.lock() {
            results[index] = Some(fault.map_or_else(|| Ok(block.close()), Err));
        }
        // Full or closed: the frames are simply freed.
        let _ = spent.try_send(frames);
    }
}
