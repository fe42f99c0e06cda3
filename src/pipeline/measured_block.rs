//! One block of frames on its way from the reader to its record.

use super::progress::Progress;
use super::run_problem::RunProblem;
use crate::frames::{Frame, RunFrames};
use crate::measurements::{BlockRecord, OpenBlock};
use crate::sheet::{Projection, ProjectionScratch, SheetError};

/// What became of a block.
pub(super) struct Outcome {
    pub record: BlockRecord,
    /// Frame (counted among the kept ones) and atom of the first hop in the block.
    pub first_hop: Option<(usize, usize)>,
}

/// Memory of one worker that reads, projects and measures.
#[derive(Default)]
pub(super) struct BlockScratch {
    frame: Option<Frame>,
    projection: ProjectionScratch,
}

/// Reads, projects and measures the frames of block `index`.
pub(super) fn measure_block(
    frames: &mut RunFrames,
    projection: &Projection,
    block_frames: usize,
    index: usize,
    scratch: &mut BlockScratch,
    progress: &dyn Progress,
) -> Result<Outcome, RunProblem> {
    let first = index * block_frames;
    let frame = scratch.frame.get_or_insert_with(Frame::empty);
    let mut block = BlockInProgress::new(projection);
    for number in first..(first + block_frames).min(frames.len()) {
        frames.read(number, frame)?;
        block
            .observe(number, frame, &mut scratch.projection)
            .map_err(|fault| fault.at(frames))?;
        progress.frames_done(1, frame.positions.len());
    }
    Ok(block.close())
}

/// A frame that cannot be projected.
pub(super) struct Fault {
    frame: usize,
    problem: SheetError,
}

impl Fault {
    pub fn at(self, frames: &RunFrames) -> RunProblem {
        RunProblem::Sheet {
            place: frames.place(self.frame).to_string(),
            problem: self.problem,
        }
    }
}

/// A block being measured.
pub(super) struct BlockInProgress<'a> {
    projection: &'a Projection,
    open: OpenBlock,
    first_hop: Option<(usize, usize)>,
}

impl<'a> BlockInProgress<'a> {
    pub fn new(projection: &'a Projection) -> Self {
        Self {
            projection,
            open: OpenBlock::new(projection.modes()),
            first_hop: None,
        }
    }

    pub fn observe(
        &mut self,
        number: usize,
        frame: &Frame,
        scratch: &mut ProjectionScratch,
    ) -> Result<(), Fault> {
        let surface = self.projection.surface(frame, scratch).map_err(|problem| Fault {
            frame: number,
            problem,
        })?;
        if let (None, Some(atom)) = (self.first_hop, surface.hopped) {
            self.first_hop = Some((number, atom));
        }
        self.open.observe(&surface);
        Ok(())
    }

    pub fn close(self) -> Outcome {
        Outcome {
            record: self.open.close(),
            first_hop: self.first_hop,
        }
    }
}
