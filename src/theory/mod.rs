//! Plate and membrane theory: formulas only, with their prefactors, units and sources. Knows nothing of frames.

mod plane_cell;

pub use plane_cell::PlaneCell;
