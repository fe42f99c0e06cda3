//! Measurements: each observes the surfaces of a block and closes as one [`Record`].
//!
//! To add a measurement: one new file that implements [`Measurement`], one `mod` line and one row in [`REGISTRY`].

mod area;
mod open_block;

mod record;
mod spectrum;
mod strain;
mod tilt;

pub use open_block::OpenBlock;
pub use record::{BlockRecord, History, LAGS, ModeSums, Record, Series};

use crate::sheet::{ModeSet, Surface};

/// One measurement over one block of frames.
pub trait Measurement: Send {
    /// Sees the next frame of the block.
    fn observe(&mut self, surface: &Surface);

    /// Ends the block. Not every block is full, and a block may be empty.
    fn close(self: Box<Self>) -> Measured;
}

/// What a measurement leaves of a block; the registry gives it its name.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Measured {
    /// The per-frame part, where there is one.
    pub series: Option<Series>,
    /// The summed part, where there is one.
    pub sums: Option<ModeSums>,
}

/// One row of the registry.
pub struct Row {
    /// Name of the measurement, as in records and stored blocks.
    pub name: &'static str,
    /// What it measures, for documentation.
    pub summary: &'static str,
    /// Opens it for one block of a run with these modes.
    pub open: fn(&ModeSet) -> Box<dyn Measurement>,
}

/// Every measurement, in the order of the records in a block.
pub const REGISTRY: &[Row] = &[
    Row {
        name: "spectrum",
        summary: "h_q of the longest waves frame by frame; sums of h, |h|^2, |h|^4 and lagged products of every other mode",
        open: |modes| Box::new(spectrum::Spectrum::new(modes.len())),
    },
    Row {
        name: "area",
        summary: "projected area |a x b| frame by frame",
        open: |_| Box::new(area::Area::default()),
    },
    Row {
        name: "strain",
        summary: "scalar products of the in-plane cell vectors frame by frame",
        open: |_| Box::new(strain::Strain::default()),
    },
    Row {
        name: "tilt",
        summary: "height of the sheet's centre, tilt of the cell and mean slope frame by frame",
        open: |_| Box::new(tilt::Tilt::default()),
    },
];
