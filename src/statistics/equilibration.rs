//! Where a series stops remembering how it was started.

use statrs::distribution::{ContinuousCDF, StudentsT};

use super::integrated_autocorrelation;

/// The discarded part must differ from the rest with a probability of chance below this.
const SIGNIFICANCE: f64 = 0.01;

/// Candidate edges beyond which they are thinned evenly: a finer search moves the cut by under 1 % of a run.
const MOST_CANDIDATES: usize = 64;

/// How many frames to cut from the start of `series`; 0 where nothing needs to go.
///
/// Among the `edges` (frame indices, ascending) that leave more than half of the series, the one that maximises the
/// effective samples (N - t0)/g(t0) of what is left (Chodera, J. Chem. Theory Comput. 12, 1799 (2016)). The maximum
/// alone cuts a stationary series too, since the noise of g always favours some edge. So the cut is made only where the mean
/// of the discarded part differs from the rest's at p < 0.01: Student's t with the rest's effective samples less one as
/// degrees of freedom, each mean's variance being the rest's variance over its own effective samples (at least one).
#[must_use]
pub fn equilibration_cut(series: &[f64], edges: &[usize]) -> usize {
    let count = series.len();
    let usable: Vec<usize> = edges
        .iter()
        .copied()
        .filter(|&e| e > 0 && 2 * e < count)
        .collect();
    let stride = usable.len().div_ceil(MOST_CANDIDATES).max(1);
    let Some(whole) = integrated_autocorrelation(&[series]) else {
        return 0;
    };
    let mut best = (whole.effective_samples(count), 0, whole);
    for &edge in usable.iter().step_by(stride) {
        let Some(rest) = integrated_autocorrelation(&[&series[edge..]]) else {
            continue;
        };
        let samples = rest.effective_samples(count - edge);
        if samples > best.0 {
            best = (samples, edge, rest);
        }
    }
    let (samples, edge, rest) = best;
    if edge == 0 {
        return 0;
    }
    let mean = |part: &[f64]| part.iter().sum::<f64>() / part.len() as f64;
    let difference = mean(&series[..edge]) - mean(&series[edge..]);
    let discarded_samples = rest.effective_samples(edge).max(1.0);
    let error = (rest.variance * (1.0 / discarded_samples + 1.0 / samples)).sqrt();
    let Ok(law) = StudentsT::new(0.0, 1.0, (samples - 1.0).max(1.0)) else {
        return 0;
    };
    let chance = 2.0 * law.sf((difference / error).abs());
    if chance < SIGNIFICANCE { edge } else { 0 }
}
