//! Fields on the modes of a box and on a grid of points, by fast Fourier transforms of two real fields at a time.

use std::sync::Arc;

use num_complex::Complex64;
use rustfft::{Fft, FftPlanner};

use crate::numerics::fast_length;
use crate::theory::BoxModes;

/// Plans, places and memory for transforms between the modes of a box and a grid of points in it.
///
/// A real field f(x) = sum_m f_m exp(2 pi i m.s) over m and -m, s the scaled coordinates. The grid has 3 M + 1 points or
/// more along an axis whose modes reach M, so that products of two fields, taken point by point, come back to the modes
/// without aliases (the rule of two thirds; Orszag, J. Atmos. Sci. 28, 1074 (1971)).
pub(super) struct ModeGrid {
    /// Points along m1 and m2.
    lengths: [usize; 2],
    /// Places of m and of -m.
    places: Vec<[usize; 2]>,
    /// Along the rows of the grid and along those of the turned one.
    forward: [Arc<dyn Fft<f64>>; 2],
    inverse: [Arc<dyn Fft<f64>>; 2],
    turned: Vec<Complex64>,
    scratch: Vec<Complex64>,
}

impl ModeGrid {
    pub(super) fn new(modes: &BoxModes) -> Self {
        let length = |axis: usize| {
            let most = modes.integers.iter().map(|m| m[axis].unsigned_abs()).max();
            fast_length(3 * most.unwrap_or(0) as usize + 1)
        };
        Self::with_lengths(modes, [length(0), length(1)])
    }

    /// A grid of given lengths, for [`Self::at_points`] alone where modes fall on one place.
    pub(super) fn with_lengths(modes: &BoxModes, lengths: [usize; 2]) -> Self {
        let place = |m: [i32; 2]| {
            let wrap = |m: i32, length: usize| m.rem_euclid(length as i32) as usize;
            wrap(m[0], lengths[0]) * lengths[1] + wrap(m[1], lengths[1])
        };
        let places = modes
            .integers
            .iter()
            .map(|&[m1, m2]| [place([m1, m2]), place([-m1, -m2])])
            .collect();
        let mut planner = FftPlanner::new();
        let forward = [1, 0].map(|axis: usize| planner.plan_fft_forward(lengths[axis]));
        let inverse = [1, 0].map(|axis: usize| planner.plan_fft_inverse(lengths[axis]));
        let scratch = forward
            .iter()
            .chain(&inverse)
            .map(|plan| plan.get_inplace_scratch_len())
            .max();
        Self {
            lengths,
            places,
            forward,
            inverse,
            turned: vec![Complex64::ZERO; lengths[0] * lengths[1]],
            scratch: vec![Complex64::ZERO; scratch.unwrap_or(0)],
        }
    }

    /// Points of the grid.
    pub(super) fn len(&self) -> usize {
        self.lengths[0] * self.lengths[1]
    }

    /// Two real fields, given on each mode, on the points: the first in the real part, the second in the imaginary.
    /// Point (k1, k2) is at k2 lengths[0] + k1, scaled coordinates (k1/lengths[0], k2/lengths[1]).
    pub(super) fn at_points(
        &mut self,
        fields: impl Fn(usize) -> [Complex64; 2],
        points: &mut Vec<Complex64>,
    ) {
        points.clear();
        points.resize(self.len(), Complex64::ZERO);
        for (mode, &[plus, minus]) in self.places.iter().enumerate() {
            let [f, g] = fields(mode);
            points[plus] += f + Complex64::i() * g;
            points[minus] += f.conj() + Complex64::i() * g.conj();
        }
        let [rows, columns] = self.lengths;
        self.inverse[0].process_with_scratch(points, &mut self.scratch);
        turn(points, &mut self.turned, rows, columns);
        self.inverse[1].process_with_scratch(&mut self.turned, &mut self.scratch);
        std::mem::swap(points, &mut self.turned);
    }

    /// Two real fields on the points, packed as by [`Self::at_points`], go to their modes; `points` is used up.
    pub(super) fn at_modes(
        &mut self,
        points: &mut Vec<Complex64>,
        mut each: impl FnMut(usize, [Complex64; 2]),
    ) {
        let [rows, columns] = self.lengths;
        self.forward[1].process_with_scratch(points, &mut self.scratch);
        turn(points, &mut self.turned, columns, rows);
        self.forward[0].process_with_scratch(&mut self.turned, &mut self.scratch);
        std::mem::swap(points, &mut self.turned);
        let half = 0.5 / self.len() as f64;
        for (mode, &[plus, minus]) in self.places.iter().enumerate() {
            let (here, there) = (points[plus], points[minus].conj());
            each(
                mode,
                [(here + there) * half, (here - there) * Complex64::new(0.0, -half)],
            );
        }
    }
}

fn turn(grid: &[Complex64], turned: &mut [Complex64], rows: usize, columns: usize) {
    for (row, values) in grid.chunks_exact(columns).enumerate() {
        for (column, &value) in values.iter().enumerate() {
            turned[column * rows + row] = value;
        }
    }
}
