//! The compliance of a rippled box: against direct sampling of the nonlinear plate, against finite differences of the
//! equations written out in full under anisotropic stress, and in limits.

use planish::theory::{BoxModes, BoxScsa, PlaneCell, PlaneModuli, PlateState};
use planish::units::{BOLTZMANN_EV_PER_K, N_PER_M_PER_EV_PER_A2};

fn rectangle(a: f64, b: f64) -> PlaneCell {
    PlaneCell {
        a: [a, 0.0],
        b: [0.0, b],
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

/// Hybrid Monte Carlo of the nonlinear plate, free 52 x 52 A cell at zero tension, 300 K, height modes q < 1.2 /A, sampled for
/// this project by a program of its own: (A/kB T) cov of (1/2) d_i h d_j h averaged over the cell, in 1e-3 m/N:
/// S11 1.97 +- 0.04, S12 0.04 +- 0.02, S66 1.39 +- 0.02.
#[test]
fn ripples_soften_the_box_as_direct_sampling_says() {
    let modes = BoxModes::within(rectangle(52.0, 52.0), 1.2);
    let solver = BoxScsa::new(&modes);
    let solution = solver.solve(&boron_nitride(300.0)).expect("a solution");
    let ripples = solver.ripple_compliance(&solution).expect("a response");
    let sampled = [
        (0, 0, 1.97, 0.04),
        (1, 1, 1.97, 0.04),
        (0, 1, 0.04, 0.02),
        (2, 2, 1.39, 0.02),
    ];
    for (i, j, value, error) in sampled {
        let found = 1e3 * ripples[i][j] / N_PER_M_PER_EV_PER_A2;
        // The self-consistent theory itself is within 2 % of sampling in kappa.
        assert!(
            (found - value).abs() < 3.0 * error + 0.02 * value,
            "S{i}{j} is {found}, sampled {value}"
        );
    }
}

/// The equations as sums over all pairs of modes, solved by plain iteration under the stresses `stress` (Voigt 1, 2, 6): the
/// ripples' strain (1/2A) sum_p p_i p_j G(p), Voigt with e6 = 2 e12.
fn hidden_strain(modes: &BoxModes, state: &PlateState, stress: [f64; 3]) -> [f64; 3] {
    let mut waves = Vec::new();
    for (q, &weight) in modes.wave_vectors().iter().zip(&modes.weights) {
        for sign in [1.0, -1.0] {
            waves.push(([sign * q[0], sign * q[1]], weight));
        }
    }
    let area = modes.cell.area();
    let thermal = BOLTZMANN_EV_PER_K * state.temperature;
    let square = |q: [f64; 2]| q[0] * q[0] + q[1] * q[1];
    let find = |k: [f64; 2]| {
        waves
            .iter()
            .position(|(q, _)| (q[0] - k[0]).abs() + (q[1] - k[1]).abs() < 1e-9)
    };
    // Third of each triangle k = q + p.
    let thirds: Vec<Vec<Option<usize>>> = waves
        .iter()
        .map(|(k, _)| {
            waves
                .iter()
                .map(|(q, _)| find([k[0] - q[0], k[1] - q[1]]))
                .collect()
        })
        .collect();
    let bare: Vec<f64> = waves
        .iter()
        .map(|(q, _)| state.bare_kappa(square(*q).sqrt()))
        .collect();
    let mut kappa = bare.clone();
    let mut propagator = vec![0.0; waves.len()];
    for _ in 0..400 {
        for (mode, (q, _)) in waves.iter().enumerate() {
            let tension = stress[0] * q[0] * q[0] + stress[1] * q[1] * q[1] + 2.0 * stress[2] * q[0] * q[1];
            propagator[mode] = thermal / (kappa[mode] * square(*q).powi(2) + tension);
        }
        let sum = |mode: usize, term: &dyn Fn(usize, usize) -> f64| -> f64 {
            let (k, _) = waves[mode];
            let mut sum = 0.0;
            for (other, third) in thirds[mode].iter().enumerate() {
                if let Some(third) = *third {
                    let (q, _) = waves[other];
                    let cross = (k[0] * q[1] - k[1] * q[0]).powi(4) / square(k).powi(2);
                    sum += cross * waves[other].1 * waves[third].1 * term(other, third);
                }
            }
            sum
        };
        let youngs: Vec<f64> = (0..waves.len())
            .map(|mode| {
                let pi = sum(mode, &|p, r| propagator[p] * propagator[r]) / (2.0 * thermal * area);
                state.youngs / (1.0 + state.youngs * pi)
            })
            .collect();
        let change = |mode: usize| {
            let stiffening = sum(mode, &|q, r| {
                youngs[q] / square(waves[q].0).powi(2) * propagator[r]
            });
            bare[mode] + stiffening / area
        };
        let next: Vec<f64> = (0..waves.len()).map(change).collect();
        for (kappa, next) in kappa.iter_mut().zip(next) {
            *kappa = (*kappa * next).sqrt();
        }
    }
    let mut strain = [0.0; 3];
    for ((q, weight), g) in waves.iter().zip(&propagator) {
        let parts = [q[0] * q[0], q[1] * q[1], 2.0 * q[0] * q[1]];
        for (strain, part) in strain.iter_mut().zip(parts) {
            *strain += 0.5 * weight * part * g / area;
        }
    }
    strain
}

/// A tilted box with edge weights and a lattice term, so that no entry of the tensor vanishes.
#[test]
fn response_to_stress_is_the_finite_difference_of_the_full_sums() {
    let cell = PlaneCell {
        a: [21.0, 0.0],
        b: [4.0, 17.0],
    };
    let mut modes = BoxModes::within(cell, 1.1);
    let last = modes.weights.len() - 1;
    modes.weights[last] = 0.5;
    for tension in [0.0, 0.03] {
        let state = PlateState {
            lattice_term: 0.2,
            tension,
            ..boron_nitride(900.0)
        };
        let solver = BoxScsa::new(&modes);
        let solution = solver.solve(&state).expect("a solution");
        let ripples = solver.ripple_compliance(&solution).expect("a response");
        let step = 1e-5;
        for j in 0..3 {
            let moved = |step: f64| {
                let mut stress = [tension, tension, 0.0];
                stress[j] += step;
                hidden_strain(&modes, &state, stress)
            };
            let (up, down) = (moved(step), moved(-step));
            for i in 0..3 {
                let expected = -(up[i] - down[i]) / (2.0 * step);
                assert!(
                    (ripples[i][j] - expected).abs() < 1e-5 * ripples[0][0],
                    "S{i}{j} is {}, differences say {expected}",
                    ripples[i][j]
                );
            }
        }
    }
}

/// Where ripples hardly couple kappa does not respond, and the sum at fixed kappa, 1/(2 kB T A) sum_p p_i p_j p_k p_l G^2, is all.
#[test]
fn stiff_cold_plate_has_the_compliance_of_fixed_rigidity() {
    let modes = BoxModes::within(rectangle(40.0, 30.0), 1.0);
    let state = PlateState {
        youngs: 1e-7,
        ..boron_nitride(10.0)
    };
    let solver = BoxScsa::new(&modes);
    let solution = solver.solve(&state).expect("a solution");
    let ripples = solver.ripple_compliance(&solution).expect("a response");
    let area = modes.cell.area();
    let mut expected = [[0.0; 3]; 3];
    for (q, weight) in modes.wave_vectors().iter().zip(&modes.weights) {
        let strain = [q[0] * q[0], q[1] * q[1], 2.0 * q[0] * q[1]];
        let g = state.thermal_energy() / (state.kappa * (q[0] * q[0] + q[1] * q[1]).powi(2));
        for i in 0..3 {
            for j in 0..3 {
                expected[i][j] += weight * strain[i] * strain[j] * g * g / (state.thermal_energy() * area);
            }
        }
    }
    for i in 0..3 {
        for j in 0..3 {
            assert!(
                (ripples[i][j] - expected[i][j]).abs() < 1e-6 * expected[0][0],
                "S{i}{j}"
            );
        }
    }
    let box_compliance = solver.box_compliance(&solution, 0.3).expect("a response");
    let bare = PlaneModuli::from_youngs_and_poisson(state.youngs, 0.3).compliance();
    assert!((box_compliance[0][1] - bare[0][1] - ripples[0][1]).abs() < 1e-9 * bare[0][0]);
}
