//! A number with its error: the currency of everything after measuring.

use serde::{Deserialize, Serialize};

/// A mean and its standard error, from correlated samples.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Estimate {
    /// The value.
    pub value: f64,
    /// One standard error of it.
    pub error: f64,
    /// How many independent samples would give this error.
    pub effective_samples: f64,
    /// Plain split R-hat of the two halves of the series after the cut (Gelman et al., Bayesian Data Analysis);
    /// `None` where the series is too short to split.
    pub split_r_hat: Option<f64>,
}
