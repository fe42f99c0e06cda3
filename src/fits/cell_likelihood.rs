//! The likelihood of the cell's strain fluctuations under a compliance that a theory predicts.
//!
//! The covariance of d Gaussian strains from n effective samples is Wishart with n - 1 degrees of freedom (Anderson, An
//! Introduction to Multivariate Statistical Analysis, ch. 7). Twice the log-likelihood's distance from its best,
//!
//! ```text
//! D = (n - 1) [ tr(S^-1 T) - ln det(S^-1 T) - d ],   T measured, S predicted,
//! ```
//!
//! is a sum of squares by regressing each strain on those before it: with S = L D L^T, T = l E l^T and M = L^-1 l (unit lower
//! triangles)
//!
//! ```text
//! D = (n - 1) sum_k [ E_k/D_k - 1 - ln(E_k/D_k) + sum_{j<k} M_kj^2 E_j/D_k ]
//! ```
//!
//! so that it joins those of mode powers in one least-squares search.

use nalgebra::{DMatrix, DVector, Matrix3};

use super::cell_stiffness::too_stiff;
use super::compliance::Compliance;
use super::plate_likelihood::{ModeSample, signed_root};
use crate::estimates::RunEstimates;

/// Fewest effective samples beyond the number of strains with which a covariance says anything of a compliance.
const FEWEST_DEGREES: f64 = 5.0;

/// The measured compliance of a cell's free strains.
#[derive(Clone, Debug)]
pub(super) struct CellSample {
    /// What the cell was free to do: strains e = V x, shape (3, d).
    directions: DMatrix<f64>,
    /// (A/kB T) cov(x), shape (d, d), in A^2/eV.
    measured: DMatrix<f64>,
    /// n - 1.
    degrees: f64,
}

/// A prediction held against the sample.
#[derive(Clone, Debug)]
pub(super) struct CellPoint {
    /// Signed roots whose squares add up to the deviance, d (d + 1)/2 of them.
    pub(super) residuals: DVector<f64>,
    /// Their derivatives by the parameters, shape (residuals, parameters).
    pub(super) jacobian: DMatrix<f64>,
    /// Expected information about the parameters.
    pub(super) information: DMatrix<f64>,
}

