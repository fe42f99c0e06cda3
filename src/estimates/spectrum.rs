//! The height spectrum of one condition, with effective samples and errors.

use ndarray::Array2;

use super::combination::combine_modes;
use crate::theory::PlaneCell;

/// Modes whose |q| lies within this share above a row's first belong to the row.
const ROW_WIDTH: f64 = 0.01;

/// One independent mode (q and -q together) after the equilibration cut.
#[derive(Clone, Debug, PartialEq)]
pub struct ModeEstimate {
    /// The integers of the mode.
    pub integers: [i32; 2],
    /// Wave vector on the mean cell, in 1/A.
    pub q: [f64; 2],
    /// |q| in 1/A.
    pub length: f64,
    /// <|h_q|^2> in A^2, h_q = (1/N) sum_j h_j exp(-i q.R_j); less a static ripple where `static_removed`.
    pub power: f64,
    /// Effective samples n: the mean over the run is Gamma(n, mean/n).
    pub effective_samples: f64,
    /// Integrated autocorrelation time of |h_q|^2 from lag 0, in ps, where the frames' spacing is known. Half the spacing
    /// where the mode relaxes between frames.
    pub relaxation_ps: Option<f64>,
    /// Weight in sums over the first Brillouin zone (see `ModeSet::zone_weight`).
    pub zone_weight: f64,
    /// Split R-hat of the two halves of |h_q|^2; only the longest waves keep a series to take it from.
    pub split_r_hat: Option<f64>,
    /// Long-run over plain variance of the block means of |h_q|^2, at least 1: multiplies the variance that independent
    /// blocks would give.
    pub block_correlation: f64,
    /// |<h_q>|^2 in A^2: a static ripple, or what chance leaves of a fluctuating one.
    pub static_power: f64,
    /// Whether `static_power` was above chance at p < 0.001 and was taken out of `power` and of the block powers.
    pub static_removed: bool,
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
    ///
    /// In a very long run these are blocks joined pairwise, so that there are at most some hundreds.
    pub block_powers: Array2<f64>,
    /// Frames in each of these blocks: its weight.
    pub block_frames: Vec<usize>,
}

impl SpectrumEstimate {
    /// Gathers sorted modes into rows.
    ///
    /// A row starts at the smallest |q| not yet in a row and takes lengths up to 1 % above it.
    pub(super) fn new(
        cell: PlaneCell,
        modes: Vec<ModeEstimate>,
        block_powers: Array2<f64>,
        block_frames: Vec<usize>,
    ) -> Self {
        let mut rows = Vec::new();
        let mut first = 0;
        while first < modes.len() {
            let limit = modes[first].length * (1.0 + ROW_WIDTH);
            let end = first + modes[first..].iter().take_while(|m| m.length <= limit).count();
            rows.push(row(&modes, &block_powers, &block_frames, first..end));
            first = end;
        }
        Self {
            cell,
            modes,
            rows,
            block_powers,
            block_frames,
        }
    }

    /// The slowest mode with |q| in `window` (1/A, ends included): the one of smallest |q|, and of several within 1 % the
    /// one with the fewest effective samples.
    #[must_use]
    pub fn slowest_mode(&self, window: [f64; 2]) -> Option<&ModeEstimate> {
        let first = self
            .modes
            .iter()
            .position(|m| m.length >= window[0] && m.length <= window[1])?;
        let limit = (self.modes[first].length * (1.0 + ROW_WIDTH)).min(window[1]);
        self.modes[first..]
            .iter()
            .take_while(|m| m.length <= limit)
            .min_by(|x, y| x.effective_samples.total_cmp(&y.effective_samples))
    }
}

fn row(
    modes: &[ModeEstimate],
    block_powers: &Array2<f64>,
    block_frames: &[usize],
    range: std::ops::Range<usize>,
) -> SpectrumRow {
    let members = &modes[range.clone()];
    let count = members.len() as f64;
    let sum_over = |coefficient: &dyn Fn(&ModeEstimate) -> f64| {
        let coefficients: Vec<(usize, f64)> = range
            .clone()
            .map(|m| (m, coefficient(&modes[m]) / count))
            .collect();
        combine_modes(modes, block_powers, block_frames, &coefficients)
    };
    let power = sum_over(&|_| 1.0);
    let weighted = sum_over(&|m| m.length.powi(4));
    let times: Option<Vec<f64>> = members.iter().map(|m| m.relaxation_ps).collect();
    SpectrumRow {
        modes: range.clone(),
        length: members.iter().map(|m| m.length).sum::<f64>() / count,
        power: power.value,
        power_error: power.error,
        weighted_power: weighted.value,
        weighted_power_error: weighted.error,
        effective_samples: members.iter().map(|m| m.effective_samples).sum(),
        relaxation_ps: times.map(|t| t.iter().sum::<f64>() / count),
    }
}
