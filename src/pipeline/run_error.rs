//! What stops the whole job.

use thiserror::Error;

use super::block_store::BlockStoreError;
use crate::report::WriteError;

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
