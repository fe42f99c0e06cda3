//! Synthetic sheets whose parameters are known.
//!
//! `plate` sets are equilibrium samples of the full nonlinear thermal plate in a periodic box: the ground truth for
//! parameters that depend on scale. [`mint_plate`] is the whole of it: plan, sample, write atoms, state the truth.

mod error;
mod flat_lattice;
mod hybrid_monte_carlo;
mod in_plane;
mod long_chain;
mod mode_grid;
mod plate_box;
mod plate_request;
mod plate_set;
mod progress;
mod rippled_plate;
mod sheet_frames;
mod truth;

pub use error::MintError;
pub use flat_lattice::{FlatLattice, LatticeKind};
pub use hybrid_monte_carlo::{CellHold, HybridMonteCarlo};
pub use plate_request::PlateRequest;
pub use plate_set::mint_plate;
pub use progress::Progress;
pub use rippled_plate::{CellCondition, RippledPlate, Voigt};
