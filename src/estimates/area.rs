//! Projected area: the run's mean, and one value a block.

use super::{AreaBlock, Estimate, history_view::HistoryView, series::estimate_with_autocorrelation};

/// The mean area after the cut, and the area of every block of the run.
///
/// A block's error comes from the whole run's variance and inefficiency g: sigma sqrt(g/frames), at most sigma. A block is too
/// short to tell its own.
pub(super) fn estimate_area(
    all: &HistoryView<'_>,
    area: &[f64],
    frames_cut: usize,
    first_time_ps: Option<f64>,
    frame_interval_ps: Option<f64>,
) -> Option<(Estimate, Vec<AreaBlock>)> {
    let (estimate, autocorrelation) = estimate_with_autocorrelation(&area[frames_cut..])?;
    let (sigma, inefficiency) = autocorrelation.map_or((0.0, 1.0), |a| (a.variance.sqrt(), a.inefficiency));
    let mut start = 0;
    let mut blocks = Vec::new();
    for (b, frames) in all.block_frames().into_iter().enumerate() {
        let values = &area[start..start + frames];
        let middle = start as f64 + 0.5 * (frames - 1) as f64;
        blocks.push(AreaBlock {
            block: all.block_index(b),
            time_ps: frame_interval_ps.map(|interval| first_time_ps.unwrap_or(0.0) + middle * interval),
            area: values.iter().sum::<f64>() / frames as f64,
            error: (frames > 1).then(|| sigma * (inefficiency / frames as f64).min(1.0).sqrt()),
        });
        start += frames;
    }
    Some((estimate, blocks))
}
