//! Clamped strains of the cell: there the ripples' mean strain has no cell to relax into, and stiffens the longest waves.
//!
//! Where components of the cell's strain are clamped the energy gains the q = 0 term that a free cell relaxes away,
//!
//! ```text
//! (A/2) e.C.e,   e_ij = mean strain + (1/2) sum_p p_i p_j |h_p|^2
//! ```
//!
//! Its exchange, screened as the others are, adds to the self-consistent rigidity (order by order as in
//! [`super::box_scsa`], with q = 0)
//!
//! ```text
//! kappa(k) += (1/A) khat_i khat_j khat_k khat_l C^R_ijkl G(k)
//! C^R = (C^-1 + Pi_0)^-1,   Pi_0,ijkl = 1/(2 kB T A) sum_p p_i p_j p_k p_l G(p)^2
//! ```
//!
//! where the inverse is that of the clamped components' block alone: free strains relax at constant stress.

use nalgebra::{DMatrix, Matrix3, Vector3};

use super::mode_convolution::ModeConvolution;
use super::{PlaneModuli, PlateState};

/// The clamped strains of a box, at the mean stress of the plate's tension.
pub(super) struct ClampedCell<'a> {
    convolution: &'a ModeConvolution,
    area: f64,
    /// Which of e1, e2, e6.
    clamped: Vec<usize>,
    /// Of the bare sheet, within (-1, 1).
    poisson: f64,
}

impl<'a> ClampedCell<'a> {
    pub(super) fn new(convolution: &'a ModeConvolution, area: f64, clamped: [bool; 3], poisson: f64) -> Self {
        Self {
            convolution,
            area,
            clamped: (0..3).filter(|&component| clamped[component]).collect(),
            poisson,
        }
    }

    /// What the clamp adds to kappa(k) of each mode, in eV, given G of each mode in A^4.
    pub(super) fn self_energy(&self, state: &PlateState, propagator: &[f64]) -> Vec<f64> {
        let strains: Vec<Vector3<f64>> = self
            .convolution
            .strains()
            .into_iter()
            .map(Vector3::from)
            .collect();
        let mut compliance = Matrix3::zeros();
        for ((strain, weight), g) in strains.iter().zip(self.convolution.weights()).zip(propagator) {
            // q and -q both count.
            compliance += strain * strain.transpose() * (2.0 * weight * g * g);
        }
        compliance *= 0.5 / (state.thermal_energy() * self.area);
        let bare = PlaneModuli::from_youngs_and_poisson(state.youngs, self.poisson).compliance();
        compliance += Matrix3::from_fn(|i, j| bare[i][j]);
        let size = self.clamped.len();
        let block = DMatrix::from_fn(size, size, |i, j| compliance[(self.clamped[i], self.clamped[j])])
            .cholesky()
            .expect("the sum of a positive and a non-negative matrix is positive")
            .inverse();
        let mut screened = Matrix3::zeros();
        for (i, &row) in self.clamped.iter().enumerate() {
            for (j, &column) in self.clamped.iter().enumerate() {
                screened[(row, column)] = block[(i, j)];
            }
        }
        let per_mode = |(strain, g): (&Vector3<f64>, &f64)| {
            let square = strain[0] + strain[1];
            strain.dot(&(screened * strain)) / (square * square) * g / self.area
        };
        strains.iter().zip(propagator).map(per_mode).collect()
    }
}