impl CellSample {
    /// Of a run whose cell breathes.
    ///
    /// # Errors
    /// Why the cell's fluctuations cannot be used.
    pub(super) fn new(run: &RunEstimates) -> Result<Self, &'static str> {
        let strain = &run.strain;
        if run.cell_is_fixed() {
            return Err("the cell is fixed");
        }
        let free: Vec<usize> = if strain.coupled {
            vec![0]
        } else {
            (0..3).filter(|&component| strain.free[component]).collect()
        };
        if too_stiff(strain, &free, run.temperature).is_some() {
            return Err("the barostat suppresses the cell's fluctuations");
        }
        let compliance = Compliance::new(strain, &free, run.temperature);
        let samples = compliance.samples();
        let size = free.len();
        if samples - size as f64 <= FEWEST_DEGREES {
            return Err("the cell's fluctuations have too few effective samples");
        }
        let mut directions = DMatrix::zeros(3, size);
        for (column, &component) in free.iter().enumerate() {
            directions[(component, column)] = 1.0;
        }
        if strain.coupled {
            directions[(1, 0)] = 1.0;
        }
        let measured = DMatrix::from_fn(size, size, |i, j| compliance.element(i, j));
        if measured.clone().cholesky().is_none() {
            return Err("the cell's strains depend on each other");
        }
        Ok(Self {
            directions,
            measured,
            degrees: samples - 1.0,
        })
    }

    /// Whether the free strains tell Poisson's ratio.
    pub(super) fn tells_poisson_ratio(&self) -> bool {
        self.directions.ncols() > 1
    }

    /// Compliance of the free strains, the others held: (V^T C V)^-1 with C the inverse of the whole compliance.
    fn of_free(&self, whole: &Matrix3<f64>) -> Option<DMatrix<f64>> {
        let stiffness = whole.try_inverse()?;
        let free = self.directions.transpose() * stiffness * &self.directions;
        Some(free.cholesky()?.inverse())
    }

    fn residuals(&self, predicted: &DMatrix<f64>) -> Option<DVector<f64>> {
        let (lower, diagonal) = unit_triangle(predicted)?;
        let (measured_lower, measured_diagonal) = unit_triangle(&self.measured)?;
        let mixed = lower.solve_lower_triangular(&measured_lower)?;
        let mut residuals = Vec::new();
        for k in 0..diagonal.len() {
            let own = ModeSample {
                length: 0.0,
                power: measured_diagonal[k],
                effective_samples: 0.5 * self.degrees,
            };
            residuals.push(signed_root(&own, diagonal[k].ln())[0]);
            residuals.extend(
                (0..k).map(|j| mixed[(k, j)] * (self.degrees * measured_diagonal[j] / diagonal[k]).sqrt()),
            );
        }
        Some(DVector::from_vec(residuals))
    }

    /// Holds the box's compliance `whole` (A^2/eV, Voigt 1, 2, 6), with its derivatives by the parameters, against the sample.
    /// `None` where it is not positive definite.
    pub(super) fn compare(&self, whole: &[[f64; 3]; 3], slopes: &[[[f64; 3]; 3]]) -> Option<CellPoint> {
        /// Relative step of the differences: the compliance is known in closed form around the point.
        const STEP: f64 = 1e-5;
        let matrix = |values: &[[f64; 3]; 3]| Matrix3::from_fn(|i, j| values[i][j]);
        let center = matrix(whole);
        let predicted = self.of_free(&center)?;
        let inverse = predicted.clone().cholesky()?.inverse();
        let residuals = self.residuals(&predicted)?;
        let mut jacobian = DMatrix::zeros(residuals.len(), slopes.len());
        let mut relative = Vec::with_capacity(slopes.len());
        for (column, slope) in slopes.iter().enumerate() {
            let slope = matrix(slope);
            let step = STEP * center.amax() / slope.amax().max(f64::MIN_POSITIVE);
            let moved = |sign: f64| self.of_free(&(center + slope * (sign * step)));
            let (up, down) = (moved(1.0)?, moved(-1.0)?);
            let change = (self.residuals(&up)? - self.residuals(&down)?) / (2.0 * step);
            jacobian.set_column(column, &change);
            relative.push(&inverse * (up - down) / (2.0 * step));
        }
        let information = DMatrix::from_fn(slopes.len(), slopes.len(), |a, b| {
            0.5 * self.degrees * (&relative[a] * &relative[b]).trace()
        });
        Some(CellPoint {
            residuals,
            jacobian,
            information,
        })
    }
}

/// S = L D L^T with L unit lower triangular: L and the diagonal of D.
fn unit_triangle(matrix: &DMatrix<f64>) -> Option<(DMatrix<f64>, Vec<f64>)> {
    let mut lower = matrix.clone().cholesky()?.l();
    let roots: Vec<f64> = lower.diagonal().iter().copied().collect();
    for (mut column, root) in lower.column_iter_mut().zip(&roots) {
        column /= *root;
    }
    Some((lower, roots.iter().map(|root| root * root).collect()))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The sum of squares is the deviance by its definition, with a determinant and a trace.
    #[test]
    fn residuals_add_up_to_the_wishart_deviance() {
        let measured = DMatrix::from_row_slice(3, 3, &[2.0, 0.3, 0.1, 0.3, 1.5, -0.2, 0.1, -0.2, 3.0]);
        let predicted = DMatrix::from_row_slice(3, 3, &[1.8, 0.1, 0.0, 0.1, 1.9, 0.1, 0.0, 0.1, 2.5]);
        let sample = CellSample {
            directions: DMatrix::identity(3, 3),
            measured: measured.clone(),
            degrees: 40.0,
        };
        let residuals = sample.residuals(&predicted).expect("positive definite");
        let ratio = predicted.try_inverse().expect("an inverse") * measured;
        let deviance = 40.0 * (ratio.trace() - ratio.determinant().ln() - 3.0);
        assert!((residuals.norm_squared() / deviance - 1.0).abs() < 1e-12);
    }
}
