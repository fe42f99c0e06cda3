//! The plan: a pipeline file as resolved. Names are made, defaults filled in, files found.

use std::path::{Path, PathBuf};

use serde::Serialize;

use super::diagnostics::{Diagnostic, Diagnostics};
use super::file::PipelineFile;
use super::gate::GateLimit;
use super::resolve::resolve;
use crate::fits::FitOptions;
use crate::frames::RunInput;
use crate::sheet::Positions;

/// Everything the job is to do. Quantities are in the program's units, paths can be opened from the current folder.
#[derive(Clone, Debug, PartialEq)]
pub struct Plan {
    /// Name of the job.
    pub name: String,
    /// The pipeline file, as the user named it.
    pub file: PathBuf,
    /// The sheets, in the order of the file.
    pub sheets: Vec<SheetPlan>,
    /// How frames become surfaces.
    pub project: ProjectOptions,
    /// How the height spectrum is measured.
    pub spectrum: SpectrumOptions,
    /// How the plate is fitted.
    pub fit: FitOptions,
    /// Limits the parameters must meet, in the order of the file.
    pub gate: Vec<GateLimit>,
    /// What does not stop the job, and the user should look at.
    pub warnings: Diagnostics,
}

/// One sheet.
#[derive(Clone, Debug, PartialEq)]
pub struct SheetPlan {
    /// Its name, unique in the plan.
    pub name: String,
    /// Its runs, in the order of the file; at least one.
    pub runs: Vec<RunPlan>,
}

/// One run.
#[derive(Clone, Debug, PartialEq)]
pub struct RunPlan {
    /// Its name, unique in its sheet.
    pub name: String,
    /// Its files and how to read them.
    pub input: RunInput,
    /// Temperature in K.
    pub temperature: f64,
    /// Mean in-plane tension held, in eV/A^2, positive when it stretches, where the file states one.
    pub tension: Option<f64>,
    /// The run of the same sheet that this one is pooled with; that one is no replica itself.
    pub replica_of: Option<String>,
}

/// `[stage.project]`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize)]
pub struct ProjectOptions {
    /// Where in the plane heights stand.
    pub positions: Positions,
}

/// `[stage.spectrum]`.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct SpectrumOptions {
    /// Largest wave number measured, in 1/A; `None` leaves it to the lattice.
    pub q_max: Option<f64>,
    /// Consecutive frames in a block.
    pub block_frames: usize,
}

impl Plan {
    /// Reads, checks and resolves a pipeline file. No trajectory is opened.
    ///
    /// # Errors
    /// All problems of the file at once, warnings among them, where any of them stops the job.
    pub fn load(path: &Path) -> Result<Self, Diagnostics> {
        let source = read_text(path)?;
        let mut problems = Diagnostics::new(path, &source);
        let file = PipelineFile::parse(&source, &mut problems);
        resolve(file, path, problems)
    }

    /// The output folder where the user names none: the plan's name with `.out`, beside the pipeline file.
    #[must_use]
    pub fn default_output(&self) -> PathBuf {
        self.folder().join(format!("{}.out", self.name))
    }

    /// The folder of the pipeline file, to which its paths are relative; empty for the current folder.
    #[must_use]
    pub fn folder(&self) -> &Path {
        self.file.parent().unwrap_or(Path::new(""))
    }
}

fn read_text(path: &Path) -> Result<String, Diagnostics> {
    let refused = |message: String, help: &str| {
        let mut problems = Diagnostics::new(path, "");
        problems.push(Diagnostic::error(message).help(help));
        problems
    };
    let bytes = std::fs::read(path).map_err(|error| {
        refused(
            format!("cannot read the pipeline file: {error}"),
            "check the path and its permissions",
        )
    })?;
    String::from_utf8(bytes).map_err(|error| {
        let good = &error.as_bytes()[..error.utf8_error().valid_up_to()];
        let line = String::from_utf8_lossy(good).matches('\n').count() + 1;
        refused(
            format!("line {line} is not UTF-8 text"),
            "a pipeline is a TOML file: save it as UTF-8, or name the pipeline instead of a trajectory",
        )
    })
}
