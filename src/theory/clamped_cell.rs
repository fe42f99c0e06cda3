//! A fixed cell: the ripples' mean strain has no cell to relax into, and stiffens the longest waves.
//!
//! In a cell whose strain is clamped the energy gains the q = 0 term that a free cell relaxes away,
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

use nalgebra::{Matrix3, Vector3};

use super::{BoxModes, PlaneModuli, PlateState};

/// The clamped strain of a box, all components of it, at the mean stress of the plate's tension.
pub(super) struct ClampedCell {
    area: f64,
    /// p_i p_j of each mode in Voigt order 1, 2, 6 with the sixth doubled, in A^-2.
    strains: Vec<Vector3<f64>>,
    weights: Vec<f64>,
    /// Of the bare sheet, within (-1, 1).
    poisson: f64,
}

impl ClampedCell {
    pub(super) fn new(modes: &BoxModes, poisson: f64) -> Self {
        let strain = |[x, y]: [f64; 2]| Vector3::new(x * x, y * y, 2.0 * x * y);
        Self {
            area: modes.cell.area().abs(),
            strains: modes.wave_vectors().into_iter().map(strain).collect(),
            weights: modes.weights.clone(),
            poisson,
        }
    }

    /// What the clamp adds to kappa(k) of each mode, in eV, given G of each mode in A^4.
    pub(super) fn self_energy(&self, state: &PlateState, propagator: &[f64]) -> Vec<f64> {
        let stiffness = PlaneModuli::from_youngs_and_poisson(state.youngs, self.poisson).stiffness();
        let stiffness = Matrix3::from_fn(|i, j| stiffness[i][j]);
        let mut screening = Matrix3::zeros();
        for ((strain, weight), g) in self.strains.iter().zip(&self.weights).zip(propagator) {
            // q and -q both count.
            screening += strain * strain.transpose() * (2.0 * weight * g * g);
        }
        screening *= 0.5 / (state.thermal_energy() * self.area);
        // (C^-1 + Pi_0)^-1 = (1 + C Pi_0)^-1 C: one plus a product of positive matrices is never singular.
        let screened = (Matrix3::identity() + stiffness * screening)
            .try_inverse()
            .expect("the product of two positive matrices has no negative eigenvalue")
            * stiffness;
        let per_mode = |(strain, g): (&Vector3<f64>, &f64)| {
            let square = strain[0] + strain[1];
            strain.dot(&(screened * strain)) / (square * square) * g / self.area
        };
        self.strains.iter().zip(propagator).map(per_mode).collect()
    }
}
