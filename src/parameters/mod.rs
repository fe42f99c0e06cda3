//! The parameter file: records, provenance, covariance, as TOML and JSON.

mod file;
mod names;
mod provenance;
mod record;
mod rounding;

pub use file::{JointCovariance, ParameterFile, ParameterFileError, SCHEMA, Sheet};
pub use names::{PARAMETER_NAMES, ParameterName, look_up, nearest};
pub use provenance::{InputHash, Provenance, RunFrames};
pub use record::Parameter;
pub use rounding::{SIGNIFICANT_DIGITS, round_for_writing, written};
