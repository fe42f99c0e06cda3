//! Plate and membrane theory: formulas only, with their prefactors, units and sources. Knows nothing of frames.

mod box_modes;
pub mod box_scsa;
mod brillouin_zone;
mod mode_convolution;
pub mod one_loop;
mod plane_cell;
pub mod plate;

pub use box_modes::BoxModes;
pub use box_scsa::{BoxScsa, BoxSolution, PlateParameter, Response, ScsaError};
pub use brillouin_zone::BrillouinZone;
pub use plane_cell::PlaneCell;
pub use plate::{PlaneModuli, PlateState};
