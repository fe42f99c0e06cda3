//! The height spectrum of one condition, with effective samples and errors.

use ndarray::Array2;

use crate::theory::PlaneCell;

/// One independent mode (q and -q together) after the equilibration cut.
#[derive(Clone, Debug, PartialEq)]
pub struct ModeEstimate {
    /// The integers of the mode.
    pub integers: [i32; 2],
    /// Wave vector on the mean cell, in 1/A.
    pub q: [f64; 2],
    /// |q| in 1/A.
    pub length: f64,
    /// <|h_q|^2> in A^2 (PHYSICS: h_q = (1/N) sum_j h_j exp(-i q.R_j)).
    pub power: f64,
    /// Effective samples n: the mean over the run is Gamma(n, mean/n).
    pub effective_samples: f64,
    /// Integrated autocorrelation time of |h_q|^2 from lag 0, in ps, where the frames' spacing is known.
    pub relaxation_ps: Option<f64>,
    /// Weight in sums over the first Brillouin zone (see `ModeSet::zone_weight`).
    pub zone_weight: f64,
    /// Split R-hat of the two halves of |h_q|^2; only the longest waves keep a series to take it from.
    pub split_r_hat: Option<f64>,
}

/// One row of spectrum.csv: modes whose lengths lie within 1 % of the row's first.
#[derive(Clone, Debug, PartialEq)]
pub struct SpectrumRow {
    /// Range of the row's modes in [`SpectrumEstimate::modes`].
    pub modes: std::ops::Range<usize>,
    /// Mean |q| of the row's modes, in 1/A.
    pub length: f64,
    /// Mean over the row's modes of <|h_q|^2>, in A^2.
    pub power: f64,
    /// Standard error of `power` from the spread of the blocks' row means, correlation included, in A^2.
    pub power_error: f64,
    /// Mean over the row's modes of q^4 <|h_q|^2>, in A^-2: kappa follows from it.
    pub weighted_power: f64,
    /// Standard error of `weighted_power`, likewise.
    pub weighted_power_error: f64,
    /// Total over the row's modes.
    pub effective_samples: f64,
    /// Mean over the row's modes, in ps.
    pub relaxation_ps: Option<f64>,
}

/// The height spectrum of one run, or of pooled replicas.
#[derive(Clone, Debug, PartialEq)]
pub struct SpectrumEstimate {
    /// The mean cell after the cut.
    pub cell: PlaneCell,
    /// Every measured mode, sorted by |q| on the mean cell.
    pub modes: Vec<ModeEstimate>,
    /// The modes gathered into rows of equal length.
    pub rows: Vec<SpectrumRow>,
    /// Block means of |h_q|^2 in A^2, shape (blocks, modes), modes as in `modes`: what jackknives work on.
    pub block_powers: Array2<f64>,
    /// Frames in each block: its weight.
    pub block_frames: Vec<usize>,
}
