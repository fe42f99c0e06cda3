//! Sums over pairs of modes with the kernel (k x p)^4, as convolutions on the grid of modes.
//!
//! The kernel expands into five products of the components of k and of p,
//!
//! ```text
//! (k x p)^4 = sum_{j=0..4} binomial(4, j) (-1)^j  kx^(4-j) ky^j  px^j py^(4-j)
//! ```
//!
//! so that sum_p (k x p)^4 f(p) g(k - p) is five convolutions of px^j py^(4-j) f(p) with g, each one product on a grid that
//! is padded with zeros until no wrapped pair reaches a mode. All fields are real and even, so are their transforms, and
//! two of them ride in the real and imaginary part of one complex transform.

use std::sync::Arc;

use num_complex::Complex64;
use rustfft::{Fft, FftPlanner};

use super::BoxModes;
use crate::numerics::fast_length;

/// binomial(4, j) (-1)^j.
const EXPANSION: [f64; 5] = [1.0, -4.0, 6.0, -4.0, 1.0];

/// Plans and places for convolutions over the modes of one box.
pub(super) struct ModeConvolution {
    /// Grid length along m1 and m2.
    lengths: [usize; 2],
    /// Grid places of m and of -m, for each mode.
    places: Vec<[usize; 2]>,
    /// Wave vector of each mode, in 1/A.
    wave_vectors: Vec<[f64; 2]>,
    weights: Vec<f64>,
    /// The least |q|^4, in A^-4: the propagator is scaled by it where it shares a transform with its fourth moment. The two
    /// are then of one size; otherwise the rounding of the larger, 1/|q|^4 times the other, would drown the smaller.
    least_q4: f64,
    forward: [Arc<dyn Fft<f64>>; 2],
    inverse: [Arc<dyn Fft<f64>>; 2],
}

/// Transforms of a propagator G(p) and of its moments px^j py^(4-j) G(p): three grids that carry moments (0, 1), (2, 3) and
/// (4, G) in their real and imaginary parts.
pub(super) struct MomentTransforms {
    parts: [Vec<Complex64>; 3],
    /// What G was multiplied by.
    scale: f64,
}

/// Transform of one even field, real.
pub(super) struct FieldTransform(Vec<f64>);

impl ModeConvolution {
    pub(super) fn new(modes: &BoxModes) -> Self {
        let length = |axis: usize| {
            let most = modes.integers.iter().map(|m| m[axis].unsigned_abs()).max();
            // Sums of two modes reach 2M; wrapped, they stay clear of -M..M on 3M + 1 points.
            fast_length(3 * most.unwrap_or(0) as usize + 1)
        };
        let lengths = [length(0), length(1)];
        let place = |m: [i32; 2]| {
            let wrap = |m: i32, length: usize| m.rem_euclid(length as i32) as usize;
            wrap(m[0], lengths[0]) * lengths[1] + wrap(m[1], lengths[1])
        };
        let wave_vectors = modes.wave_vectors();
        let least_q4 = wave_vectors
            .iter()
            .map(|q| q[0].hypot(q[1]).powi(4))
            .fold(f64::INFINITY, f64::min);
        let mut planner = FftPlanner::new();
        Self {
            lengths,
            places: modes
                .integers
                .iter()
                .map(|&[m1, m2]| [place([m1, m2]), place([-m1, -m2])])
                .collect(),
            wave_vectors,
            weights: modes.weights.clone(),
            least_q4,
            forward: lengths.map(|length| planner.plan_fft_forward(length)),
            inverse: lengths.map(|length| planner.plan_fft_inverse(length)),
        }
    }

    /// p_i p_j of each mode in Voigt order 1, 2, 6 with the sixth doubled, in A^-2: twice the strain that |h_p|^2 hides.
    pub(super) fn strains(&self) -> Vec<[f64; 3]> {
        let strain = |&[x, y]: &[f64; 2]| [x * x, y * y, 2.0 * x * y];
        self.wave_vectors.iter().map(strain).collect()
    }

    /// Weight of each mode.
    pub(super) fn weights(&self) -> &[f64] {
        &self.weights
    }

