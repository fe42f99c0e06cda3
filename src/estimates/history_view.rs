//! Reading a history's records: columns joined over blocks, sums block by block.

use ndarray::Array2;
use num_complex::Complex64;

use super::EstimateError;
use crate::measurements::{BlockRecord, History, ModeSums, Record};
use crate::sheet::LONG_WAVES;

const SPECTRUM: &str = "spectrum";

/// The blocks of a history that hold frames, from `first_block` on.
pub(super) struct HistoryView<'a> {
    history: &'a History,
    blocks: Vec<(usize, &'a BlockRecord)>,
}

impl<'a> HistoryView<'a> {
    /// All blocks with at least one frame.
    pub(super) fn new(history: &'a History) -> Self {
        let blocks = history
            .blocks
            .iter()
            .enumerate()
            .filter(|(_, b)| b.frames > 0)
            .collect();
        Self { history, blocks }
    }

    /// The same history without its first `blocks` blocks.
    pub(super) fn without_first(&self, blocks: usize) -> Self {
        Self {
            history: self.history,
            blocks: self.blocks[blocks..].to_vec(),
        }
    }

    /// Frames in each block.
    pub(super) fn block_frames(&self) -> Vec<usize> {
        self.blocks.iter().map(|(_, b)| b.frames).collect()
    }

    /// Frames in all.
    pub(super) fn frames(&self) -> usize {
        self.blocks.iter().map(|(_, b)| b.frames).sum()
    }

    /// Index in the history of the view's block `b`.
    pub(super) fn block_index(&self, b: usize) -> usize {
        self.blocks[b].0
    }

    /// How many of the history's modes keep their whole series.
    pub(super) fn long_waves(&self) -> usize {
        self.history.modes.len().min(LONG_WAVES)
    }

    /// One column of a measurement's series, one value per frame.
    pub(super) fn column(&self, measurement: &'static str, column: &str) -> Result<Vec<f64>, EstimateError> {
        let mut values = Vec::with_capacity(self.frames());
        for &(block, record) in &self.blocks {
            let missing = || EstimateError::Missing {
                block,
                measurement,
                what: format!("column \"{column}\""),
            };
            let series = find(record, measurement)
                .and_then(|r| r.series.as_ref())
                .ok_or_else(missing)?;
            let index = series
                .columns
                .iter()
                .position(|c| c == column)
                .ok_or_else(missing)?;
            check(block, measurement, "frames", series.values.nrows(), record.frames)?;
            check(
                block,
                measurement,
                "columns",
                series.values.ncols(),
                series.columns.len(),
            )?;
            values.extend(series.values.column(index));
        }
        Ok(values)
    }

    /// h of the long waves in A, shape (frames, long waves), in the history's mode order.
    pub(super) fn long_wave_heights(&self) -> Result<Array2<Complex64>, EstimateError> {
        let waves = self.long_waves();
        let mut heights = Array2::zeros((self.frames(), waves));
        let mut frame = 0;
        for &(block, record) in self.blocks.iter().filter(|_| waves > 0) {
            let series = find(record, SPECTRUM)
                .and_then(|r| r.series.as_ref())
                .ok_or_else(|| EstimateError::Missing {
                    block,
                    measurement: SPECTRUM,
                    what: "series".into(),
                })?;
            check(block, SPECTRUM, "frames", series.values.nrows(), record.frames)?;
            check(block, SPECTRUM, "columns", series.values.ncols(), 2 * waves)?;
            for row in series.values.rows() {
                for wave in 0..waves {
                    heights[[frame, wave]] = Complex64::new(row[2 * wave], row[2 * wave + 1]);
                }
                frame += 1;
            }
        }
        Ok(heights)
    }

    /// The sums of all modes beyond the long waves, one entry a block; empty where there are none.
    pub(super) fn sums(&self) -> Result<Vec<&'a ModeSums>, EstimateError> {
        let others = self.history.modes.len() - self.long_waves();
        if others == 0 {
            return Ok(Vec::new());
        }
        self.blocks
            .iter()
            .map(|&(block, record)| {
                let sums = find(record, SPECTRUM)
                    .and_then(|r| r.sums.as_ref())
                    .ok_or_else(|| EstimateError::Missing {
                        block,
                        measurement: SPECTRUM,
                        what: "sums".into(),
                    })?;
                for found in [sums.height.len(), sums.power.len(), sums.power_squared.len()] {
                    check(block, SPECTRUM, "modes", found, others)?;
                }
                Ok(sums)
            })
            .collect()
    }
}

fn find<'a>(block: &'a BlockRecord, measurement: &str) -> Option<&'a Record> {
    block.records.iter().find(|r| r.measurement == measurement)
}

fn check(
    block: usize,
    measurement: &'static str,
    what: &'static str,
    found: usize,
    expected: usize,
) -> Result<(), EstimateError> {
    if found == expected {
        Ok(())
    } else {
        Err(EstimateError::Shape {
            block,
            measurement,
            what,
            found,
            expected,
        })
    }
}
