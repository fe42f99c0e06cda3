//! Reading: trajectories, topologies and thermo series become [`Frame`]s, [`SheetAtoms`] and [`ThermoSeries`].
//!
//! Everything here is in the program's units (A, ps, eV, K, g/mol), whatever the file was written in.
//!
//! [`RunFrames`] is the whole of it for a run's trajectory: it opens the files through [`open`], which gives each
//! to the reader of its format (a [`FrameSource`]), joins them in time and hands out checked frames.

mod atom_order;
mod cell;
mod cell_check;
mod chemfiles_reader;
mod chemfiles_thread;
mod decimal;
mod dump_box;
mod dump_columns;
mod dump_header;
mod dump_table;
mod engine_units;
mod error;
mod frame;
mod frame_place;
mod lammps_dump;
mod read_note;
mod reader;
mod run_files;
mod run_frames;
mod run_input;
mod source;
mod text_file;
mod thermo;
mod thermo_cp2k;
mod thermo_csv;
mod thermo_lammps_log;
mod thermo_quantity;
mod thermo_xvg;
mod time_table;
mod topology;
mod trajectory_writer;
mod xtc;

pub use cell::{Cell, CellAxis, cross, dot, length};
pub use chemfiles_reader::ChemfilesSource;
pub use error::FrameError;
pub use frame::{Frame, SheetAtoms};
pub use frame_place::FramePlace;
pub use lammps_dump::LammpsDumpSource;
pub use read_note::ReadNote;
pub use reader::open;
pub use run_frames::RunFrames;
pub use run_input::{Clock, EngineUnits, RunInput};
pub use source::{FirstFrameWork, FrameSource, ReadOptions};
pub use thermo::ThermoSeries;
pub use time_table::TimeTable;
pub use trajectory_writer::TrajectoryWriter;
pub use xtc::XtcSource;
