//! The sampler of the nonlinear plate against an independent program, first-order perturbation theory, the box SCSA, and
//! its own energy. What belongs here: the statistics of the heights, before there are atoms.

use num_complex::Complex64;
use planish::mint::{CellCondition, CellHold, HybridMonteCarlo, RippledPlate};
use planish::theory::{BoxModes, BoxScsa, PlaneCell, PlateState, one_loop};
use planish::units::N_PER_M_PER_EV_PER_A2;
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

const POISSON: f64 = 0.311;

fn square(length: f64) -> PlaneCell {
    PlaneCell {
        a: [length, 0.0],
        b: [0.0, length],
    }
}

fn boron_nitride(temperature: f64) -> PlateState {
    PlateState {
        kappa: 0.878,
        youngs: 250.2 / N_PER_M_PER_EV_PER_A2,
        lattice_term: 0.0,
        tension: 0.0,
        temperature,
    }
}

fn index(modes: &BoxModes, m: [i32; 2]) -> usize {
    let found = modes.integers.iter().position(|&other| other == m);
    found.expect("the mode is in the box")
}

/// Mean and error from the means of blocks.
fn mean_and_error(blocks: &[f64]) -> (f64, f64) {
    let count = blocks.len() as f64;
    let mean = blocks.iter().sum::<f64>() / count;
    let square: f64 = blocks.iter().map(|x| (x - mean).powi(2)).sum();
    (mean, (square / (count * (count - 1.0))).sqrt())
}

const BLOCKS: usize = 40;

/// kappa = kB T/(A q^4 <|h_q|^2>) of the rows of modes, with errors, from a chain of so many trajectories.
fn rigidities(
    chain: &mut HybridMonteCarlo,
    modes: &BoxModes,
    rows: &[Vec<[i32; 2]>],
    trajectories: usize,
) -> Vec<(f64, f64)> {
    let wave_vectors = modes.wave_vectors();
    let weights: Vec<Vec<(usize, f64)>> = rows
        .iter()
        .map(|row| {
            let share = |&m: &[i32; 2]| {
                let mode = index(modes, m);
                let [x, y] = wave_vectors[mode];
                (mode, (x * x + y * y).powi(2) / row.len() as f64)
            };
            row.iter().map(share).collect()
        })
        .collect();
    let mut means = vec![vec![0.0; BLOCKS]; rows.len()];
    let length = trajectories / BLOCKS;
    for block in 0..BLOCKS {
        for _ in 0..length {
            chain.advance();
            for (mean, row) in means.iter_mut().zip(&weights) {
                for &(mode, weight) in row {
                    mean[block] += weight * chain.heights()[mode].norm_sqr() / length as f64;
                }
            }
        }
    }
    let thermal = chain.plate().state().thermal_energy() / modes.cell.area();
    means
        .iter()
        .map(|blocks| {
            let (mean, error) = mean_and_error(blocks);
            (thermal / mean, thermal / mean * error / mean)
        })
        .collect()
}

/// The modes that are (m1, m2) but for the symmetry of a square box.
fn star([m1, m2]: [i32; 2]) -> Vec<[i32; 2]> {
    match (m1, m2) {
        (m, 0) => vec![[m, 0], [0, m]],
        (m, n) if m == n => vec![[m, m], [m, -m]],
        (m, n) => vec![[m, n], [m, -n], [n, m], [n, -m]],
    }
}

#[test]
fn the_gradient_is_the_derivative_of_the_energy() {
    let cell = PlaneCell {
        a: [31.0, 0.0],
        b: [7.0, 26.0],
    };
    let modes = BoxModes::within(cell, 0.9);
    let state = PlateState {
        lattice_term: 0.3,
        tension: 0.02,
        ..boron_nitride(600.0)
    };
    let mut random = Xoshiro256PlusPlus::seed_from_u64(11);
    for condition in [
        CellCondition::Free,
        CellCondition::Fixed {
            mean_strain: [0.01, -0.02, 0.015],
        },
    ] {
        let mut plate = RippledPlate::new(&modes, state, POISSON, condition);
        let mut heights: Vec<Complex64> = (0..modes.len())
            .map(|_| Complex64::new(random.random_range(-0.1..0.1), random.random_range(-0.1..0.1)))
            .collect();
        let mut gradient = vec![Complex64::ZERO; modes.len()];
        let mut unused = gradient.clone();
        plate.energy(&heights, &mut gradient);
        let size = gradient.iter().map(|g| g.norm()).fold(0.0, f64::max);
        for mode in 0..modes.len() {
            for (direction, slope) in [
                (Complex64::ONE, gradient[mode].re),
                (Complex64::i(), gradient[mode].im),
            ] {
                let step = 1e-4;
                let at = heights[mode];
                let mut energy_at = |moved: f64| {
                    heights[mode] = at + direction * moved;
                    plate.energy(&heights, &mut unused)
                };
                let difference = (energy_at(step) - energy_at(-step)) / (2.0 * step);
                heights[mode] = at;
                assert!(
                    (difference - slope).abs() < 1e-6 * size,
                    "{condition:?}, mode {mode}: {difference} and {slope}"
                );
            }
        }
    }
}

