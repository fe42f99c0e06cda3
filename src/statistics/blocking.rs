//! The blocking transformation of Flyvbjerg and Petersen: an error of the mean without any autocorrelation function.

/// One level of the blocking transformation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BlockingLevel {
    /// Values averaged into each block.
    pub block_length: usize,
    /// Standard error of the mean if these blocks were independent.
    pub error: f64,
    /// Standard error of `error`.
    pub uncertainty: f64,
}

/// Errors of the mean at block lengths 1, 2, 4, ... while at least two blocks remain.
///
/// At each level error^2 = sum (x - mean)^2/(m (m - 1)) of the m block means; it rises to a plateau once blocks are
/// longer than the correlation. Its uncertainty is error/sqrt(2 (m - 1)). (Flyvbjerg and Petersen, J. Chem. Phys. 91,
/// 461 (1989), eqs. 24 to 28.) An odd value at the end of a level is dropped.
#[must_use]
pub fn blocking_levels(series: &[f64]) -> Vec<BlockingLevel> {
    let mut values = series.to_vec();
    let mut block_length = 1;
    let mut levels = Vec::new();
    while values.len() >= 2 {
        let m = values.len() as f64;
        let mean = values.iter().sum::<f64>() / m;
        let square: f64 = values.iter().map(|x| (x - mean).powi(2)).sum();
        let error = (square / (m * (m - 1.0))).sqrt();
        levels.push(BlockingLevel {
            block_length,
            error,
            uncertainty: error / (2.0 * (m - 1.0)).sqrt(),
        });
        values = values
            .chunks_exact(2)
            .map(|pair| 0.5 * (pair[0] + pair[1]))
            .collect();
        block_length *= 2;
    }
    levels
}
