//! Delete-one-block jackknife.

use ndarray::{Array2, Axis};

/// Covariance of an estimator's values by leaving out one block at a time.
///
/// `estimate(b)` is the vector of values with block b left out. The covariance is
/// (B - 1)/B sum_b (theta_b - mean)(theta_b - mean)^T (Efron and Tibshirani, An Introduction to the Bootstrap, ch. 11),
/// right for blocks that are nearly independent; correlated ones are to be joined pairwise first. `None` for fewer than
/// two blocks, or where an estimate fails or changes its length.
#[must_use]
pub fn block_jackknife(blocks: usize, estimate: impl Fn(usize) -> Option<Vec<f64>>) -> Option<Array2<f64>> {
    if blocks < 2 {
        return None;
    }
    let replicates: Vec<Vec<f64>> = (0..blocks).map(estimate).collect::<Option<_>>()?;
    let size = replicates[0].len();
    let flat: Vec<f64> = replicates.into_iter().flatten().collect();
    let mut values = Array2::from_shape_vec((blocks, size), flat).ok()?;
    let mean = values.mean_axis(Axis(0))?;
    values -= &mean;
    let factor = (blocks - 1) as f64 / blocks as f64;
    Some(values.t().dot(&values) * factor)
}
