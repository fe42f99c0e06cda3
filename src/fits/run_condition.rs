//! What a value of one run was read under.

use super::Condition;
use crate::estimates::{RunEstimates, Tension};

/// The condition of `run`, for a value at `length` in A where it is scale dependent.
pub(super) fn run_condition(run: &RunEstimates, length: Option<f64>) -> Condition {
    Condition {
        run: Some(run.name.clone()),
        temperature: Some(run.temperature),
        tension: match run.tension {
            Tension::Stated(value) => Some(value),
            Tension::Measured { .. } | Tension::Assumed => None,
        },
        length,
    }
}
