//! Fluctuations of the in-plane cell.

use super::series::estimate_series;
use crate::statistics::{integrated_autocorrelation, split_r_hat};
use crate::theory::PlaneCell;
use crate::units::BOLTZMANN_EV_PER_K;

/// A sheet stiffer than any known one, in eV/A^2 (800 N/m; graphene has 340): the scale below which strain is not thermal.
pub const STIFFEST_EV_PER_A2: f64 = 50.0;

/// A strain that fluctuates less than this share of what the stiffest sheet's would is held, not free: what is left is rounding of
/// the trajectory's cell vectors.
const CLAMPED: f64 = 0.01;

/// Correlation of e1 and e2 above which they count as one strain.
const COUPLED: f64 = 0.999;

/// Covariance of the cell's strain e = (h0^-T h^T h h0^-1 - 1)/2 about the mean cell h0, Voigt order e1, e2, e6 with
/// e6 = 2 e12 (Parrinello and Rahman, J. Chem. Phys. 76, 2662 (1982)).
#[derive(Clone, Debug, PartialEq)]
pub struct StrainEstimate {
    /// The mean cell h0: a along axis 1.
    pub cell: PlaneCell,
    /// Covariance cov(e_i, e_j) over the frames after the cut, unbiased: the fluctuation of the mean strain is added.
    pub covariance: [[f64; 3]; 3],
    /// Effective samples of each product e_i e_j.
    pub effective_samples: [[f64; 3]; 3],
    /// Split R-hat of each product, where the series is long enough.
    pub split_r_hat: [[Option<f64>; 3]; 3],
    /// Which of e1, e2, e6 fluctuated: false where the barostat (or a fixed cell) clamped the component.
    ///
    /// Clamped means a standard deviation below 1 % of sqrt(kB T/(A Y)) with Y = 50 eV/A^2.
    pub free: [bool; 3],
    /// Whether e1 and e2 move only together (isotropic coupling of the barostat), so that only the area is free.
    pub coupled: bool,
}

/// Scalar products of the in-plane cell vectors per frame, in A^2.
pub(super) struct MetricSeries {
    pub(super) aa: Vec<f64>,
    pub(super) ab: Vec<f64>,
    pub(super) bb: Vec<f64>,
}

impl MetricSeries {
    /// Mean of each product.
    pub(super) fn mean(&self) -> [f64; 3] {
        [&self.aa, &self.ab, &self.bb].map(|s| s.iter().sum::<f64>() / s.len() as f64)
    }

    /// e1, e2, e6 per frame about `cell`.
    ///
    /// h^T h is the metric, so e needs only the scalar products; with h0 from the mean metric the mean of e is zero exactly.
    fn strains(&self, cell: &PlaneCell) -> [Vec<f64>; 3] {
        // h0 = [[a1, b1], [0, b2]]; its inverse is [[p, r], [0, s]].
        let p = 1.0 / cell.a[0];
        let s = 1.0 / cell.b[1];
        let r = -cell.b[0] * p * s;
        let frames = || {
            self.aa
                .iter()
                .zip(&self.ab)
                .zip(&self.bb)
                .map(|((aa, ab), bb)| (*aa, *ab, *bb))
        };
        [
            frames().map(|(aa, _, _)| 0.5 * (p * p * aa - 1.0)).collect(),
            frames()
                .map(|(aa, ab, bb)| 0.5 * (r * r * aa + 2.0 * r * s * ab + s * s * bb - 1.0))
                .collect(),
            frames().map(|(aa, ab, _)| p * r * aa + p * s * ab).collect(),
        ]
    }
}

/// Strain fluctuations about the mean `cell` at a temperature in K.
pub(super) fn estimate_strain(metric: &MetricSeries, cell: PlaneCell, temperature: f64) -> StrainEstimate {
    let strains = metric.strains(&cell);
    let frames = strains[0].len();
    let thermal = (BOLTZMANN_EV_PER_K * temperature / (cell.area() * STIFFEST_EV_PER_A2)).sqrt();
    let mut estimate = StrainEstimate {
        cell,
        covariance: [[0.0; 3]; 3],
        effective_samples: [[frames as f64; 3]; 3],
        split_r_hat: [[None; 3]; 3],
        free: [false; 3],
        coupled: false,
    };
    // Effective samples of each strain itself, for the mean's share of the covariance.
    let own = strains
        .each_ref()
        .map(|s| estimate_series(s).map_or(1.0, |e| e.effective_samples));
    for i in 0..3 {
        for j in i..3 {
            let product: Vec<f64> = strains[i].iter().zip(&strains[j]).map(|(x, y)| x * y).collect();
            let raw = product.iter().sum::<f64>() / frames as f64;
            let n = (own[i] * own[j]).sqrt().max(2.0);
            let covariance = raw * n / (n - 1.0);
            let samples = integrated_autocorrelation(&[&product])
                .map_or(frames as f64, |a| a.effective_samples(frames));
            for (k, l) in [(i, j), (j, i)] {
                estimate.covariance[k][l] = covariance;
                estimate.effective_samples[k][l] = samples;
                estimate.split_r_hat[k][l] = split_r_hat(&product);
            }
        }
        estimate.free[i] = estimate.covariance[i][i].sqrt() > CLAMPED * thermal;
    }
    let [[s11, s12, _], [_, s22, _], _] = estimate.covariance;
    estimate.coupled = estimate.free[0] && estimate.free[1] && s12 > COUPLED * (s11 * s22).sqrt();
    estimate
}

#[cfg(test)]
mod tests {
    use nalgebra::Matrix2;

    use super::*;

    /// On a triclinic cell the strains from scalar products are those of the matrix formula.
    #[test]
    fn triclinic_strains_are_the_matrix_formula() {
        let cell = PlaneCell::from_metric(400.0, 90.0, 330.0);
        let h0 = Matrix2::new(cell.a[0], cell.b[0], cell.a[1], cell.b[1]);
        let gradient = Matrix2::new(1.01, 0.004, -0.002, 0.995);
        let h = gradient * h0;
        let product = |i: usize, j: usize| h.column(i).dot(&h.column(j));
        let metric = MetricSeries {
            aa: vec![product(0, 0)],
            ab: vec![product(0, 1)],
            bb: vec![product(1, 1)],
        };
        let inverse = h0.try_inverse().expect("a cell with an area");
        let e = (inverse.transpose() * h.transpose() * h * inverse - Matrix2::identity()) * 0.5;
        let [e1, e2, e6] = metric.strains(&cell);
        for (found, expected) in [(e1[0], e[(0, 0)]), (e2[0], e[(1, 1)]), (e6[0], 2.0 * e[(0, 1)])] {
            assert!((found - expected).abs() < 1e-13, "{found} against {expected}");
        }
    }
}
