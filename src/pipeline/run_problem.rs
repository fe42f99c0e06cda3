//! What has one run of a pipeline refused.

use thiserror::Error;

use crate::frames::FrameError;
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
