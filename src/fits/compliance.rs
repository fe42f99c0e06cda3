//! Compliance of the free strains, its inverse, and their errors from a finite number of samples.

use nalgebra::DMatrix;

use super::{FittedValue, NORMAL_95};
use crate::estimates::StrainEstimate;
use crate::units::BOLTZMANN_EV_PER_K;

/// The degrees of freedom n - d must exceed this for the inverse of a covariance to have a variance.
const FEWEST_DEGREES: f64 = 4.0;

/// S = (A/kB T) cov(e) over the free strains, in A^2/eV.
pub(super) struct Compliance {
    matrix: DMatrix<f64>,
    samples: DMatrix<f64>,
}

/// C = S^-1 in eV/A^2, of n effective samples, not yet corrected for the bias of an inverse.
pub(super) struct Stiffness {
    inverse: DMatrix<f64>,
    samples: f64,
}

impl Compliance {
    /// Of the strains numbered `free` (e1, e2, e6 are 0, 1, 2), at a temperature in K.
    pub(super) fn new(strain: &StrainEstimate, free: &[usize], temperature: f64) -> Self {
        let factor = strain.cell.area() / (BOLTZMANN_EV_PER_K * temperature);
        let size = free.len();
        Self {
            matrix: DMatrix::from_fn(size, size, |a, b| factor * strain.covariance[free[a]][free[b]]),
            samples: DMatrix::from_fn(size, size, |a, b| strain.effective_samples[free[a]][free[b]]),
        }
    }

    /// S_ab in A^2/eV.
    pub(super) fn element(&self, a: usize, b: usize) -> f64 {
        self.matrix[(a, b)]
    }

    /// Effective samples of the whole: the harmonic mean of the products', the n whose variance is the mean of theirs.
    pub(super) fn samples(&self) -> f64 {
        self.samples.len() as f64 / self.samples.map(|n| 1.0 / n).sum()
    }

    /// C = S^-1; `None` where S is not positive definite or the samples are too few for d strains.
    pub(super) fn stiffness(&self) -> Option<Stiffness> {
        let samples = self.samples();
        if samples - self.matrix.nrows() as f64 <= FEWEST_DEGREES {
            return None;
        }
        let inverse = self.matrix.clone().cholesky()?.inverse();
        Some(Stiffness { inverse, samples })
    }

    /// 1/S11, the Young's modulus along axis 1, in eV/A^2.
    pub(super) fn youngs_modulus(&self) -> Option<FittedValue> {
        self.inverse_of_square([1.0, 0.0])
    }

    /// 1/(S11 + S22 + 2 S12), the bulk modulus, in eV/A^2: from the variance of e1 + e2.
    pub(super) fn bulk_modulus(&self) -> Option<FittedValue> {
        self.inverse_of_square([1.0, 1.0])
    }

    /// The bulk modulus where e1 and e2 are one strain: S11 + S22 + 2 S12 is then 4 S11.
    pub(super) fn coupled_bulk_modulus(&self) -> Option<FittedValue> {
        self.inverse_of_square([2.0, 0.0])
    }

    /// 1/(w.S.w) for weights w on the first strains: the inverse of one variance.
    fn inverse_of_square(&self, weights: [f64; 2]) -> Option<FittedValue> {
        let used = weights.len().min(self.matrix.nrows());
        let pairs = || (0..used).flat_map(|a| (0..used).map(move |b| (a, b)));
        let term = |(a, b): (usize, usize)| weights[a] * weights[b] * self.matrix[(a, b)];
        let sum: f64 = pairs().map(term).sum();
        // Each product's share in the sum says how much its own samples count.
        let weight: f64 = pairs().map(|p| term(p).abs()).sum();
        let inverse_samples: f64 = pairs().map(|p| term(p).abs() / self.samples[p]).sum();
        (sum > 0.0).then(|| inverse_variance(1.0 / sum, weight / inverse_samples, 1.0))?
    }

