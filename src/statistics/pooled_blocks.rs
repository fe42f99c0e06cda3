//! Variance and correlation of block means, pooled over neighbouring items to beat their noise.

use ndarray::ArrayView2;

use super::block_mean::block_window_closed;

/// What the block means of one item and its neighbours say, in units of the item's scale squared.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PooledBlocks {
    /// Long-run variance of the block means, the sum of their autocovariance over all lags: B times the mean's variance.
    pub long_run: f64,
    /// Long-run over plain variance, at least 1.
    pub correlation: f64,
}

/// Mean over the items at most `half_window` places away, the item itself included.
#[must_use]
pub fn neighbour_mean(values: &[f64], half_window: usize) -> Vec<f64> {
    let mut sums = Vec::with_capacity(values.len() + 1);
    let mut sum = 0.0;
    sums.push(sum);
    for v in values {
        sum += v;
        sums.push(sum);
    }
    (0..values.len())
        .map(|i| {
            let first = i.saturating_sub(half_window);
            let end = (i + half_window + 1).min(values.len());
            (sums[end] - sums[first]) / (end - first) as f64
        })
        .collect()
}

/// Pools the autocovariance of equally long blocks' means over neighbouring items.
///
/// `components` each have shape (blocks, items) and are summed over (the real and imaginary part of one number, say);
/// an item's values are divided by its `scale` so that neighbours of different size weigh alike. The sum over lags,
/// L = c_0 + 2 sum_(j <= J) c_j with c_j = (1/B) sum_b d_b d_(b+j), stops at the first J >= 4 tau - 1 of the pooled
/// series and at a quarter of the blocks. Subtracting the sample mean takes L/B from every lag, so that L is divided by
/// 1 - (2 J + 1)/B (after Wolff, Comput. Phys. Commun. 156, 143 (2004)). `None` for fewer than two blocks.
#[must_use]
pub fn pooled_block_correlation(
    components: &[ArrayView2<'_, f64>],
    scale: &[f64],
    half_window: usize,
) -> Option<Vec<PooledBlocks>> {
    let blocks = components.first()?.nrows();
    let items = scale.len();
    if blocks < 2 {
        return None;
    }
    let b = blocks as f64;
    let deviations: Vec<Vec<Vec<f64>>> = components
        .iter()
        .map(|component| {
            (0..items)
                .map(|i| {
                    let column = component.column(i);
                    let mean = column.sum() / b;
                    column.iter().map(|y| (y - mean) / scale[i]).collect()
                })
                .collect()
        })
        .collect();
    let autocovariance = |lag: usize, upto: usize| -> Vec<f64> {
        (0..items)
            .map(|i| {
                if i >= upto {
                    return 0.0;
                }
                let product = |d: &Vec<f64>| d.iter().zip(&d[lag..]).map(|(x, y)| x * y).sum::<f64>();
                deviations
                    .iter()
                    .map(|component| product(&component[i]))
                    .sum::<f64>()
                    / b
            })
            .collect()
    };
    let plain = neighbour_mean(&autocovariance(0, items), half_window);
    let mut sums = plain.clone();
    let mut lags = vec![0; items];
    let mut open: Vec<bool> = plain.iter().map(|&c| c > 0.0).collect();
    for lag in 1..=blocks / 4 {
        let Some(last) = open.iter().rposition(|&o| o) else {
            break;
        };
        let pooled = neighbour_mean(&autocovariance(lag, last + half_window + 1), half_window);
        for i in 0..=last {
            if !open[i] {
                continue;
            }
            sums[i] += 2.0 * pooled[i];
            lags[i] = lag;
            // tau of this lag, with the mean's share 1/B put back for the decision.
            let time = 0.5 * sums[i] / plain[i] + lag as f64 / b;
            open[i] = !block_window_closed(lag, time);
        }
    }
    let result = (0..items).map(|i| {
        let long_run = sums[i] / (1.0 - (2 * lags[i] + 1) as f64 / b).max(0.25);
        let variance = plain[i] + long_run / b;
        // Blocks of a relaxing series are not anticorrelated; noise alone would say so.
        let long_run = long_run.max(plain[i] * b / (b - 1.0));
        let correlation = if plain[i] > 0.0 {
            (long_run / variance).max(1.0)
        } else {
            1.0
        };
        PooledBlocks {
            long_run,
            correlation,
        }
    });
    Some(result.collect())
}
