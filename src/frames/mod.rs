//! Reading: trajectories, topologies and thermo series become [`Frame`]s, [`SheetAtoms`] and [`ThermoSeries`].
//!
//! Everything here is in the program's units (A, ps, eV, K, g/mol), whatever the file was written in.

mod cell;
mod error;
mod frame;
mod run_input;
mod source;

pub use cell::{Cell, CellAxis, cross, dot, length};
pub use error::FrameError;
pub use frame::{Frame, SheetAtoms};
pub use run_input::{Clock, EngineUnits, RunInput};
pub use source::FrameSource;
