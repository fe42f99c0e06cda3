//! Block means of every mode, long waves and others alike.

use ndarray::{Array2, ArrayView2, Axis, Slice};
use num_complex::Complex64;

use super::{EstimateError, history_view::HistoryView};

/// Above this many blocks neighbours are joined pairwise: what is kept stays bounded however long the run.
const MOST_BLOCKS: usize = 512;

/// Block means of h, |h|^2 and the run's mean of |h|^4, modes in a chosen order.
pub(super) struct ModeBlocks {
    /// Frames in each block.
    pub(super) frames: Vec<usize>,
    /// Real part of the block means of h in A, shape (blocks, modes).
    pub(super) real: Array2<f64>,
    /// Imaginary part.
    pub(super) imaginary: Array2<f64>,
    /// Block means of |h|^2 in A^2, shape (blocks, modes).
    pub(super) power: Array2<f64>,
    /// Mean of |h|^4 over all frames, in A^4.
    pub(super) power_squared: Vec<f64>,
}

impl ModeBlocks {
    /// Gathers the blocks of `view`; `heights` are its long waves, `order` the mode at each place.
    pub(super) fn gather(
        view: &HistoryView<'_>,
        heights: &ArrayView2<'_, Complex64>,
        order: &[usize],
    ) -> Result<Self, EstimateError> {
        let own_frames = view.block_frames();
        let mut joined = 1;
        while own_frames.len().div_ceil(joined) > MOST_BLOCKS {
            joined *= 2;
        }
        let frames: Vec<usize> = own_frames.chunks(joined).map(|c| c.iter().sum()).collect();
        let shape = (frames.len(), order.len());
        let mut blocks = Self {
            real: Array2::zeros(shape),
            imaginary: Array2::zeros(shape),
            power: Array2::zeros(shape),
            power_squared: vec![0.0; order.len()],
            frames,
        };
        let long = view.long_waves();
        let mut start = 0;
        for (b, &count) in blocks.frames.iter().enumerate() {
            for (place, &mode) in order.iter().enumerate().filter(|&(_, &mode)| mode < long) {
                for h in heights
                    .column(mode)
                    .slice_axis(Axis(0), Slice::from(start..start + count))
                {
                    let power = h.norm_sqr();
                    blocks.real[[b, place]] += h.re;
                    blocks.imaginary[[b, place]] += h.im;
                    blocks.power[[b, place]] += power;
                    blocks.power_squared[place] += power * power;
                }
            }
            start += count;
        }
        for (own, sums) in view.sums()?.into_iter().enumerate() {
            let b = own / joined;
            for (place, &mode) in order.iter().enumerate().filter(|&(_, &mode)| mode >= long) {
                let other = mode - long;
                blocks.real[[b, place]] += sums.height[other].re;
                blocks.imaginary[[b, place]] += sums.height[other].im;
                blocks.power[[b, place]] += sums.power[other];
                blocks.power_squared[place] += sums.power_squared[other];
            }
        }
        for (b, &count) in blocks.frames.iter().enumerate() {
            for sums in [&mut blocks.real, &mut blocks.imaginary, &mut blocks.power] {
                sums.row_mut(b).mapv_inplace(|x| x / count as f64);
            }
        }
        let total = blocks.total_frames() as f64;
        blocks.power_squared.iter_mut().for_each(|x| *x /= total);
        Ok(blocks)
    }

    /// Frames in all blocks.
    pub(super) fn total_frames(&self) -> usize {
        self.frames.iter().sum()
    }

    /// Mean over all frames of one of the block arrays.
    pub(super) fn mean(&self, of: &Array2<f64>) -> Vec<f64> {
        let total = self.total_frames() as f64;
        let weights: ndarray::Array1<f64> = self.frames.iter().map(|&f| f as f64 / total).collect();
        weights.dot(of).to_vec()
    }

    /// How many blocks at the start are equally long: all, or all but a short last one.
    pub(super) fn whole_blocks(&self) -> usize {
        let longest = self.frames.iter().copied().max().unwrap_or(0);
        self.frames.iter().take_while(|&&f| f == longest).count()
    }
}
