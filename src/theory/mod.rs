//! Plate and membrane theory: formulas only, with their prefactors, units and sources. Knows nothing of frames.

mod box_compliance;
mod box_modes;
mod box_response;
pub mod box_scsa;
mod brillouin_zone;
mod clamped_cell;
mod infinite_scsa;
mod mode_convolution;
pub mod one_loop;
mod plane_cell;
pub mod plate;

pub use box_modes::BoxModes;
pub use box_response::{PlateParameter, Response};
pub use box_scsa::{BoxScsa, BoxSolution, ScsaError};
pub use brillouin_zone::BrillouinZone;
pub use infinite_scsa::InfiniteScsa;
pub use plane_cell::PlaneCell;
pub use plate::{PlaneModuli, PlateState};
