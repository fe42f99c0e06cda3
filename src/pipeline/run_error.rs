//! What can stop one run, or the whole job.

use thiserror::Error;

use super::block_store::BlockStoreError;
use crate::frames::FrameError;
use crate::report::WriteError;
use crate::sheet::SheetError;

/// Why one run of a pipeline is refused. The others go on.
#[derive(Debug, Error)]
pub enum RunProblem {
    /// A file of the run cannot be used.
    #[error(transparent)]
    Frames(#[from] FrameError),
    /// The atoms make no sheet that can be projected.
    #[error("{place}: {problem}")]
    Sheet {
        /// The frame, as a phrase.
        place: String,
        /// What is wrong with it.
        problem: SheetError,
    },
    /// Nothing is left of the run.
    #[error("no frame is left of the {found} in the files: widen `from` and `to`, or lower `stride`")]
    NoFrames {
        /// Frames in the files.
        found: usize,
    },
}

/// What stops the whole job: the machine, not the input.
#[derive(Debug, Error)]
pub enum RunError {
    /// A result could not be written.
    #[error(transparent)]
    Write(#[from] WriteError),
    /// Measured blocks could not be encoded.
    #[error(transparent)]
    Blocks(#[from] BlockStoreError),
}
