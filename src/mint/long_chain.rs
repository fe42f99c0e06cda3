//! What the finite box makes of the bare plate, from chains ten times as long as the trajectory.

use nalgebra::Matrix3;
use rayon::prelude::*;

use super::hybrid_monte_carlo::{difference, held_strain};
use super::plate_box::{PlateBox, stretched};
use super::{CellCondition, CellHold, MintError, Progress, Voigt};
use crate::statistics::block_jackknife;
use crate::theory::PlaneModuli;

/// Independent chains, and blocks in each: their number is fixed, so that the numbers do not depend on the threads.
const CHAINS: usize = 8;
const BLOCKS: usize = 5;

/// Wave vectors whose lengths differ by less than this share are one row.
const ONE_ROW: f64 = 0.01;

/// Rows of longest waves whose rigidity is stated.
const ROWS: usize = 8;

/// Sums over the samples of one block.
struct BlockSums {
    count: f64,
    /// |h_q|^2 of each mode.
    power: Vec<f64>,
    /// (1/2) sum_p p_i p_j |h_p|^2 and its products.
    strain: Voigt,
    products: Matrix3<f64>,
}

/// A number with one standard error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Measured {
    pub value: f64,
    pub error: f64,
}

/// Rigidity kappa(q) of one row of waves.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct WaveRow {
    /// Mean |q| in 1/A.
    pub q: f64,
    /// The modes (m1, m2) of the row, q and -q once.
    pub modes: Vec<[i32; 2]>,
    /// In eV, the held tension out.
    pub kappa: Measured,
}

/// The properties of the rippled plate in its box.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct LongChain {
    pub trajectories: usize,
    pub acceptance: f64,
    pub waves: Vec<WaveRow>,
    /// Mean projected area, in A^2.
    pub area: Measured,
    /// (1/2) sum q^2 <|h_q|^2>.
    pub excess_area: Measured,
    /// C11, C22, C12, C66, Young's modulus, bulk modulus (eV/A^2) and Poisson ratio; `None` of a fixed cell.
    pub stiffness: Option<[Measured; 7]>,
}

/// Runs the chains, `trajectories` in all, on as many threads as there are.
pub(super) fn long_chain(
    plate: &PlateBox,
    hold: CellHold,
    trajectories: usize,
    seeds: &[u64],
    progress: &dyn Progress,
) -> Result<LongChain, MintError> {
    let per_block = trajectories.div_ceil(CHAINS * BLOCKS);
    let chains: Vec<(Vec<BlockSums>, f64)> = seeds
        .par_iter()
        .take(CHAINS)
        .map(|&seed| {
            let mut chain = plate.chain(hold, seed)?;
            let blocks = (0..BLOCKS)
                .map(|_| {
                    let mut sums = BlockSums::empty(plate.modes.len());
                    for _ in 0..per_block {
                        chain.advance();
                        sums.add(chain.heights(), chain.plate().ripple_strain(chain.heights()));
                    }
                    progress.work_done(per_block);
                    sums
                })
                .collect();
            Ok((blocks, chain.acceptance().unwrap_or(0.0)))
        })
        .collect::<Result<_, crate::theory::ScsaError>>()
        .map_err(|source| MintError::Plate {
            temperature: plate.state.temperature,
            source,
        })?;
    let acceptance = chains.iter().map(|chain| chain.1).sum::<f64>() / chains.len() as f64;
    let blocks: Vec<BlockSums> = chains.into_iter().flat_map(|chain| chain.0).collect();
    let rows = rows(plate);
    let estimate = |left_out: Option<usize>| {
        let mut sums = BlockSums::empty(plate.modes.len());
        for (block, part) in blocks.iter().enumerate() {
            if Some(block) != left_out {
                sums.append(part);
            }
        }
        sums.estimate(plate, hold, &rows)
    };
    let values = estimate(None);
    let variances = block_jackknife(blocks.len(), |block| Some(estimate(Some(block))));
    let measured = |place: usize| Measured {
        value: values[place],
        error: variances
            .as_ref()
            .map_or(0.0, |covariance| covariance[[place, place]].sqrt()),
    };
    let after = rows.len();
    Ok(LongChain {
        trajectories: per_block * CHAINS * BLOCKS,
        acceptance,
        waves: rows
            .iter()
            .enumerate()
            .map(|(place, (q, modes))| WaveRow {
                q: *q,
                modes: modes.iter().map(|&mode| plate.modes.integers[mode]).collect(),
                kappa: measured(place),
            })
            .collect(),
        area: measured(after),
        excess_area: measured(after + 1),
        stiffness: (hold == CellHold::Free).then(|| std::array::from_fn(|place| measured(after + 2 + place))),
    })
}

/// Seeds that [`long_chain`] takes.
pub(super) const SEEDS: usize = CHAINS;

