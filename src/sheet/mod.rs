//! Projection: a [`Frame`](crate::frames::Frame) becomes a [`Surface`], heights over reference sites.
//!
//! What is found once, from the reference frames, makes a [`Projection`]: [`ReferenceSites`], [`Planes`], the
//! [`PrimitiveLattice`], the [`ModeSet`]. What every frame goes through: [`Displacements`], the watch for folds and hops,
//! heights, modes.

mod error;
mod extent;
mod folds;
mod hops;
mod lattice;
mod mode_transform;
mod modes;
mod neighbours;
mod plane_frame;
mod planes;
mod projection;
mod reference_sites;
mod surface;
mod unwrapping;

pub use error::SheetError;
pub use lattice::PrimitiveLattice;
pub use mode_transform::{ModeTransform, TransformScratch};
pub use modes::{LONG_WAVES, ModeSet};
pub use plane_frame::{PlaneFrame, unit_normal};
pub use planes::Planes;
pub use projection::{Positions, Projection, ProjectionScratch};
pub use reference_sites::{REFERENCE_FRAMES, ReferenceSites, reference_frame_indices};
pub use surface::Surface;
pub use unwrapping::Displacements;
