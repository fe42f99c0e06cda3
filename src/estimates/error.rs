//! What keeps a history from becoming estimates.

use thiserror::Error;

/// Why a history cannot be turned into estimates.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum EstimateError {
    /// No error bar can be had from fewer than two frames.
    #[error(
        "the blocks hold {found} frame(s); estimates need at least 2, and good ones some hundreds: read more of the run"
    )]
    TooFewFrames {
        /// Frames found.
        found: usize,
    },
    /// A measurement or one of its columns is missing.
    #[error(
        "block {block} holds no {what} of the measurement \"{measurement}\": the blocks are from another version or were measured without it; measure the run again"
    )]
    Missing {
        /// Index of the block in the history.
        block: usize,
        /// Name of the measurement.
        measurement: &'static str,
        /// Which part: a column's name, or "series".
        what: String,
    },
    /// A record's shape disagrees with its block or with the modes.
    #[error(
        "block {block}: the record of \"{measurement}\" holds {found} {what}, expected {expected}; measure the run again"
    )]
    Shape {
        /// Index of the block in the history.
        block: usize,
        /// Name of the measurement.
        measurement: &'static str,
        /// What was counted.
        what: &'static str,
        /// How many were found.
        found: usize,
        /// How many were expected.
        expected: usize,
    },
    /// The cell's mean metric is not that of a cell.
    #[error(
        "the mean in-plane cell has no area (a.a {aa} A^2, a.b {ab} A^2, b.b {bb} A^2): check the trajectory's cells"
    )]
    FlatCell {
        /// Mean of a.a in A^2.
        aa: f64,
        /// Mean of a.b in A^2.
        ab: f64,
        /// Mean of b.b in A^2.
        bb: f64,
    },
    /// Replicas must measure the same modes.
    #[error(
        "replica \"{replica}\" measured other modes than \"{first}\": replicas need the same sheet, cell and q_max"
    )]
    OtherModes {
        /// Name of the first run.
        first: String,
        /// Name of the one that differs.
        replica: String,
    },
}
