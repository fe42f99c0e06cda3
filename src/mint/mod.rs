//! Synthetic sheets whose parameters are known.
//!
//! `plate` sets are equilibrium samples of the full nonlinear thermal plate in a periodic box: the ground truth for
//! parameters that depend on scale.

mod hybrid_monte_carlo;
mod mode_grid;
mod rippled_plate;

pub use hybrid_monte_carlo::{CellHold, HybridMonteCarlo};
pub use rippled_plate::{CellCondition, RippledPlate, Voigt};
