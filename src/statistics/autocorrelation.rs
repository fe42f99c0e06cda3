//! Autocorrelation of stationary series and its integral, with a self-consistent window.

use num_complex::Complex64;
use rustfft::FftPlanner;

/// Sokal's window: the sum over lags stops at the first lag M >= `WINDOW_FACTOR` tau(M).
///
/// Sokal (1997) advises 4 to 6 where the decay is roughly exponential, and 10 where it is not. |h|^2 of an underdamped wave decays
/// as exp(-t/T) cos^2(omega t), with tau = T/2: 5 tau would miss 8 % of the sum, 8 tau misses 2 %.
const WINDOW_FACTOR: f64 = 8.0;

/// Standard deviation over mean below which a series counts as constant: rounding, not fluctuation.
const CONSTANT: f64 = 1e-12;

/// Autocovariance c_k = (1/N) sum_t (x_t - mean)(x_(t+k) - mean) for k = 0 to N - 1.
///
/// The division by N at every lag (not N - k) keeps the sequence positive definite (Priestley, Spectral Analysis and
/// Time Series, section 5.3). By the Wiener-Khinchin theorem on the series padded with zeros to twice its length.
#[must_use]
pub fn autocovariance(series: &[f64]) -> Vec<f64> {
    let count = series.len();
    if count == 0 {
        return Vec::new();
    }
    let mean = series.iter().sum::<f64>() / count as f64;
    let padded = (2 * count).next_power_of_two();
    let mut planner = FftPlanner::<f64>::new();
    let mut values = vec![Complex64::ZERO; padded];
    for (slot, x) in values.iter_mut().zip(series) {
        slot.re = x - mean;
    }
    planner.plan_fft_forward(padded).process(&mut values);
    for z in &mut values {
        *z = z.norm_sqr().into();
    }
    planner.plan_fft_inverse(padded).process(&mut values);
    let scale = 1.0 / (padded as f64 * count as f64);
    values[..count].iter().map(|z| z.re * scale).collect()
}

/// The integrated autocorrelation of one series, or of several that share one law.
#[derive(Clone, Debug, PartialEq)]
pub struct Autocorrelation {
    /// Statistical inefficiency g = 1 + 2 sum_k rho_k, at least 1: one independent sample per g frames.
    pub inefficiency: f64,
    /// Variance of a single value about the true mean (corrected for the mean's own fluctuation).
    pub variance: f64,
    /// Normalised autocorrelation rho_k at lags 0 to the window's end.
    pub correlation: Vec<f64>,
}

impl Autocorrelation {
    /// How many independent samples `frames` frames hold, n = frames/g.
    #[must_use]
    pub fn effective_samples(&self, frames: usize) -> f64 {
        frames as f64 / self.inefficiency
    }

    /// tau, the integral of rho(t) from 0 by the trapezium rule, in units of the frames' spacing: g/2.
    ///
    /// Where a series relaxes within one frame this is an upper bound, half a frame.
    #[must_use]
    pub fn time(&self) -> f64 {
        0.5 * self.inefficiency
    }

    /// Long-run over plain variance of means over blocks of `block` frames, at least 1: what neighbouring blocks'
    /// correlation multiplies the squared error of a mean of block means by. g over the g of one block,
    /// 1 + 2 sum_(k < block) (1 - k/block) rho_k.
    #[must_use]
    pub fn block_correlation(&self, block: usize) -> f64 {
        let within = 1.0
            + 2.0
                * (1..block.min(self.correlation.len()))
                    .map(|k| (1.0 - k as f64 / block as f64) * self.correlation[k])
                    .sum::<f64>();
        (self.inefficiency / within.max(1.0)).max(1.0)
    }
}

/// Integrated autocorrelation with the self-consistent window of Sokal, "Monte Carlo methods in statistical mechanics",
/// in Functional Integration (1997): tau(M) = 1/2 + sum_(k = 1)^M rho_k, cut at the first M >= 8 tau(M).
///
/// The series (all of one length) are taken to share one law: their autocovariances are averaged. Subtracting the
/// sample mean lowers every c_k by about variance g/N; g is corrected for it by the factor 1 + (2 M + 1)/N
/// (Wolff, Comput. Phys. Commun. 156, 143 (2004), eq. 49). The same factor a second time makes n = N/g, not g, right on
/// average: 1/g is convex, and the noise of g, of relative variance 2 (2 M + 1)/N, raises it (half of that is seen on
/// autoregressions of 20 to 200 effective samples, since the window shortens with a low g). Oscillation needs no care: g is a sum over the frames as they
/// are, whatever was aliased between them. `None` for fewer than two frames or a constant series.
#[must_use]
pub fn integrated_autocorrelation(series: &[&[f64]]) -> Option<Autocorrelation> {
    let count = series.first()?.len();
    if count < 2 || series.iter().any(|s| s.len() != count) {
        return None;
    }
    let mut covariance = vec![0.0; count];
    let mut square = 0.0;
    for s in series {
        square += s.iter().map(|x| x * x).sum::<f64>() / count as f64;
        for (sum, c) in covariance.iter_mut().zip(autocovariance(s)) {
            *sum += c;
        }
    }
    if covariance[0] <= CONSTANT * CONSTANT * square {
        return None;
    }
    let mut time = 0.5;
    let mut window = 0;
    while window + 1 < count && (window as f64) < WINDOW_FACTOR * time {
        window += 1;
        time += covariance[window] / covariance[0];
    }
    let n = count as f64;
    let shortfall = 1.0 + (2 * window + 1) as f64 / n;
    let inefficiency = (2.0 * time * shortfall * shortfall).clamp(1.0, n);
    let correlation = covariance[..=window].iter().map(|c| c / covariance[0]).collect();
    // The variance about the sample mean is short of the true one by the mean's own, variance g/N.
    let variance = covariance[0] / series.len() as f64 / (1.0 - (inefficiency / n).min(0.5));
    Some(Autocorrelation {
        inefficiency,
        variance,
        correlation,
    })
}
