//! Compliance of the free strains, its inverse, and their errors from a finite number of samples.

use nalgebra::DMatrix;

use crate::estimates::StrainEstimate;
use crate::units::BOLTZMANN_EV_PER_K;

/// A number read from the compliance, with its standard error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Functional {
    pub(super) value: f64,
    pub(super) error: f64,
}

/// S = (A/kB T) cov(e) over the free strains, in A^2/eV.
pub(super) struct Compliance {
    matrix: DMatrix<f64>,
    samples: DMatrix<f64>,
}

/// C = S^-1 in eV/A^2, corrected for the bias of an inverse.
pub(super) struct Stiffness<'a> {
    compliance: &'a Compliance,
    inverse: DMatrix<f64>,
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

    /// C = S^-1 (n - d - 2)/(n - 1): the mean of an inverse Wishart matrix is too large by the inverse of that factor (Anderson,
    /// An Introduction to Multivariate Statistical Analysis, 3rd ed., section 7.7). `None` where S is not positive definite or
    /// n too small.
    pub(super) fn stiffness(&self) -> Option<Stiffness<'_>> {
        let n = self.harmonic_samples();
        let d = self.matrix.nrows() as f64;
        if n <= d + 2.0 {
            return None;
        }
        let inverse = self.matrix.clone().cholesky()?.inverse() * ((n - d - 2.0) / (n - 1.0));
        Some(Stiffness {
            compliance: self,
            inverse,
        })
    }

    /// 1/(sum of weight S_ab) over the given elements (an off-diagonal weight is the sum of both): one variance, so d = 1 in
    /// the bias correction (n - 3)/(n - 1).
    pub(super) fn inverse_of_sum(&self, terms: &[(usize, usize, f64)]) -> Functional {
        let sum: f64 = terms
            .iter()
            .map(|&(a, b, weight)| weight * self.matrix[(a, b)])
            .sum();
        let size = self.matrix.nrows();
        let mut gradient = DMatrix::zeros(size, size);
        for &(a, b, weight) in terms {
            gradient[(a, b)] += 0.5 * weight;
            gradient[(b, a)] += 0.5 * weight;
        }
        let relative = self.delta(&gradient) / sum;
        let n = (2.0 / (relative * relative)).max(MOST_BIASED);
        let value = (n - 3.0) / (n - 1.0) / sum;
        Functional {
            value,
            error: value * inverse_error(n, 1.0),
        }
    }

    /// 1/(4 S_11) where e1 and e2 are one strain: S11 + S22 + 2 S12 is then 4 S11.
    pub(super) fn inverse_of_isotropic_strain(&self) -> Functional {
        self.inverse_of_sum(&[(0, 0, 4.0)])
    }

    /// -S12/S11, a regression coefficient: unbiased, its variance being the delta method's times n/(n - 3) (Student's).
    pub(super) fn poisson_ratio(&self) -> Functional {
        let ratio = -self.matrix[(0, 1)] / self.matrix[(0, 0)];
        let size = self.matrix.nrows();
        let mut gradient = DMatrix::zeros(size, size);
        gradient[(0, 0)] = -ratio / self.matrix[(0, 0)];
        gradient[(0, 1)] = -0.5 / self.matrix[(0, 0)];
        gradient[(1, 0)] = gradient[(0, 1)];
        let n = self.harmonic_samples().max(MOST_BIASED);
        Functional {
            value: ratio,
            error: self.delta(&gradient) * (n / (n - 3.0)).sqrt(),
        }
    }

    /// Harmonic mean of the products' effective samples: the n whose variance is the mean of theirs.
    fn harmonic_samples(&self) -> f64 {
        1.0 / (self.samples.map(|n| 1.0 / n).sum() / self.samples.len() as f64)
    }

    /// Standard error of a function with the symmetric gradient g_ab = df/dS_ab (both of a pair counted), from
    /// Cov(S_ab, S_cd) = (S_ac S_bd + S_ad S_bc)/sqrt(n_ab n_cd), exact for Gaussian strains.
    fn delta(&self, gradient: &DMatrix<f64>) -> f64 {
        // With m_ab = g_ab/sqrt(n_ab), the double sum is 2 tr(m S m S).
        let scaled = gradient.zip_map(&self.samples, |g, n| g / n.sqrt());
        let product = &scaled * &self.matrix;
        (2.0 * (&product * &product).trace()).max(0.0).sqrt()
    }
}

/// Below so many samples the corrections' denominators lose their meaning; values with fewer than 5 are not given at all.
const MOST_BIASED: f64 = 5.0;

/// Relative standard error of the inverse of a sample variance, sqrt(2/(n - d)): that of its logarithm for n - d degrees of
/// freedom (trigamma(v/2) = 2/v to leading order).
fn inverse_error(n: f64, d: f64) -> f64 {
    (2.0 / (n - d).max(1.0)).sqrt()
}

impl Stiffness<'_> {
    /// C_ab in eV/A^2, with the delta-method error times n/(n - d): the samples left after d strains are fitted.
    pub(super) fn component(&self, a: usize, b: usize) -> Functional {
        let size = self.inverse.nrows();
        // dC_ab/dS_cd = -C_ac C_db, symmetrised.
        let gradient = DMatrix::from_fn(size, size, |c, d| {
            0.5 * (self.inverse[(a, c)] * self.inverse[(d, b)] + self.inverse[(a, d)] * self.inverse[(c, b)])
        });
        let n = self.compliance.harmonic_samples();
        let left = (n - size as f64).max(1.0);
        Functional {
            value: self.inverse[(a, b)],
            error: self.compliance.delta(&gradient) * (n / left).sqrt(),
        }
    }
}