/// The energy summed over pairs of modes as the formula stands, without a transform.
#[test]
fn the_energy_is_that_of_the_formula() {
    let modes = BoxModes::within(square(20.0), 0.8);
    let state = boron_nitride(300.0);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(12);
    let heights: Vec<Complex64> = (0..modes.len())
        .map(|_| Complex64::new(random.random_range(-0.3..0.3), random.random_range(-0.3..0.3)))
        .collect();
    let mut all: Vec<([i32; 2], [f64; 2], Complex64)> = Vec::new();
    for ((m, q), h) in modes.integers.iter().zip(modes.wave_vectors()).zip(&heights) {
        all.push((*m, q, *h));
        all.push(([-m[0], -m[1]], q.map(|x| -x), h.conj()));
    }
    let area = modes.cell.area();
    let mut expected = 0.0;
    for (m, q, h) in &all {
        let square = q[0] * q[0] + q[1] * q[1];
        expected += 0.5 * area * state.kappa * square * square * h.norm_sqr();
        let mut stretching = Complex64::ZERO;
        for (m1, p1, h1) in &all {
            for (m2, p2, h2) in &all {
                if m1[0] + m2[0] == m[0] && m1[1] + m2[1] == m[1] {
                    // P^T_ij (i p1_i) (i p2_j) = -(qhat x p1)(qhat x p2).
                    let cross = |p: &[f64; 2]| q[0] * p[1] - q[1] * p[0];
                    stretching -= h1 * h2 * (0.5 * cross(p1) * cross(p2) / square);
                }
            }
        }
        expected += 0.5 * area * state.youngs * stretching.norm_sqr();
    }
    let mut plate = RippledPlate::new(&modes, state, POISSON, CellCondition::Free);
    let found = plate.energy(&heights, &mut vec![Complex64::ZERO; modes.len()]);
    assert!((found / expected - 1.0).abs() < 1e-12, "{found} and {expected}");
}

/// `data/theory/plate_box_sampling.csv`: direct sampling by an independent numpy program, free and fixed cell.
#[test]
fn agrees_with_an_independent_program() {
    let modes = BoxModes::within(square(52.0), 1.2);
    for temperature in [300.0, 900.0] {
        for (fixed, hold) in [(false, CellHold::Free), (true, CellHold::FixedAtTension)] {
            let mut chain =
                HybridMonteCarlo::equilibrated(&modes, boron_nitride(temperature), POISSON, hold, 3)
                    .expect("a sound plate");
            let rows = reference(temperature, fixed);
            let stars: Vec<Vec<[i32; 2]>> = rows.iter().map(|row| star(row.0)).collect();
            let found = rigidities(&mut chain, &modes, &stars, 8000);
            let acceptance = chain.acceptance().expect("it has moved");
            assert!((0.6..0.98).contains(&acceptance), "acceptance {acceptance}");
            for ((m, expected, error), (kappa, own_error)) in rows.into_iter().zip(found) {
                let deviation = (kappa - expected) / error.hypot(own_error);
                assert!(
                    deviation.abs() < 3.0,
                    "{temperature} K, fixed {fixed}, {m:?}: {kappa} +- {own_error}, expected {expected} +- {error}"
                );
            }
        }
    }
}

/// Rows (m, kappa, error) of the reference.
fn reference(temperature: f64, fixed: bool) -> Vec<([i32; 2], f64, f64)> {
    include_str!("data/theory/plate_box_sampling.csv")
        .lines()
        .filter(|line| line.starts_with(|c: char| c.is_ascii_digit()))
        .map(|line| {
            line.split(',')
                .map(|field| field.parse().expect("a number"))
                .collect::<Vec<f64>>()
        })
        .filter(|row| row[0] == temperature)
        .map(|row| {
            let at = if fixed { 5 } else { 3 };
            ([row[1] as i32, row[2] as i32], row[at], row[at + 1])
        })
        .collect()
}