    /// -S12/S11: minus the regression coefficient of e2 on e1, unbiased for Gaussian strains, with variance
    /// (S22 - S12^2/S11)/(S11 (n - 3)) (Anderson, An Introduction to Multivariate Statistical Analysis, section 4.3).
    pub(super) fn poisson_ratio(&self) -> Option<FittedValue> {
        let (s11, s12, s22) = (self.matrix[(0, 0)], self.matrix[(0, 1)], self.matrix[(1, 1)]);
        let n = 1.0 / (0.5 / self.samples[(0, 1)] + 0.5 / self.samples[(0, 0)]);
        let residual = s22 - s12 * s12 / s11;
        let usable = residual > 0.0 && n - 1.0 > FEWEST_DEGREES;
        usable.then(|| FittedValue::symmetric(-s12 / s11, (residual / s11 / (n - 3.0)).sqrt()))
    }
}

impl Stiffness {
    /// C_aa in eV/A^2: the inverse of the variance that strain a keeps when the others are held, n - d degrees of freedom.
    pub(super) fn diagonal(&self, a: usize) -> Option<FittedValue> {
        inverse_variance(self.inverse[(a, a)], self.samples, self.inverse.nrows() as f64)
    }

    /// C_ab in eV/A^2, a and b different: S^-1 (n - d - 2)/(n - 1), the mean of an inverse Wishart matrix, whose variance is
    /// ((k + 1) C_ab^2 + (k - 1) C_aa C_bb)/(k (k - 3)) with k = n - d - 1 (Anderson, An Introduction to Multivariate
    /// Statistical Analysis, section 7.7; von Rosen, Scand. J. Statist. 15, 97 (1988)). With the measured C in place of the
    /// true one that is too large by (k - 1)/(k - 3), the excess of the mean of C_aa^2 over C_aa squared.
    pub(super) fn off_diagonal(&self, a: usize, b: usize) -> FittedValue {
        let k = self.samples - self.inverse.nrows() as f64 - 1.0;
        let c = |i: usize, j: usize| self.inverse[(i, j)] * (k - 1.0) / (self.samples - 1.0);
        let variance = ((k + 1.0) * c(a, b).powi(2) + (k - 1.0) * c(a, a) * c(b, b)) / (k * (k - 1.0));
        FittedValue::symmetric(c(a, b), variance.sqrt())
    }
}

/// The inverse of a variance from n samples with v = n - d degrees of freedom, `raw` being the inverse as measured.
///
/// The truth is raw chi^2_v/(n - 1). So raw (v - 2)/(n - 1) is unbiased, with relative standard deviation
/// sqrt(2/(v - 4)), and the 95 % interval follows from the quantiles of chi^2. It is not centred on the value: a small sample
/// more often shows too little variance than too much. `None` where v <= 4.
fn inverse_variance(raw: f64, samples: f64, strains: f64) -> Option<FittedValue> {
    let degrees = samples - strains;
    if degrees <= FEWEST_DEGREES {
        return None;
    }
    let scale = raw / (samples - 1.0);
    let value = scale * (degrees - 2.0);
    Some(FittedValue {
        value,
        error: value * (2.0 / (degrees - 4.0)).sqrt(),
        interval95: [-NORMAL_95, NORMAL_95].map(|z| scale * chi_square_quantile(degrees, z)),
    })
}

/// Quantile of chi^2 at the normal deviate z: v (1 - 2/(9 v) + z sqrt(2/(9 v)))^3 (Wilson and Hilferty, Proc. Natl. Acad.
/// Sci. 17, 684 (1931)); within 1 % for v > 5 at 95 %.
fn chi_square_quantile(degrees: f64, z: f64) -> f64 {
    let ninth = 2.0 / (9.0 * degrees);
    degrees * (1.0 - ninth + z * ninth.sqrt()).powi(3)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Percentage points of chi^2 (Abramowitz and Stegun, table 26.8): 0.025 and 0.975 quantiles at 10 and 30 degrees.
    #[test]
    fn chi_square_quantiles_are_the_tables() {
        for (degrees, low, high) in [(10.0, 3.24697, 20.4831), (30.0, 16.7908, 46.9792)] {
            assert!((chi_square_quantile(degrees, -NORMAL_95) / low - 1.0_f64).abs() < 0.01);
            assert!((chi_square_quantile(degrees, NORMAL_95) / high - 1.0_f64).abs() < 0.01);
        }
    }
}
