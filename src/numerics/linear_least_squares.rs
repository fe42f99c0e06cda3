//! Weighted linear least squares.

use nalgebra::{DMatrix, DVector};

/// A singular value below this share of the largest is a direction the data do not determine.
const RANK_TOLERANCE: f64 = 1e-12;

/// Coefficients that minimise sum_i ((y_i - sum_k x_ik c_k)/s_i)^2, and their covariance.
#[derive(Clone, Debug, PartialEq)]
pub struct LinearLeastSquares {
    /// The coefficients.
    pub coefficients: DVector<f64>,
    /// Their covariance for independent errors s_i: (X^T W X)^-1, not rescaled by chi-square.
    pub covariance: DMatrix<f64>,
    /// The minimum reached.
    pub chi_square: f64,
}

impl LinearLeastSquares {
    /// Solves by singular values of the weighted design (Press et al., Numerical Recipes, section 15.4).
    ///
    /// `rows` are the x_i, `errors` the s_i > 0. `None` where shapes disagree, an error is not positive, or the rows do not
    /// determine every coefficient.
    #[must_use]
    pub fn solve(rows: &[Vec<f64>], values: &[f64], errors: &[f64]) -> Option<Self> {
        let terms = rows.first()?.len();
        let sizes_agree = rows.len() == values.len() && rows.len() == errors.len();
        if !sizes_agree || rows.len() < terms || rows.iter().any(|r| r.len() != terms) {
            return None;
        }
        if !errors.iter().all(|&s| s > 0.0) {
            return None;
        }
        let design = DMatrix::from_fn(rows.len(), terms, |i, k| rows[i][k] / errors[i]);
        let target = DVector::from_fn(rows.len(), |i, _| values[i] / errors[i]);
        let svd = design.clone().svd(true, true);
        let largest = svd.singular_values.max();
        let smallest = svd.singular_values.min();
        if smallest.is_nan() || smallest <= RANK_TOLERANCE * largest {
            return None;
        }
        let coefficients = svd.solve(&target, 0.0).ok()?;
        let v = svd.v_t.as_ref()?.transpose();
        let inverse_squares = DMatrix::from_diagonal(&svd.singular_values.map(|s| 1.0 / (s * s)));
        let covariance = &v * inverse_squares * v.transpose();
        let chi_square = (design * &coefficients - target).norm_squared();
        Some(Self {
            coefficients,
            covariance,
            chi_square,
        })
    }

    /// Value and standard error of sum_k w_k c_k.
    #[must_use]
    pub fn combination(&self, weights: &[f64]) -> (f64, f64) {
        let w = DVector::from_row_slice(weights);
        let variance = w.dot(&(&self.covariance * &w));
        (w.dot(&self.coefficients), variance.max(0.0).sqrt())
    }
}
