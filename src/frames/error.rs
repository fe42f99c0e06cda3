//! What can be wrong with the files of a run.

use std::path::PathBuf;

use thiserror::Error;

/// An input file that cannot be used, with the place, what was found, and what to do.
#[derive(Debug, Error)]
pub enum FrameError {
    /// The file could not be opened or read.
    #[error("cannot read {path}: {reason}")]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// What the system or the parser said.
        reason: String,
    },
}
