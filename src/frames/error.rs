//! What can be wrong with the files of a run.

use std::path::{Path, PathBuf};

use thiserror::Error;

/// An input file that cannot be used: where, what was found, what was expected, and what to do.
///
/// Frames and atoms are counted from 0 as in the file, lines from 1.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum FrameError {
    /// The file could not be opened or read.
    #[error("cannot read {}: {reason}", path.display())]
    Unreadable {
        /// The file.
        path: PathBuf,
        /// What the system or the parser said.
        reason: String,
    },
    /// A trajectory could not be written.
    #[error("cannot write {}: {reason}", path.display())]
    Unwritable {
        /// The file.
        path: PathBuf,
        /// What the system or the library said.
        reason: String,
    },
    /// A folder stands where a file was expected.
    #[error("{} is a directory, a {expected} file was expected; name a file, or a glob such as \"{}/*.xtc\"", path.display(), path.display())]
    Directory {
        /// The folder.
        path: PathBuf,
        /// What kind of file was expected.
        expected: &'static str,
    },
    /// No reader takes the file.
    #[error(
        "{}: the format of this file is not known ({reason}); give the file the extension of its format (optionally followed by .gz, .xz or .bz2): {known}",
        path.display()
    )]
    UnknownFormat {
        /// The file.
        path: PathBuf,
        /// Why no format was found.
        reason: String,
        /// Extensions of the formats that can be read.
        known: String,
    },
    /// The file holds no whole frame.
    #[error("{} holds no whole frame ({reason}); check that the simulation wrote it, or leave it out", path.display())]
    NoFrames {
        /// The file.
        path: PathBuf,
        /// What the file holds instead.
        reason: String,
    },
    /// A run without any trajectory file.
    #[error("the run names no trajectory file; give `trajectory` a path, a glob or a list of them")]
    NoFiles,
    /// A frame could not be parsed.
    #[error("{}, frame {frame}: {reason}; if the file was cut off there, remove that frame and what follows it", path.display())]
    BadFrame {
        /// The file.
        path: PathBuf,
        /// The frame, from 0.
        frame: usize,
        /// What is wrong.
        reason: String,
    },
    /// A frame holds another number of atoms than the first frame of the run.
    #[error(
        "{}, frame {frame}: {found} atoms, but the first frame of the run has {expected}; the atoms of a run must stay the same: write the trajectory again for a fixed group of atoms, or split the run",
        path.display()
    )]
    AtomCountChanged {
        /// The file.
        path: PathBuf,
        /// The frame, from 0.
        frame: usize,
        /// Number of atoms in this frame.
        found: usize,
        /// Number of atoms in the first frame of the run.
        expected: usize,
    },
    /// A coordinate or a cell component is NaN or infinite.
    #[error("{}, frame {frame}: {what} is {value}, a finite number was expected; the simulation has blown up or the file is damaged: end the run before this frame with `to`", path.display())]
    NotFinite {
        /// The file.
        path: PathBuf,
        /// The frame, from 0.
        frame: usize,
        /// Which number, such as "z of atom 17".
        what: String,
        /// The number as read.
        value: f64,
    },
    /// A frame has no periodic cell.
    #[error("{}, frame {frame}: no periodic cell; planish needs the cell of each frame: use a format that stores it (an extended XYZ with Lattice=\"...\" and Properties=species:S:1:pos:R:3, XTC, a LAMMPS dump)", path.display())]
    NoCell {
        /// The file.
        path: PathBuf,
        /// The frame, from 0.
        frame: usize,
    },
    /// One vector of the cell has no length, or the three span no volume.
    #[error("{}, frame {frame}: {what}, but the three cell vectors must span a volume; write the trajectory with its full cell, vacuum included", path.display())]
    FlatCell {
        /// The file.
        path: PathBuf,
        /// The frame, from 0.
        frame: usize,
        /// What is wrong with the cell.
        what: String,
    },
    /// The topology file describes another number of atoms.
    #[error(
        "topology {} has {found} atoms, but the trajectory {} has {expected}; give a topology file of the same atoms in the same order",
        topology.display(), trajectory.display()
    )]
    TopologyAtomCount {
        /// The topology file.
        topology: PathBuf,
        /// The trajectory file.
        trajectory: PathBuf,
        /// Atoms in the topology file.
        found: usize,
        /// Atoms in the trajectory's first frame.
        expected: usize,
    },
    /// `species` does not fit the types in the files.
    #[error("`species` and {}: {reason}", path.display())]
    SpeciesMismatch {
        /// The trajectory or topology file.
        path: PathBuf,
        /// What does not fit and what to do.
        reason: String,
    },
    /// The selection cannot be parsed.
    #[error(
        "cannot understand select = \"{selection}\": {reason}; examples: \"all\", \"name C\", 'type \"1\" or type \"2\"' (numbers of types in quotes), \"index < 1008\""
    )]
    BadSelection {
        /// The selection.
        selection: String,
        /// What the parser said.
        reason: String,
    },
    /// The selection matches no atom.
    #[error("select = \"{selection}\" matches none of the {atoms} atoms in the first frame of {}; {present}", path.display())]
    EmptySelection {
        /// The selection.
        selection: String,
        /// The trajectory file.
        path: PathBuf,
        /// Atoms in the first frame.
        atoms: usize,
        /// The names and types that could be selected.
        present: String,
    },
    /// `from` or `to` is given, but the frames have no times.
    #[error("`{key}` needs frame times, but {} has none ({reason}); give `frame_interval`, or `timestep` where the file has steps", path.display())]
    TimesNeeded {
        /// The file.
        path: PathBuf,
        /// The key of the pipeline file.
        key: &'static str,
        /// Why there are none.
        reason: String,
    },
    /// `timestep` is given, but the file has no steps.
    #[error("`timestep` needs step numbers, but {} ({format}) stores none; give `frame_interval`, the time between two frames, instead", path.display())]
    StepsNeeded {
        /// The file.
        path: PathBuf,
        /// Its format.
        format: String,
    },
    /// `from`, `to` and `stride` leave no frame.
    #[error("`from`, `to` and `stride` leave none of the {frames} frames of {}, which run from {first} ps to {last} ps", path.display())]
    NoFramesLeft {
        /// The first file of the run.
        path: PathBuf,
        /// Frames in all files.
        frames: usize,
        /// Time of the first frame, in ps.
        first: f64,
        /// Time of the last frame, in ps.
        last: f64,
    },
    /// A frame's time is not where the first frames of the file promised it.
    #[error("{}, frame {frame}: its time is {found} ps, {expected} ps was expected from the even spacing of other frames in this file; the file joins parts of runs: split it into one file a part and list them in time order", path.display())]
    TimeJump {
        /// The file.
        path: PathBuf,
        /// The frame, from 0.
        frame: usize,
        /// The frame's time in ps.
        found: f64,
        /// The time expected in ps.
        expected: f64,
    },
    /// A file that contradicts the stated units, or says none that planish knows.
    #[error("{}: {reason}", path.display())]
    Units {
        /// The file.
        path: PathBuf,
        /// What is wrong and what to do.
        reason: String,
    },
    /// A thermo file in no known format.
    #[error("{}: not a thermo series that planish can read ({reason}); it reads CSV with units in the column names (time_ps,temperature_K,...), LAMMPS logs, GROMACS .xvg and CP2K .ener files", path.display())]
    UnknownThermo {
        /// The file.
        path: PathBuf,
        /// What was found.
        reason: String,
    },
    /// A line of a thermo file that cannot be used.
    #[error("{}, line {line}: {reason}", path.display())]
    BadThermoLine {
        /// The file.
        path: PathBuf,
        /// The line, from 1.
        line: usize,
        /// What was found, what was expected, and what to do.
        reason: String,
    },
    /// The reading thread broke down inside a third-party reader.
    #[error(
        "the reader of trajectory files failed inside: {reason}; convert the file to another format (XTC or extended XYZ) and report this"
    )]
    ReaderFailed {
        /// The message of the failure.
        reason: String,
    },
}

/// The error of a file that the system does not let be read.
pub(super) fn unreadable(path: &Path, error: &std::io::Error) -> FrameError {
    FrameError::Unreadable {
        path: path.to_owned(),
        reason: error.to_string(),
    }
}
