//! Where the numbers of a parameter file came from.

use serde::{Deserialize, Serialize};

/// `[provenance]`: the program, the pipeline, the inputs and the frames behind a parameter file.
///
/// No dates, no absolute paths, no thread counts: the same inputs give the same bytes.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Provenance {
    /// Name and version of the program, such as `planish 0.1.0`.
    pub program: String,
    /// Name of the pipeline.
    pub pipeline: String,
    /// BLAKE3 hash of the resolved plan in its canonical form, in hexadecimal: comments and spacing of the file do not matter.
    pub pipeline_blake3: String,
    /// Every input file, in the order of the pipeline.
    #[serde(default)]
    pub input: Vec<InputHash>,
    /// The frames behind each run.
    #[serde(default)]
    pub run: Vec<RunFrames>,
}

/// One input file.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct InputHash {
    /// Path relative to the pipeline file's folder, with forward slashes.
    pub path: String,
    /// BLAKE3 hash of its bytes, in hexadecimal; `sampled-` and the hash of pieces of it for a very large file.
    pub blake3: String,
}

/// The frames behind one run.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct RunFrames {
    /// Name of the sheet.
    pub sheet: String,
    /// Name of the run.
    pub run: String,
    /// Whole frames read.
    pub frames: usize,
    /// Frames left after the equilibration cut.
    pub frames_used: usize,
}

impl Provenance {
    /// The name and version of this program.
    #[must_use]
    pub fn this_program() -> String {
        format!("{} {}", env!("CARGO_PKG_NAME"), env!("CARGO_PKG_VERSION"))
    }
}
