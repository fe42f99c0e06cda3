//! Fluctuations of the in-plane cell.

use crate::theory::PlaneCell;

/// Covariance of the cell's strain e = (h0^-T h^T h h0^-1 - 1)/2 about the mean cell h0, Voigt order e1, e2, e6 with
/// e6 = 2 e12 (Parrinello and Rahman, J. Chem. Phys. 76, 2662 (1982)).
#[derive(Clone, Debug, PartialEq)]
pub struct StrainEstimate {
    /// The mean cell h0: a along axis 1.
    pub cell: PlaneCell,
    /// Sample covariance cov(e_i, e_j) over the frames after the cut.
    pub covariance: [[f64; 3]; 3],
    /// Effective samples of each product e_i e_j.
    pub effective_samples: [[f64; 3]; 3],
    /// Split R-hat of each product, where the series is long enough.
    pub split_r_hat: [[Option<f64>; 3]; 3],
    /// Which of e1, e2, e6 fluctuated: false where the barostat (or a fixed cell) clamped the component.
    pub free: [bool; 3],
    /// Whether e1 and e2 move only together (isotropic coupling of the barostat), so that only the area is free.
    pub coupled: bool,
}