/// Where the coupling is weak, kappa(q) is that of first-order perturbation theory summed over the box's modes. The shift is
/// read from the exact identity <Re conj(h_q) dE/dh_q> = 2 kB T, whose noise is in proportion to the shift itself:
/// with K the harmonic part, kappa(q) - kappa = (<Re conj(h) dE/dh>/2 - K <|h|^2>)/(A q^4 <|h|^2>).
#[test]
fn weak_coupling_is_first_order() {
    let modes = BoxModes::within(square(52.0), 0.6);
    let area = modes.cell.area();
    let state = PlateState {
        youngs: 0.25,
        ..boron_nitride(300.0)
    };
    let theory = one_loop::in_box(&modes, &state).expect("a sound plate");
    let mut chain =
        HybridMonteCarlo::equilibrated(&modes, state, POISSON, CellHold::Free, 4).expect("a sound plate");
    let rows = [[1, 0], [1, 1], [2, 0]].map(star);
    let mut sums = vec![vec![[0.0; 2]; BLOCKS]; rows.len()];
    let wave_vectors = modes.wave_vectors();
    for block in 0..BLOCKS {
        for _ in 0..1500 {
            chain.advance();
            for (sums, row) in sums.iter_mut().zip(&rows) {
                for &m in row {
                    let mode = index(&modes, m);
                    let [x, y] = wave_vectors[mode];
                    let (h, q4) = (chain.heights()[mode], (x * x + y * y).powi(2));
                    let virial = 0.5 * (h.conj() * chain.gradient()[mode]).re;
                    sums[block][0] += virial - area * state.kappa * q4 * h.norm_sqr();
                    sums[block][1] += area * q4 * h.norm_sqr();
                }
            }
        }
    }
    for (sums, row) in sums.iter().zip(&rows) {
        let total = |part: usize| sums.iter().map(|block| block[part]).sum::<f64>();
        let shift = total(0) / total(1);
        let lacks: Vec<f64> = sums.iter().map(|block| block[0] - shift * block[1]).collect();
        let (_, error) = mean_and_error(&lacks);
        let error = error * BLOCKS as f64 / total(1);
        let expected = theory.kappa[index(&modes, row[0])] - state.kappa;
        assert!(expected < 0.03 * state.kappa, "{expected} is weak");
        assert!(
            error < 0.05 * expected,
            "the shift {expected} is resolved: {error}"
        );
        assert!(
            (shift - expected).abs() < 3.0 * error + 0.03 * expected,
            "{:?}: {shift} +- {error}, first order {expected}",
            row[0]
        );
    }
}

/// The screening approximation is near the truth while q_th is at most twice the smallest q.
#[test]
fn the_box_scsa_is_right_within_three_per_cent() {
    let modes = BoxModes::within(square(52.0), 1.2);
    let smallest = std::f64::consts::TAU / 52.0;
    let mut state = boron_nitride(300.0);
    state.temperature *= (2.0 * smallest / state.thermal_wave_vector()).powi(2);
    let theory = BoxScsa::new(&modes).solve(&state).expect("a sound plate");
    let mut chain =
        HybridMonteCarlo::equilibrated(&modes, state, POISSON, CellHold::Free, 5).expect("a sound plate");
    let rows = [[1, 0], [1, 1], [2, 0], [2, 1]];
    let found = rigidities(&mut chain, &modes, &rows.map(star), 16_000);
    for (m, (kappa, error)) in rows.into_iter().zip(found) {
        let expected = theory.kappa[index(&modes, m)];
        assert!(error < 0.012 * kappa, "{m:?}: {kappa} +- {error}");
        assert!(
            (kappa / expected - 1.0).abs() < 0.03 + error / kappa,
            "{m:?}: {kappa} +- {error}, box SCSA {expected}"
        );
    }
}

/// The ripples' part of the compliance of a free cell, (A/kB T) times the covariance of their mean strain, at 300 K: S11
/// 1.97 +- 0.04, S12 0.04 +- 0.02, S66 1.39 +- 0.02 (1e-3 m/N), from direct sampling by an independent numpy program.
#[test]
fn the_cell_is_as_soft_as_an_independent_program_says() {
    let modes = BoxModes::within(square(52.0), 1.2);
    let mut chain = HybridMonteCarlo::equilibrated(&modes, boron_nitride(300.0), POISSON, CellHold::Free, 6)
        .expect("a sound plate");
    let strains: Vec<[f64; 3]> = (0..12_000)
        .map(|_| {
            chain.advance();
            chain.plate().ripple_strain(chain.heights())
        })
        .collect();
    let mean = [0, 1, 2].map(|i: usize| strains.iter().map(|e| e[i]).sum::<f64>() / strains.len() as f64);
    let thermal = chain.plate().state().thermal_energy();
    // eV/A^2 to 1e-3 m/N, the inverse way.
    let unit = 1e3 * modes.cell.area() / thermal / N_PER_M_PER_EV_PER_A2;
    let compliance = |i: usize, j: usize| {
        let products: Vec<f64> = strains
            .chunks(strains.len() / BLOCKS)
            .map(|block| {
                let sum: f64 = block.iter().map(|e| (e[i] - mean[i]) * (e[j] - mean[j])).sum();
                unit * sum / block.len() as f64
            })
            .collect();
        mean_and_error(&products)
    };
    for (i, j, expected, error) in [
        (0, 0, 1.97, 0.04_f64),
        (1, 1, 1.97, 0.04),
        (0, 1, 0.04, 0.02),
        (2, 2, 1.39, 0.02),
    ] {
        let (found, own_error) = compliance(i, j);
        assert!(own_error < 0.1, "S{i}{j} {found} +- {own_error}");
        assert!(
            (found - expected).abs() < 3.0 * error.hypot(own_error),
            "S{i}{j}: {found} +- {own_error}, expected {expected} +- {error}"
        );
    }
}
