//! Split R-hat: do the two halves of a series agree?

/// Plain split R-hat of the two halves of one series (Gelman et al., Bayesian Data Analysis, 3rd ed., section 11.4).
///
/// With n values in each half, W the mean of the halves' variances and B/n the variance of their means,
/// R-hat = sqrt(((n - 1)/n W + B/n)/W). The middle value of an odd series is left out. `None` for fewer than four
/// values, or where both halves are constant.
#[must_use]
pub fn split_r_hat(series: &[f64]) -> Option<f64> {
    let half = series.len() / 2;
    if half < 2 {
        return None;
    }
    let n = half as f64;
    let moments = |part: &[f64]| {
        let mean = part.iter().sum::<f64>() / n;
        let variance = part.iter().map(|x| (x - mean).powi(2)).sum::<f64>() / (n - 1.0);
        (mean, variance)
    };
    let (first_mean, first_variance) = moments(&series[..half]);
    let (second_mean, second_variance) = moments(&series[series.len() - half..]);
    let within = 0.5 * (first_variance + second_variance);
    if within <= 0.0 {
        return None;
    }
    let between = 0.5 * (first_mean - second_mean).powi(2);
    Some((((n - 1.0) / n * within + between) / within).sqrt())
}