    /// Transforms of the propagator G, given on every mode; each mode counts with its weight.
    pub(super) fn moments(&self, propagator: &[f64]) -> MomentTransforms {
        let moment = |mode: usize, j: i32| {
            let [x, y] = self.wave_vectors[mode];
            x.powi(j) * y.powi(4 - j) * self.weights[mode] * propagator[mode]
        };
        let scalar = |mode: usize| self.least_q4 * self.weights[mode] * propagator[mode];
        let parts = [
            self.transform(|mode| Complex64::new(moment(mode, 0), moment(mode, 1))),
            self.transform(|mode| Complex64::new(moment(mode, 2), moment(mode, 3))),
            self.transform(|mode| Complex64::new(moment(mode, 4), scalar(mode))),
        ];
        MomentTransforms {
            parts,
            scale: self.least_q4,
        }
    }

    /// Transform of an even field given on every mode; each mode counts with its weight.
    pub(super) fn field(&self, field: &[f64]) -> FieldTransform {
        let transform = self.transform(|mode| Complex64::new(self.weights[mode] * field[mode], 0.0));
        FieldTransform(transform.iter().map(|value| value.re).collect())
    }

    /// sum over pairs and over p of (k x p)^4 f(p) g(k - p) on every mode k, for pairs (moments of f, transform of g).
    pub(super) fn pair_sum(&self, pairs: &[(&MomentTransforms, &FieldTransform)]) -> Vec<f64> {
        let parts = [0, 1, 2].map(|part| {
            let mut product = vec![Complex64::ZERO; self.lengths[0] * self.lengths[1]];
            for (moments, field) in pairs {
                for ((sum, moment), factor) in product.iter_mut().zip(&moments.parts[part]).zip(&field.0) {
                    *sum += moment * factor;
                }
            }
            self.transform_back(product)
        });
        let scale = 1.0 / (self.lengths[0] * self.lengths[1]) as f64;
        let sum_at = |(place, &[x, y]): (&[usize; 2], &[f64; 2])| {
            let [a, b, c] = [0, 1, 2].map(|part: usize| parts[part][place[0]]);
            let moments = [a.re, a.im, b.re, b.im, c.re];
            let mut sum = 0.0;
            for (j, (factor, moment)) in (0..).zip(EXPANSION.iter().zip(moments)) {
                sum += factor * x.powi(4 - j) * y.powi(j) * moment;
            }
            sum * scale
        };
        self.places.iter().zip(&self.wave_vectors).map(sum_at).collect()
    }

    /// Scatters a field over m and -m and transforms it; the result is transposed.
    fn transform(&self, field: impl Fn(usize) -> Complex64) -> Vec<Complex64> {
        let [rows, columns] = self.lengths;
        let mut grid = vec![Complex64::ZERO; rows * columns];
        for (mode, &[plus, minus]) in self.places.iter().enumerate() {
            let value = field(mode);
            grid[plus] = value;
            grid[minus] = value;
        }
        self.forward[1].process(&mut grid);
        let mut turned = transposed(&grid, rows, columns);
        self.forward[0].process(&mut turned);
        turned
    }

    /// Undoes [`Self::transform`], unscaled.
    fn transform_back(&self, mut turned: Vec<Complex64>) -> Vec<Complex64> {
        let [rows, columns] = self.lengths;
        self.inverse[0].process(&mut turned);
        let mut grid = transposed(&turned, columns, rows);
        self.inverse[1].process(&mut grid);
        grid
    }
}

impl MomentTransforms {
    /// Transform of the propagator itself, which rides with the last moment.
    pub(super) fn propagator(&self) -> FieldTransform {
        FieldTransform(self.parts[2].iter().map(|value| value.im / self.scale).collect())
    }
}

fn transposed(grid: &[Complex64], rows: usize, columns: usize) -> Vec<Complex64> {
    let mut turned = vec![Complex64::ZERO; grid.len()];
    for (row, values) in grid.chunks_exact(columns).enumerate() {
        for (column, &value) in values.iter().enumerate() {
            turned[column * rows + row] = value;
        }
    }
    turned
}
