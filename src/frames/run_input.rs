//! What the pipeline file says about the files of one run.

use std::path::PathBuf;

use serde::{Deserialize, Serialize};

use super::CellAxis;

/// The files of one run and how to read them, paths resolved and quantities in the program's units.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct RunInput {
    /// Trajectory files in time order. Each inner list is one entry of the pipeline file: a single path, or the matches of
    /// a glob, which are sorted by the first time in each file, then in natural name order.
    pub trajectory: Vec<Vec<PathBuf>>,
    /// File with the species or masses that the trajectory lacks.
    pub topology: Option<PathBuf>,
    /// Names of the numbered types, type 1 first.
    pub species: Option<Vec<String>>,
    /// Which atoms belong to the sheet, in chemfiles' selection language; evaluated once, on the first frame.
    pub select: String,
    /// The cell axis out of the plane.
    pub normal: CellAxis,
    /// Where frame times come from.
    pub clock: Clock,
    /// What bare numbers are in, where a file does not say.
    pub engine_units: Option<EngineUnits>,
    /// First time used, in ps.
    pub from: Option<f64>,
    /// Last time used, in ps.
    pub to: Option<f64>,
    /// Every how many frames one is used; at least 1.
    pub stride: usize,
    /// Thermo series: a CSV with units in its column names, or an engine's text log.
    pub thermo: Option<PathBuf>,
}

/// Where the times of frames come from.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub enum Clock {
    /// The file's own times, where it has them.
    #[default]
    File,
    /// Frames are this many ps apart.
    FrameInterval(f64),
    /// The file has steps; one step is this many ps.
    Timestep(f64),
}

/// Named unit systems of simulation engines.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum EngineUnits {
    /// A, ps, eV, bar, K.
    Metal,
    /// A, fs, kcal/mol, atm, K.
    Real,
    /// bohr, fs, hartree, Pa, K.
    Electron,
    /// m, s, J, Pa, K.
    Si,
    /// nm, ps, kJ/mol, bar, K.
    Gromacs,
}
