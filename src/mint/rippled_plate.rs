//! The energy of the nonlinear plate in a periodic box, and its gradient, on the height modes.
//!
//! With the in-plane displacements integrated out (Nelson and Peliti, J. Phys. France 48, 1085 (1987); Katsnelson, The Physics
//! of Graphene, ch. 9), and h(x) = sum_q h_q exp(i q.x) over q and -q, none at q = 0,
//!
//! ```text
//! E = (A/2) sum_q (kappa0(q) q^4 + sigma q^2) |h_q|^2 + (A Y/2) sum_q |F_q|^2
//! F = (1/2) P^T_ij d_i h d_j h,    P^T_ij = delta_ij - q_i q_j/q^2
//! ```
//!
//! In a free cell the q = 0 part of the stretching relaxes away with the cell. In a fixed one it stays: (A/2) e.C.e with
//! e_ij = mean strain + (1/2) sum_p p_i p_j |h_p|^2, and the tension acts through the mean strain alone.
//! F is kept on the modes that carry heights, as in the sums of [`crate::theory::box_scsa`].

use num_complex::Complex64;

use super::mode_grid::ModeGrid;
use crate::theory::{BoxModes, PlaneModuli, PlateState};

/// Strain, or stress, in Voigt order 1, 2, 6; the sixth strain is twice e12.
pub type Voigt = [f64; 3];

/// What the box does under the ripples' pull.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum CellCondition {
    /// It breathes at the tension of the plate's state.
    Free,
    /// It is held.
    Fixed {
        /// Strain of the flat sheet that the box imposes.
        mean_strain: Voigt,
    },
}

/// The energy surface of one plate in one box, with the memory its evaluation needs.
pub struct RippledPlate {
    area: f64,
    state: PlateState,
    stiffness: [[f64; 3]; 3],
    condition: CellCondition,
    wave_vectors: Vec<[f64; 2]>,
    grid: ModeGrid,
    slopes: Vec<Complex64>,
    products: [Vec<Complex64>; 2],
    stretching: Vec<Complex64>,
}

impl RippledPlate {
    /// The plate `state` with Poisson ratio `poisson` on `modes`, whose weights are not used. The Poisson ratio matters in a
    /// fixed cell only.
    #[must_use]
    pub fn new(modes: &BoxModes, state: PlateState, poisson: f64, condition: CellCondition) -> Self {
        Self {
            area: modes.cell.area(),
            state,
            stiffness: PlaneModuli::from_youngs_and_poisson(state.youngs, poisson).stiffness(),
            condition,
            wave_vectors: modes.wave_vectors(),
            grid: ModeGrid::new(modes),
            slopes: Vec::new(),
            products: [Vec::new(), Vec::new()],
            stretching: vec![Complex64::ZERO; modes.len()],
        }
    }

    /// Number of independent modes.
    #[must_use]
    pub fn len(&self) -> usize {
        self.wave_vectors.len()
    }

