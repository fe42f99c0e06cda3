//! Replicas of one condition become one: pooled, never joined in time.

use ndarray::Array2;
use std::collections::BTreeMap;

use super::excess_area::estimate_excess_area;
use super::modes::{length, order_by_length};
use super::{Estimate, EstimateError, ModeEstimate, RunEstimates, SpectrumEstimate, StrainEstimate, Tension};
use crate::theory::PlaneCell;

/// Pools replicas under the first one's name: means weighted by frames, effective samples added, blocks appended.
///
/// R-hats are the largest of the replicas'. `None` for no replica.
///
/// # Errors
/// A replica that measured other modes than the first.
pub fn pool(replicas: Vec<RunEstimates>) -> Result<Option<RunEstimates>, EstimateError> {
    let mut rest = replicas.into_iter();
    let Some(first) = rest.next() else {
        return Ok(None);
    };
    rest.try_fold(first, |pooled, next| join(pooled, &next)).map(Some)
}

/// Shares of two replicas in a mean.
#[derive(Clone, Copy)]
struct Shares(f64, f64);

impl Shares {
    fn mean(self, x: f64, y: f64) -> f64 {
        self.0 * x + self.1 * y
    }

    fn error(self, x: f64, y: f64) -> f64 {
        (self.0 * x).hypot(self.1 * y)
    }

    fn estimate(self, x: &Estimate, y: &Estimate) -> Estimate {
        Estimate {
            value: self.mean(x.value, y.value),
            error: self.error(x.error, y.error),
            effective_samples: x.effective_samples + y.effective_samples,
            split_r_hat: larger(x.split_r_hat, y.split_r_hat),
        }
    }

    fn cell(self, x: &PlaneCell, y: &PlaneCell) -> PlaneCell {
        let metric = |c: &PlaneCell| {
            let dot = |u: [f64; 2], v: [f64; 2]| u[0] * v[0] + u[1] * v[1];
            [dot(c.a, c.a), dot(c.a, c.b), dot(c.b, c.b)]
        };
        let (x, y) = (metric(x), metric(y));
        PlaneCell::from_metric(
            self.mean(x[0], y[0]),
            self.mean(x[1], y[1]),
            self.mean(x[2], y[2]),
        )
    }
}

fn larger(x: Option<f64>, y: Option<f64>) -> Option<f64> {
    match (x, y) {
        (Some(x), Some(y)) => Some(x.max(y)),
        _ => x.or(y),
    }
}

fn join(mut pooled: RunEstimates, next: &RunEstimates) -> Result<RunEstimates, EstimateError> {
    let total = (pooled.frames + next.frames) as f64;
    let shares = Shares(pooled.frames as f64 / total, next.frames as f64 / total);
    let cell = shares.cell(&pooled.spectrum.cell, &next.spectrum.cell);
    pooled.spectrum = join_spectra(&pooled.spectrum, &next.spectrum, cell, shares).ok_or_else(|| {
        EstimateError::OtherModes {
            first: pooled.name.clone(),
            replica: next.name.clone(),
        }
    })?;
    pooled.strain = join_strains(&pooled.strain, &next.strain, cell, shares);
    pooled.excess_area = estimate_excess_area(&pooled.spectrum);
    pooled.area = shares.estimate(&pooled.area, &next.area);
    let offset = pooled.area_blocks.last().map_or(0, |b| b.block + 1);
    pooled
        .area_blocks
        .extend(next.area_blocks.iter().map(|b| super::AreaBlock {
            block: b.block + offset,
            ..*b
        }));
    pooled.tension = match (pooled.tension, next.tension) {
        (Tension::Measured { value, error }, Tension::Measured { value: v, error: e }) => Tension::Measured {
            value: shares.mean(value, v),
            error: shares.error(error, e),
        },
        (Tension::Assumed, other) => other,
        (known, _) => known,
    };
    pooled.frames += next.frames;
    pooled.cut.frames_read += next.cut.frames_read;
    pooled.cut.frames_cut += next.cut.frames_cut;
    pooled.cut.blocks_cut += next.cut.blocks_cut;
    for reservation in &next.reservations {
        if !pooled.reservations.contains(reservation) {
            pooled.reservations.push(reservation.clone());
        }
    }
    Ok(pooled)
}

fn join_spectra(
    x: &SpectrumEstimate,
    y: &SpectrumEstimate,
    cell: PlaneCell,
    shares: Shares,
) -> Option<SpectrumEstimate> {
    let places: BTreeMap<[i32; 2], usize> =
        y.modes.iter().enumerate().map(|(i, m)| (m.integers, i)).collect();
    if x.modes.len() != y.modes.len() {
        return None;
    }
    let integers: Vec<[i32; 2]> = x.modes.iter().map(|m| m.integers).collect();
    let order = order_by_length(&integers, &cell);
    let partners: Vec<usize> = order
        .iter()
        .map(|&i| places.get(&integers[i]).copied())
        .collect::<Option<_>>()?;
    let modes = order
        .iter()
        .zip(&partners)
        .map(|(&i, &j)| join_modes(&x.modes[i], &y.modes[j], &cell, shares))
        .collect();
    let mut block_frames = x.block_frames.clone();
    block_frames.extend(&y.block_frames);
    let split = x.block_frames.len();
    let block_powers = Array2::from_shape_fn((block_frames.len(), order.len()), |(b, place)| {
        if b < split {
            x.block_powers[[b, order[place]]]
        } else {
            y.block_powers[[b - split, partners[place]]]
        }
    });
    Some(SpectrumEstimate::new(cell, modes, block_powers, block_frames))
}

fn join_modes(x: &ModeEstimate, y: &ModeEstimate, cell: &PlaneCell, shares: Shares) -> ModeEstimate {
    ModeEstimate {
        integers: x.integers,
        q: cell.wave_vector(x.integers),
        length: length(cell, x.integers),
        power: shares.mean(x.power, y.power),
        effective_samples: x.effective_samples + y.effective_samples,
        relaxation_ps: x
            .relaxation_ps
            .zip(y.relaxation_ps)
            .map(|(t, u)| shares.mean(t, u)),
        zone_weight: x.zone_weight,
        split_r_hat: larger(x.split_r_hat, y.split_r_hat),
        block_correlation: shares.mean(x.block_correlation, y.block_correlation),
        static_power: shares.mean(x.static_power, y.static_power),
        static_removed: x.static_removed || y.static_removed,
    }
}

fn join_strains(x: &StrainEstimate, y: &StrainEstimate, cell: PlaneCell, shares: Shares) -> StrainEstimate {
    let mut joined = x.clone();
    joined.cell = cell;
    for i in 0..3 {
        for j in 0..3 {
            joined.covariance[i][j] = shares.mean(x.covariance[i][j], y.covariance[i][j]);
            joined.effective_samples[i][j] += y.effective_samples[i][j];
            joined.split_r_hat[i][j] = larger(x.split_r_hat[i][j], y.split_r_hat[i][j]);
        }
        joined.free[i] = x.free[i] && y.free[i];
    }
    joined.coupled = x.coupled || y.coupled;
    joined
}
