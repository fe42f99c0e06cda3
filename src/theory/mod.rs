//! Plate and membrane theory: formulas only, with their prefactors, units and sources. Knows nothing of frames.

mod brillouin_zone;
mod plane_cell;

pub use brillouin_zone::BrillouinZone;
pub use plane_cell::PlaneCell;
