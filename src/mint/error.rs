//! Why a synthetic set cannot be made.

use std::path::PathBuf;

use thiserror::Error;

use crate::frames::FrameError;
use crate::report::WriteError;
use crate::theory::ScsaError;

/// Why a synthetic set was not made. Nothing is left behind then.
#[derive(Debug, Error)]
pub enum MintError {
    /// What was asked for is no sheet: what was found, what is expected, what to do.
    #[error("{0}")]
    Request(String),
    /// Something stands where the set would be written.
    #[error("{} exists; move it away or choose another folder with --out", .0.display())]
    Exists(PathBuf),
    /// The plate has no equilibrium.
    #[error("no such plate at {temperature} K: {source}")]
    Plate {
        /// In K.
        temperature: f64,
        /// Why.
        source: ScsaError,
    },
    /// The disk failed.
    #[error(transparent)]
    Write(#[from] WriteError),
    /// A trajectory could not be written.
    #[error(transparent)]
    Trajectory(#[from] FrameError),
    /// The machine failed.
    #[error("cannot {action} {}: {source}; check the disk, or choose another folder with --out", path.display())]
    Machine {
        /// The file or folder.
        path: PathBuf,
        /// What failed, as a verb.
        action: &'static str,
        /// What the system said.
        source: std::io::Error,
    },
}

impl MintError {
    /// Whether the request is at fault, rather than the machine.
    #[must_use]
    pub fn is_input(&self) -> bool {
        matches!(self, Self::Request(_) | Self::Exists(_) | Self::Plate { .. })
    }

    pub(super) fn request(message: String) -> Self {
        Self::Request(message)
    }

    /// Refuses what is not a finite number above zero.
    pub(super) fn check_positive(what: &str, value: f64, unit: &str) -> Result<(), Self> {
        if value.is_finite() && value > 0.0 {
            return Ok(());
        }
        Err(Self::request(format!(
            "the {what} is {value} {unit}; expected a number above zero"
        )))
    }
}
