//! The equilibration cut of a run.

use num_complex::Complex64;

use super::{EstimateError, history_view::HistoryView};
use crate::statistics::equilibration_cut;

/// How many of the longest waves are watched for their approach to equilibrium.
const WATCHED_WAVES: usize = 4;

/// Longer runs are searched on block means, which is as fine as the cut can be made.
const LONGEST_BY_FRAME: usize = 16_384;

/// What was cut from the start of a run, and what is left.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Cut {
    /// Frames read, before the cut.
    pub frames_read: usize,
    /// Frames cut as equilibration.
    pub frames_cut: usize,
    /// Blocks cut as equilibration.
    pub blocks_cut: usize,
    /// Frames in a whole block.
    pub block_frames: usize,
}

/// Finds the cut: the later of those that the projected area and the summed power of the four longest waves ask for.
///
/// A sum of few |h_q|^2 is strongly skewed; its cube root is nearly normal (Wilson and Hilferty, Proc. Natl. Acad. Sci. 17,
/// 684 (1931)), and the comparison of means behind the cut assumes that.
pub(super) fn find_cut(
    view: &HistoryView<'_>,
    area: &[f64],
    heights: &ndarray::Array2<Complex64>,
) -> Result<Cut, EstimateError> {
    let block_frames = view.block_frames();
    let frames_read = view.frames();
    if frames_read < 2 {
        return Err(EstimateError::TooFewFrames { found: frames_read });
    }
    let mut edges = vec![0];
    for frames in &block_frames {
        edges.push(edges[edges.len() - 1] + frames);
    }
    let power: Vec<f64> = heights
        .rows()
        .into_iter()
        .map(|row| {
            row.iter()
                .take(WATCHED_WAVES)
                .map(Complex64::norm_sqr)
                .sum::<f64>()
                .cbrt()
        })
        .collect();
    let blocks_cut = [area, &power]
        .map(|series| {
            if frames_read <= LONGEST_BY_FRAME {
                let frame = equilibration_cut(series, &edges);
                return edges.iter().position(|&e| e == frame).unwrap_or(0);
            }
            let means: Vec<f64> = edges
                .windows(2)
                .map(|edge| series[edge[0]..edge[1]].iter().sum::<f64>() / (edge[1] - edge[0]) as f64)
                .collect();
            let every_block: Vec<usize> = (0..=means.len()).collect();
            equilibration_cut(&means, &every_block)
        })
        .into_iter()
        .max()
        .unwrap_or(0);
    Ok(Cut {
        frames_read,
        frames_cut: edges[blocks_cut],
        blocks_cut,
        block_frames: block_frames.into_iter().max().unwrap_or(0),
    })
}
