//! The compliance of a periodic box, softened by its ripples.
//!
//! The cell's strain is that of the flat sheet less what the ripples hide, so that under the stresses sigma_kl of the cell
//!
//! ```text
//! S_ijkl(box) = S_ijkl(bare) - (1/2A) sum_p p_i p_j dG(p)/d sigma_kl,   kB T/G(p) = kappa(p) p^4 + sigma_kl p_k p_l
//! ```
//!
//! with the total derivative: the stress also changes kappa(p), by the equations of [`super::box_scsa`] differentiated at
//! their solution. It equals (A/kB T) cov(e_ij, e_kl) of a cell at constant stress (Parrinello and Rahman, J. Chem. Phys.
//! 76, 2662 (1982)). At fixed kappa(p) S12 would come out far too large.

use super::{BoxScsa, BoxSolution, PlaneModuli, ScsaError};

impl BoxScsa {
    /// The ripples' part of the box's compliance at a solution, in A^2/eV, Voigt order 1, 2, 6 with e6 = 2 e12; symmetric.
    ///
    /// # Errors
    /// [`ScsaError::NotConverged`] where the linear equations do not settle.
    pub fn ripple_compliance(&self, solution: &BoxSolution) -> Result<[[f64; 3]; 3], ScsaError> {
        let responses = self.stress_responses(solution)?;
        let strains = self.convolution.strains();
        let mut compliance = [[0.0; 3]; 3];
        for (mode, strain) in strains.iter().enumerate() {
            // G = A power; q and -q both count, which the half before the sum takes back.
            let power = self.convolution.weights()[mode] * solution.power[mode];
            for (row, strain) in compliance.iter_mut().zip(strain) {
                for (entry, response) in row.iter_mut().zip(&responses) {
                    *entry -= strain * power * response.ln_power[mode];
                }
            }
        }
        // Symmetric but for the tolerance of the responses.
        Ok([0, 1, 2].map(|i| [0, 1, 2].map(|j: usize| 0.5 * (compliance[i][j] + compliance[j][i]))))
    }

    /// Compliance of the box at a solution, in A^2/eV, Voigt order 1, 2, 6 with e6 = 2 e12: that of the bare sheet, with Y of the
    /// solution and the Poisson ratio `poisson` within (-1, 1), and the ripples' part.
    ///
    /// # Errors
    /// See [`Self::ripple_compliance`].
    pub fn box_compliance(&self, solution: &BoxSolution, poisson: f64) -> Result<[[f64; 3]; 3], ScsaError> {
        let bare = PlaneModuli::from_youngs_and_poisson(solution.state.youngs, poisson).compliance();
        let ripples = self.ripple_compliance(solution)?;
        Ok([0, 1, 2].map(|i| [0, 1, 2].map(|j: usize| bare[i][j] + ripples[i][j])))
    }
}
