//! Runs whose height spectrum is drawn from a known plate: each block's mean power of a mode is Gamma distributed about the
//! truth, so that the run's mean is Gamma(n, mean/n) with the n effective samples that the estimate states.

use ndarray::Array2;
use planish::estimates::{
    AreaBlock, Cut, Estimate, ModeEstimate, RunEstimates, SpectrumEstimate, SpectrumRow, StrainEstimate,
    Tension,
};
use planish::theory::{BoxModes, BrillouinZone, PlaneCell};
use rand_distr::{Distribution, Gamma};
use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::SeedableRng;

/// Blocks of every synthetic run.
pub const BLOCKS: usize = 20;

/// 21 x 12 rectangular cells of a honeycomb with a = 2.4979 A: about 52.4 x 51.8 A.
pub fn boron_nitride_box() -> (PlaneCell, BrillouinZone) {
    let a = 2.4979;
    let height = 3.0_f64.sqrt() * a;
    let cell = PlaneCell {
        a: [21.0 * a, 0.0],
        b: [0.0, 12.0 * height],
    };
    (
        cell,
        BrillouinZone::of_lattice([[a, 0.0], [0.5 * a, 0.5 * height]]),
    )
}

/// What a synthetic run is like.
pub struct Synthetic {
    /// Temperature in K.
    pub temperature: f64,
    /// Effective samples of the slowest mode; faster ones have more, up to 300.
    pub slowest_samples: f64,
    /// Seed of the noise.
    pub seed: u64,
}

impl Synthetic {
    /// A run over `modes` whose mean powers (A^2) are `power`.
    pub fn draw(&self, modes: &BoxModes, power: &[f64]) -> RunEstimates {
        let mut generator = Xoshiro256PlusPlus::seed_from_u64(self.seed);
        let mut order: Vec<usize> = (0..modes.len()).collect();
        let lengths: Vec<f64> = modes.wave_vectors().iter().map(|q| q[0].hypot(q[1])).collect();
        order.sort_by(|&one, &other| lengths[one].total_cmp(&lengths[other]));
        let smallest = lengths[order[0]];
        let mut block_powers = Array2::zeros((BLOCKS, modes.len()));
        let mut estimates = Vec::new();
        for (column, &mode) in order.iter().enumerate() {
            let samples = (self.slowest_samples * (lengths[mode] / smallest).powi(2)).min(300.0);
            let shape = samples / BLOCKS as f64;
            let gamma = Gamma::new(shape, power[mode] / shape).expect("a positive shape");
            for block in 0..BLOCKS {
                block_powers[[block, column]] = gamma.sample(&mut generator);
            }
            estimates.push(ModeEstimate {
                integers: modes.integers[mode],
                q: modes.cell.wave_vector(modes.integers[mode]),
                length: lengths[mode],
                power: block_powers.column(column).sum() / BLOCKS as f64,
                effective_samples: samples,
                relaxation_ps: None,
                zone_weight: modes.weights[mode],
                split_r_hat: (column < 32).then_some(1.0),
                block_correlation: 1.0,
                static_power: 0.0,
                static_removed: false,
            });
        }
        let exact = |value: f64| Estimate {
            value,
            error: 1e-3 * value,
            effective_samples: 100.0,
            split_r_hat: Some(1.0),
        };
        RunEstimates {
            name: "synthetic".to_owned(),
            temperature: self.temperature,
            tension: Tension::Stated(0.0),
            atoms: 1008,
            mass: None,
            frames: 16 * BLOCKS,
            cut: Cut {
                frames_read: 16 * BLOCKS,
                frames_cut: 0,
                blocks_cut: 0,
                block_frames: 16,
            },
            area: exact(modes.cell.area()),
            area_blocks: Vec::<AreaBlock>::new(),
            spectrum: SpectrumEstimate {
                cell: modes.cell,
                rows: rows(&estimates),
                modes: estimates,
                block_powers,
                block_frames: vec![16; BLOCKS],
            },
            strain: StrainEstimate {
                cell: modes.cell,
                covariance: [[0.0; 3]; 3],
                effective_samples: [[100.0; 3]; 3],
                split_r_hat: [[Some(1.0); 3]; 3],
                free: [true, true, false],
                coupled: false,
            },
            excess_area: Some(exact(0.01)),
            reservations: Vec::new(),
        }
    }
}

pub fn rows(modes: &[ModeEstimate]) -> Vec<SpectrumRow> {
    let mut rows = Vec::new();
    let mut first = 0;
    for end in 1..=modes.len() {
        if end < modes.len() && modes[end].length <= 1.01 * modes[first].length {
            continue;
        }
        let row = &modes[first..end];
        let mean = |of: &dyn Fn(&ModeEstimate) -> f64| row.iter().map(of).sum::<f64>() / row.len() as f64;
        rows.push(SpectrumRow {
            modes: first..end,
            length: mean(&|mode| mode.length),
            power: mean(&|mode| mode.power),
            power_error: 0.0,
            weighted_power: mean(&|mode| mode.power * mode.length.powi(4)),
            weighted_power_error: 0.0,
            effective_samples: row.iter().map(|mode| mode.effective_samples).sum(),
            relaxation_ps: None,
        });
        first = end;
    }
    rows
}

/// Mean and standard deviation.
pub fn moments(values: &[f64]) -> [f64; 2] {
    let count = values.len() as f64;
    let mean = values.iter().sum::<f64>() / count;
    let variance = values.iter().map(|value| (value - mean).powi(2)).sum::<f64>() / (count - 1.0);
    [mean, variance.sqrt()]
}
