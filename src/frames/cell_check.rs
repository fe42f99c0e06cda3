//! Whether a cell can be used.

use std::path::PathBuf;

use super::cell::length;
use super::{Cell, FrameError};

/// Shortest cell vector, and smallest volume relative to the product of the three lengths, that count as a cell.
const SMALLEST_LENGTH_A: f64 = 1e-3;
const SMALLEST_RELATIVE_VOLUME: f64 = 1e-6;

/// What is wrong with a cell.
pub(super) enum CellFault {
    NotFinite(String, f64),
    Flat(String),
}

impl CellFault {
    /// The error, with its place.
    pub fn error(self, path: PathBuf, frame: usize) -> FrameError {
        match self {
            Self::NotFinite(what, value) => FrameError::NotFinite {
                path,
                frame,
                what,
                value,
            },
            Self::Flat(what) => FrameError::FlatCell { path, frame, what },
        }
    }
}

/// Checks that the cell spans a volume.
pub(super) fn check_cell(cell: &Cell) -> Result<(), CellFault> {
    let mut product = 1.0;
    for (vector, letter) in cell.vectors.iter().zip(['a', 'b', 'c']) {
        if let Some(&component) = vector.iter().find(|component| !component.is_finite()) {
            return Err(CellFault::NotFinite(
                format!("a component of cell vector {letter}"),
                component,
            ));
        }
        let length = length(*vector);
        if length < SMALLEST_LENGTH_A {
            return Err(CellFault::Flat(format!("cell vector {letter} has zero length")));
        }
        product *= length;
    }
    if cell.volume().abs() < SMALLEST_RELATIVE_VOLUME * product {
        return Err(CellFault::Flat("the cell vectors lie in one plane".to_owned()));
    }
    Ok(())
}