    /// Whether there is no mode.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.wave_vectors.is_empty()
    }

    /// Area of the box in A^2.
    #[must_use]
    pub fn area(&self) -> f64 {
        self.area
    }

    /// The plate.
    #[must_use]
    pub fn state(&self) -> &PlateState {
        &self.state
    }

    /// Wave vector of each mode, in 1/A.
    #[must_use]
    pub fn wave_vectors(&self) -> &[[f64; 2]] {
        &self.wave_vectors
    }

    /// What the box does.
    #[must_use]
    pub fn condition(&self) -> CellCondition {
        self.condition
    }

    /// Changes the strain that a fixed box imposes; of a free one, nothing.
    pub(super) fn impose(&mut self, strain: Voigt) {
        if let CellCondition::Fixed { mean_strain } = &mut self.condition {
            *mean_strain = strain;
        }
    }

    /// The mean strain that the slopes of the ripples make, (1/2) sum_p p_i p_j |h_p|^2 over p and -p.
    #[must_use]
    pub fn ripple_strain(&self, heights: &[Complex64]) -> Voigt {
        let mut strain = [0.0; 3];
        for (h, q) in heights.iter().zip(&self.wave_vectors) {
            for (sum, product) in strain.iter_mut().zip(voigt(*q)) {
                *sum += product * h.norm_sqr();
            }
        }
        strain
    }

    /// Stress of a fixed box in eV/A^2, C.e; `None` of a free one.
    #[must_use]
    pub fn stress(&self, heights: &[Complex64]) -> Option<Voigt> {
        let CellCondition::Fixed { mean_strain } = self.condition else {
            return None;
        };
        let ripples = self.ripple_strain(heights);
        let strain = [0, 1, 2].map(|i| mean_strain[i] + ripples[i]);
        Some([0, 1, 2].map(|i| (0..3).map(|j| self.stiffness[i][j] * strain[j]).sum()))
    }

    /// Energy in eV of the heights h_q (A) of each mode; into `gradient` dE/dRe h_q + i dE/dIm h_q, in eV/A.
    ///
    /// Of 2 A conj(g_q) dh_q, the change of the energy with one mode and its mirror image, g is the field
    /// -d_j (T_ij d_i h) with T = Y P^T F, the ripples' own stress.
    pub fn energy(&mut self, heights: &[Complex64], gradient: &mut [Complex64]) -> f64 {
        let imaginary = Complex64::i();
        let youngs = self.state.youngs;
        let q = &self.wave_vectors;
        let slope = |mode: usize| q[mode].map(|component| imaginary * component * heights[mode]);
        self.grid.at_points(slope, &mut self.slopes);

        let [squares, mixed] = &mut self.products;
        squares.clear();
        squares.extend(
            self.slopes
                .iter()
                .map(|s| Complex64::new(s.re * s.re, s.im * s.im)),
        );
        mixed.clear();
        mixed.extend(self.slopes.iter().map(|s| Complex64::new(s.re * s.im, 0.0)));
        let stretching = &mut self.stretching;
        self.grid.at_modes(squares, |mode, [xx, yy]| {
            let [x, y] = q[mode];
            stretching[mode] = (xx * (y * y) + yy * (x * x)) * (0.5 / (x * x + y * y));
        });
        self.grid.at_modes(mixed, |mode, [xy, _]| {
            let [x, y] = q[mode];
            stretching[mode] -= xy * (x * y / (x * x + y * y));
        });
        let mut energy = self.area * youngs * stretching.iter().map(Complex64::norm_sqr).sum::<f64>();

        let diagonal = |mode: usize| {
            let [x, y] = q[mode];
            [y * y, x * x].map(|part| stretching[mode] * (youngs * part / (x * x + y * y)))
        };
        self.grid.at_points(diagonal, squares);
        let off_diagonal = |mode: usize| {
            let [x, y] = q[mode];
            [
                stretching[mode] * (-youngs * x * y / (x * x + y * y)),
                Complex64::ZERO,
            ]
        };
        self.grid.at_points(off_diagonal, mixed);
        for ((stress, shear), s) in squares.iter_mut().zip(mixed.iter()).zip(&self.slopes) {
            *stress = Complex64::new(
                stress.re * s.re + shear.re * s.im,
                shear.re * s.re + stress.im * s.im,
            );
        }
        let area = self.area;
        self.grid.at_modes(squares, |mode, [along_x, along_y]| {
            let [x, y] = q[mode];
            gradient[mode] = (along_x * x + along_y * y) * (-2.0 * area * imaginary);
        });

        // The energy of a fixed box, (A/2) e.C.e, pulls on a mode as a tension C.e does.
        let stress = match self.condition {
            CellCondition::Free => [self.state.tension, self.state.tension, 0.0],
            CellCondition::Fixed { mean_strain } => {
                let stress = self.stress(heights).unwrap_or([0.0; 3]);
                let ripples = self.ripple_strain(heights);
                // Half of e.C.e, less what the modes add below as if under a constant stress.
                energy += (0..3)
                    .map(|i| 0.5 * area * stress[i] * (mean_strain[i] - ripples[i]))
                    .sum::<f64>();
                stress
            }
        };
        for ((g, h), q) in gradient.iter_mut().zip(heights).zip(&self.wave_vectors) {
            let square = q[0] * q[0] + q[1] * q[1];
            let pull: f64 = voigt(*q).iter().zip(&stress).map(|(p, s)| p * s).sum();
            let bending = self.state.bare_kappa(square.sqrt()) * square * square;
            let stiffness = area * (bending + pull);
            energy += stiffness * h.norm_sqr();
            *g += h * (2.0 * stiffness);
        }
        energy
    }
}

/// q_i q_j in Voigt order, the sixth doubled.
fn voigt([x, y]: [f64; 2]) -> Voigt {
    [x * x, y * y, 2.0 * x * y]
}
