//! Area hidden in ripples.

use super::{Estimate, SpectrumEstimate, combination::combine_modes};

/// (1/2) sum_q q^2 <|h_q|^2> over the first Brillouin zone, q and -q both counted: sum over the independent modes of
/// weight q^2 <|h_q|^2>. Dimensionless.
///
/// The error is that of the blocks' sums. Effective samples and R-hat are those of the slowest mode: it relaxes last, and the sum
/// with it. `None` where no mode lies in the zone.
pub(super) fn estimate_excess_area(spectrum: &SpectrumEstimate) -> Option<Estimate> {
    let coefficients: Vec<(usize, f64)> = spectrum
        .modes
        .iter()
        .enumerate()
        .filter(|(_, m)| m.zone_weight > 0.0)
        .map(|(i, m)| (i, m.zone_weight * m.length.powi(2)))
        .collect();
    let slowest = spectrum.slowest_mode([0.0, f64::INFINITY])?;
    if coefficients.is_empty() {
        return None;
    }
    let sum = combine_modes(
        &spectrum.modes,
        &spectrum.block_powers,
        &spectrum.block_frames,
        &coefficients,
    );
    Some(Estimate {
        value: sum.value,
        error: sum.error,
        effective_samples: slowest.effective_samples,
        split_r_hat: slowest.split_r_hat,
    })
}
