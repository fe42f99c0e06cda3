//! The modes of the surface: the longest waves frame by frame, all others as sums.

use ndarray::Array2;
use num_complex::Complex64;

use super::{LAGS, Measured, Measurement, ModeSums, Series};
use crate::sheet::{LONG_WAVES, Surface};

/// Series of h of the first [`LONG_WAVES`] modes (real and imaginary part in turn, in A), and [`ModeSums`] of the others.
pub struct Spectrum {
    /// Number of modes of the run.
    modes: usize,
    /// Modes of the frames of the block, one frame after the other: lagged products need them all until it closes.
    modes_of_frames: Vec<Complex64>,
    /// Number of frames seen.
    count: usize,
}

impl Spectrum {
    /// For a run with this many modes.
    pub fn new(modes: usize) -> Self {
        Self {
            modes,
            modes_of_frames: Vec::new(),
            count: 0,
        }
    }
}

impl Measurement for Spectrum {
    fn observe(&mut self, surface: &Surface) {
        self.modes_of_frames.extend_from_slice(&surface.modes);
        self.count += 1;
    }

    fn close(self: Box<Self>) -> Measured {
        let long = self.modes.min(LONG_WAVES);
        let frames: Vec<&[Complex64]> = (0..self.count)
            .map(|frame| &self.modes_of_frames[frame * self.modes..][..self.modes])
            .collect();
        let mut values = Array2::zeros((frames.len(), 2 * long));
        for (mut row, frame) in values.rows_mut().into_iter().zip(&frames) {
            for (k, h) in frame[..long].iter().enumerate() {
                row[2 * k] = h.re;
                row[2 * k + 1] = h.im;
            }
        }
        let columns = (0..long)
            .flat_map(|k| [format!("h{k}_re_A"), format!("h{k}_im_A")])
            .collect();
        Measured {
            series: Some(Series { columns, values }),
            sums: Some(sum_modes(&frames, long, self.modes)),
        }
    }
}

/// Sums over the frames of a block for the modes `from..to`, in frame order.
fn sum_modes(frames: &[&[Complex64]], from: usize, to: usize) -> ModeSums {
    let mut sums = ModeSums::zero(to - from);
    for (t, frame) in frames.iter().enumerate() {
        let now = &frame[from..to];
        for (k, h) in now.iter().enumerate() {
            let power = h.norm_sqr();
            sums.height[k] += h;
            sums.power[k] += power;
            sums.power_squared[k] += power * power;
        }
        for (products, lag) in sums.lagged.iter_mut().zip(LAGS) {
            if let Some(later) = frames.get(t + lag) {
                for ((product, h), next) in products.iter_mut().zip(now).zip(&later[from..to]) {
                    *product += h.conj() * next;
                }
            }
        }
    }
    sums
}