/// The rows of longest waves: mean |q| and modes.
fn rows(plate: &PlateBox) -> Vec<(f64, Vec<usize>)> {
    let lengths: Vec<f64> = plate
        .modes
        .wave_vectors()
        .iter()
        .map(|q| q[0].hypot(q[1]))
        .collect();
    let mut order: Vec<usize> = (0..lengths.len()).collect();
    order.sort_by(|&i, &j| lengths[i].total_cmp(&lengths[j]).then(i.cmp(&j)));
    let mut rows: Vec<Vec<usize>> = Vec::new();
    for mode in order {
        let full = rows.len() == ROWS;
        match rows.last_mut() {
            Some(row) if lengths[mode] <= lengths[row[0]] * (1.0 + ONE_ROW) => row.push(mode),
            _ if full => break,
            _ => rows.push(vec![mode]),
        }
    }
    let mean = |row: &[usize]| row.iter().map(|&mode| lengths[mode]).sum::<f64>() / row.len() as f64;
    rows.into_iter().map(|row| (mean(&row), row)).collect()
}

impl BlockSums {
    fn empty(modes: usize) -> Self {
        Self {
            count: 0.0,
            power: vec![0.0; modes],
            strain: [0.0; 3],
            products: Matrix3::zeros(),
        }
    }

    fn add(&mut self, heights: &[num_complex::Complex64], strain: Voigt) {
        self.count += 1.0;
        for (sum, h) in self.power.iter_mut().zip(heights) {
            *sum += h.norm_sqr();
        }
        for (sum, e) in self.strain.iter_mut().zip(strain) {
            *sum += e;
        }
        self.products += Matrix3::from_fn(|i, j| strain[i] * strain[j]);
    }

    fn append(&mut self, other: &Self) {
        self.count += other.count;
        for (sum, part) in self.power.iter_mut().zip(&other.power) {
            *sum += part;
        }
        for (sum, part) in self.strain.iter_mut().zip(other.strain) {
            *sum += part;
        }
        self.products += other.products;
    }

    /// kappa of the rows, area, excess area, and of a free cell the seven moduli.
    fn estimate(&self, plate: &PlateBox, hold: CellHold, rows: &[(f64, Vec<usize>)]) -> Vec<f64> {
        let waves = plate.modes.wave_vectors();
        let square = |mode: usize| waves[mode][0].powi(2) + waves[mode][1].powi(2);
        let (state, box_area) = (&plate.state, plate.modes.cell.area());
        let kappa = |(_, row): &(f64, Vec<usize>)| {
            let mean = |power: i32| {
                let terms = row
                    .iter()
                    .map(|&mode| square(mode).powi(power) * self.power[mode]);
                terms.sum::<f64>() / (row.len() as f64 * self.count)
            };
            let mean_square = row.iter().map(|&mode| square(mode)).sum::<f64>() / row.len() as f64;
            state.thermal_energy() / (box_area * mean(2)) - state.tension / mean_square
        };
        let mut values: Vec<f64> = rows.iter().map(kappa).collect();
        let ripples = self.strain.map(|sum| sum / self.count);
        let strain = match hold {
            CellHold::FixedAt(strain) => strain,
            _ => difference(held_strain(state, plate.poisson), ripples),
        };
        values.push(stretched(&plate.flat, strain).area());
        values.push(ripples[0] + ripples[1]);
        if hold == CellHold::Free {
            values.extend(self.moduli(plate, ripples, strain));
        }
        values
    }

    /// Moduli from the compliance of the cell: the bare plate's, and (A/kB T) times the covariance of the ripples' strain,
    /// both against the mean cell rather than the flat one.
    fn moduli(&self, plate: &PlateBox, ripples: Voigt, mean: Voigt) -> [f64; 7] {
        let bare = PlaneModuli::from_youngs_and_poisson(plate.state.youngs, plate.poisson).stiffness();
        let bare = Matrix3::from_fn(|i, j| bare[i][j]);
        let covariance =
            Matrix3::from_fn(|i, j| self.products[(i, j)] / self.count - ripples[i] * ripples[j]);
        let [along, across] = [0, 1].map(|i: usize| 1.0 + 2.0 * mean[i]);
        let against_mean = [along, across, (along * across).sqrt()];
        let area = stretched(&plate.flat, mean).area();
        let inverse = |matrix: Matrix3<f64>| {
            matrix
                .try_inverse()
                .expect("a positive matrix and a covariance: never singular")
        };
        let compliance = inverse(bare) + covariance * (area / plate.state.thermal_energy());
        let compliance = Matrix3::from_fn(|i, j| compliance[(i, j)] / (against_mean[i] * against_mean[j]));
        let c = inverse(compliance);
        let s = |i: usize, j: usize| compliance[(i, j)];
        [
            c[(0, 0)],
            c[(1, 1)],
            c[(0, 1)],
            c[(2, 2)],
            (c[(0, 0)] * c[(1, 1)] - c[(0, 1)].powi(2)) / c[(1, 1)],
            1.0 / (s(0, 0) + s(1, 1) + 2.0 * s(0, 1)),
            -s(0, 1) / s(0, 0),
        ]
    }
}

/// The strain at which a chain's cell is held, for chains that are to share it.
pub(super) fn hold_of(condition: CellCondition) -> CellHold {
    match condition {
        CellCondition::Free => CellHold::Free,
        CellCondition::Fixed { mean_strain } => CellHold::FixedAt(mean_strain),
    }
}
