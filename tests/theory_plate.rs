//! The plate's closed formulas: textbook identities, published and tabulated numbers, first order, the crossover.

use std::f64::consts::PI;

use planish::theory::plate::{
    SCSA_ETA, crossover_tension, foppl_von_karman, harmonic_power, rigidity_of_power, thermal_length,
    thermal_wave_vector,
};
use planish::theory::{PlaneModuli, PlateState, one_loop};
use planish::units::N_PER_M_PER_EV_PER_A2;

const GRAPHENE_YOUNGS: f64 = 340.0 / N_PER_M_PER_EV_PER_A2;

fn within(found: f64, expected: f64, tolerance: f64) {
    assert!(
        (found / expected - 1.0).abs() < tolerance,
        "{found} is not {expected}"
    );
}

/// 1.1 eV, 340 N/m, 300 K: q_th = 0.16 /A and pi/q_th = 19 A; kB T/kappa Y by hand.
#[test]
fn graphene_scales() {
    within(thermal_wave_vector(1.1, GRAPHENE_YOUNGS, 300.0), 0.16, 0.05);
    within(thermal_length(1.1, GRAPHENE_YOUNGS, 300.0), 19.0, 0.05);
    within(
        crossover_tension(1.1, GRAPHENE_YOUNGS, 300.0) * N_PER_M_PER_EV_PER_A2,
        0.025_852 * 340.0 / 1.1,
        1e-4,
    );
    within(
        foppl_von_karman(1.1, GRAPHENE_YOUNGS, 1e5),
        GRAPHENE_YOUNGS * 1e10 / 1.1,
        1e-12,
    );
}

/// The 0 K table of a boron nitride sheet (Tersoff potential of Kinaci et al. 2012, computed by finite differences): C11 277.0, C12
/// 86.2 N/m give Y 250.2 N/m and nu 0.311.
#[test]
fn moduli_of_a_tabulated_sheet() {
    let moduli = PlaneModuli {
        lambda: 86.2,
        mu: 0.5 * (277.0 - 86.2),
    };
    within(moduli.youngs(), 250.2, 5e-4);
    within(moduli.poisson(), 0.311, 2e-3);
    within(moduli.bulk(), 0.5 * (277.0 + 86.2), 1e-12);
    let back = PlaneModuli::from_youngs_and_poisson(moduli.youngs(), moduli.poisson());
    within(back.lambda, moduli.lambda, 1e-12);
    within(back.mu, moduli.mu, 1e-12);
    assert_eq!(back.stiffness()[0][1], back.lambda);
    within(back.stiffness()[0][0], 277.0, 1e-12);
}

/// Equipartition: A (kappa q^4 + sigma q^2) <|h_q|^2> = kB T for each mode.
#[test]
fn harmonic_power_is_equipartition() {
    let power = harmonic_power(2700.0, 1.1, 0.02, 300.0, 0.2);
    within(
        2700.0 * (1.1 * 0.2_f64.powi(4) + 0.02 * 0.04) * power,
        0.025_852,
        1e-4,
    );
    within(rigidity_of_power(2700.0, power, 0.02, 300.0, 0.2), 1.1, 1e-12);
}

#[test]
fn lattice_term_softens_down_to_half() {
    let state = PlateState {
        kappa: 2.0,
        youngs: 10.0,
        lattice_term: 0.3,
        tension: 0.0,
        temperature: 300.0,
    };
    within(state.bare_kappa(1.0), 1.4, 1e-12);
    assert_eq!(state.bare_kappa(5.0), 1.0);
}

/// In units kappa = 1, q_th = 1: 1 + 1/q^2 and 1 - 1/(2 q^2); and the closed form against `kappa/kappa0` of an independent numpy
/// solution of the infinite sheet's SCSA (kappa 3 % high is part of that closed form's agreement, so 5 %).
#[test]
fn first_order_and_crossover_in_reduced_units() {
    let state = PlateState {
        kappa: 1.0,
        youngs: 16.0 * PI / 3.0,
        lattice_term: 0.0,
        tension: 0.0,
        temperature: 1.0 / 8.617_333_262e-5,
    };
    within(state.thermal_wave_vector(), 1.0, 1e-12);
    within(one_loop::infinite_kappa(&state, 3.0), 1.0 + 1.0 / 9.0, 1e-12);
    within(
        one_loop::infinite_youngs(&state, 3.0) / state.youngs,
        1.0 - 1.0 / 18.0,
        1e-12,
    );
    let solution = [
        (0.03, 20.947_42),
        (0.1, 7.843_29),
        (0.3, 3.302_25),
        (1.0, 1.527_32),
        (3.0, 1.092_31),
    ];
    for (q, kappa) in solution.into_iter().chain([(10.0, 1.009_68)]) {
        within(state.crossover_kappa(q), kappa, 0.06);
    }
    within(SCSA_ETA, 4.0 / (1.0 + 15.0_f64.sqrt()), 1e-8);
}
