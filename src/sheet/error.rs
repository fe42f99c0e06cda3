//! What can be wrong with a sheet, once its files could be read.

use thiserror::Error;

use crate::frames::CellAxis;

/// A sheet that cannot be projected: what was found, what is expected, what to do. The caller adds file and frame.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum SheetError {
    /// Atoms fill the cell along the axis named as normal, and another axis is the thin one.
    #[error(
        "the normal axis {named} is not the thin one: the largest gap between atoms along it is {gap:.1} A, but along \
         {thin} it is {thin_gap:.1} A; set normal = \"{thin}\"",
        named = named.letter(), thin = thin.letter()
    )]
    NormalNotThin {
        /// The axis the pipeline names.
        named: CellAxis,
        /// Largest gap along it, in A.
        gap: f64,
        /// The axis with the largest gap.
        thin: CellAxis,
        /// Its gap, in A.
        thin_gap: f64,
    },
    /// Atoms fill the cell along its normal: a bulk crystal or a stack.
    #[error(
        "atoms fill the cell along its normal axis {axis}: the largest gap between them is {gap:.1} A, where a sheet \
         leaves at least {needed:.0} A of vacuum; select one sheet, or give the cell more vacuum",
        axis = axis.letter()
    )]
    NoVacuum {
        /// The normal axis.
        axis: CellAxis,
        /// Largest gap along it, in A.
        gap: f64,
        /// Smallest gap accepted, in A.
        needed: f64,
    },
    /// The sheet does not close on itself across the periodic boundary.
    #[error(
        "the sheet is not periodic along {axes}: its atoms do not connect across the cell's boundary there; ribbons and \
         flakes are not supported yet: choose atoms of a sheet that spans the cell in both directions"
    )]
    NotPeriodic {
        /// "a", "b" or "a and b".
        axes: String,
    },
    /// The sheet lies over itself, so its height has two values.
    #[error(
        "the sheet folds over itself: {found}; its height above the plane then has more than one value and no plate \
         parameter can be read from it; use a part of the run (`from`, `to`) in which the sheet is flat"
    )]
    Folded {
        /// What betrays the fold.
        found: String,
    },
    /// Fewer atoms than any lattice of modes needs.
    #[error(
        "the sheet has {found} atoms; at least {needed} are needed to have one wave in it: check the selection"
    )]
    TooFewAtoms {
        /// Atoms found.
        found: usize,
        /// Atoms needed.
        needed: usize,
    },
}
