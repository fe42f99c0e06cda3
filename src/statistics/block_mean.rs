//! Mean of block means that may be correlated and may differ in length.

/// A mean over blocks with its error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BlockMean {
    /// Weighted mean.
    pub value: f64,
    /// One standard error of it, correlation included.
    pub error: f64,
    /// Long-run over plain variance of the block means, at least 1.
    pub correlation: f64,
}

/// Weighted mean of block means and its standard error.
///
/// With weights w_b (frames) and deviations d_b = y_b - mean, the plain variance of the mean is
/// sum w d^2 / ((B - 1) sum w), since a block's variance goes as 1/w; neighbours' correlation multiplies it by
/// 1 + 2 sum_j r_j, r_j = sum sqrt(w_b w_(b+j)) d_b d_(b+j) / sum w d^2, over the window of `block_window_closed`.
/// `correlation` gives that factor where it is better known than these few blocks can tell. Never below 1: block means
/// of a relaxing series are not anticorrelated. `None` for fewer than two blocks.
#[must_use]
pub fn weighted_block_mean(means: &[f64], weights: &[f64], correlation: Option<f64>) -> Option<BlockMean> {
    let blocks = means.len();
    if blocks < 2 {
        return None;
    }
    let total: f64 = weights.iter().sum();
    let value = means.iter().zip(weights).map(|(y, w)| y * w).sum::<f64>() / total;
    let scaled: Vec<f64> = means
        .iter()
        .zip(weights)
        .map(|(y, w)| w.sqrt() * (y - value))
        .collect();
    let square: f64 = scaled.iter().map(|d| d * d).sum();
    let b = blocks as f64;
    let correlation = correlation
        .unwrap_or_else(|| own_correlation(&scaled, square))
        .max(1.0);
    // E[square/(B - 1)] is the plain variance less the share that correlation moves into the mean.
    let shortfall = (1.0 - (correlation - 1.0) / (b - 1.0)).max(0.5);
    let error = (square / (b - 1.0) / shortfall * correlation / total).sqrt();
    Some(BlockMean {
        value,
        error,
        correlation,
    })
}

fn own_correlation(scaled: &[f64], square: f64) -> f64 {
    let blocks = scaled.len();
    if square <= 0.0 {
        return 1.0;
    }
    let mut time = 0.5;
    let mut lag = 0;
    while lag < blocks / 4 && !block_window_closed(lag, time) {
        lag += 1;
        let product: f64 = scaled.iter().zip(&scaled[lag..]).map(|(x, y)| x * y).sum();
        // Each lag is low by 1/B of the variance, the mean's own share.
        time += product / square + 1.0 / blocks as f64;
    }
    2.0 * time
}

/// Whether the sum over lags of block means may stop at `lag`: lag >= 4 tau - 1, at least 1.
///
/// Sokal's rule less one block: means over blocks longer than the relaxation are uncorrelated beyond their neighbours,
/// and each further lag only adds noise.
#[must_use]
pub(super) fn block_window_closed(lag: usize, time: f64) -> bool {
    lag >= 1 && lag as f64 >= 4.0 * time - 1.0
}
