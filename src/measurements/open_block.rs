//! A block while its frames come in.

use super::{BlockRecord, Measured, Measurement, REGISTRY, Record};
use crate::sheet::{ModeSet, Surface};

/// Measures one block: every registered measurement sees every surface, in frame order.
pub struct OpenBlock {
    measurements: Vec<(&'static str, Box<dyn Measurement>)>,
    frames: usize,
}

impl OpenBlock {
    /// Opens a block for all registered measurements, of a run with these modes.
    #[must_use]
    pub fn new(modes: &ModeSet) -> Self {
        Self {
            measurements: REGISTRY.iter().map(|row| (row.name, (row.open)(modes))).collect(),
            frames: 0,
        }
    }

    /// Sees the next frame.
    pub fn observe(&mut self, surface: &Surface) {
        self.frames += 1;
        for (_, measurement) in &mut self.measurements {
            measurement.observe(surface);
        }
    }

    /// Closes the block.
    #[must_use]
    pub fn close(self) -> BlockRecord {
        let records = self
            .measurements
            .into_iter()
            .map(|(name, measurement)| {
                let Measured { series, sums } = measurement.close();
                Record {
                    measurement: name.to_owned(),
                    series,
                    sums,
                }
            })
            .collect();
        BlockRecord {
            frames: self.frames,
            records,
        }
    }
}
