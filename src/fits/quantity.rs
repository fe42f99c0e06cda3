//! One number as it will stand in the parameter file, in the program's units until it is written.

use serde::{Deserialize, Serialize};

/// How far a value can be trusted. Ordered: good < weak < unusable.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Verdict {
    /// Enough independent samples, and halves that agree.
    Good,
    /// To be read with its note.
    Weak,
    /// No number.
    Unusable,
}

/// What a value was read under.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Condition {
    /// Name of the run; `None` where the value belongs to several.
    pub run: Option<String>,
    /// Temperature in K; `None` where it belongs to no one temperature.
    pub temperature: Option<f64>,
    /// Mean tension held, in eV/A^2, where the pipeline states one.
    pub tension: Option<f64>,
    /// 2 pi/q for a value read at a wave vector, sqrt(area) for one from the cell, in A; `None` where not scale dependent.
    pub length: Option<f64>,
}

/// A value, its standard error and its 95 % interval, all in the unit of the quantity's name.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FittedValue {
    /// Best estimate.
    pub value: f64,
    /// One standard error.
    pub error: f64,
    /// Central 95 % interval.
    pub interval95: [f64; 2],
}

impl FittedValue {
    /// A value whose interval is symmetric: value -+ 1.96 errors.
    #[must_use]
    pub fn symmetric(value: f64, error: f64) -> Self {
        let half = NORMAL_95 * error;
        Self {
            value,
            error,
            interval95: [value - half, value + half],
        }
    }

    /// A positive value whose logarithm is normal: the interval is value times exp(-+ 1.96 error/value).
    #[must_use]
    pub fn positive(value: f64, error: f64) -> Self {
        let factor = (NORMAL_95 * error / value).exp();
        Self {
            value,
            error,
            interval95: [value / factor, value * factor],
        }
    }
}

/// The 0.975 quantile of the standard normal distribution.
pub const NORMAL_95: f64 = 1.959_963_984_540_054;

/// One fitted or measured number with everything a reader must know about it.
///
/// Values are in the unit of the name (eV, N/m, A^2, 1/K, ...).
#[derive(Clone, Debug, PartialEq)]
pub struct Quantity {
    /// Name, one of `parameters::PARAMETER_NAMES`.
    pub name: &'static str,
    /// Unit, as written to the parameter file.
    pub unit: &'static str,
    /// What it was read under.
    pub condition: Condition,
    /// The number; `None` where the data cannot carry it.
    pub value: Option<FittedValue>,
    /// How it was obtained.
    pub method: String,
    /// How far to trust it.
    pub verdict: Verdict,
    /// Why, when the verdict is not good; also remarks on a good one.
    pub note: String,
}
