//! The universal crossover of an infinite sheet: against an independent program, the exact exponents, and first order.

use planish::theory::InfiniteScsa;
use planish::theory::plate::SCSA_ETA;

/// (q/q_th, kappa/kappa0, Y/Y0) of a numpy solution by direct angular quadrature, written apart from planish for this project.
const NUMPY: [[f64; 3]; 17] = [
    [0.001, 341.424_39, 0.078_11],
    [0.003, 138.564_47, 0.115_78],
    [0.01, 51.580_34, 0.178_22],
    [0.03, 20.947_42, 0.264_08],
    [0.1, 7.843_29, 0.405_24],
    [0.2, 4.509_37, 0.515_47],
    [0.3, 3.302_25, 0.590_01],
    [0.5, 2.292_24, 0.691_02],
    [0.7, 1.851_48, 0.758_06],
    [1.0, 1.527_32, 0.824_49],
    [1.5, 1.289_98, 0.888_48],
    [2.0, 1.183_44, 0.923_72],
    [3.0, 1.092_31, 0.958_50],
    [5.0, 1.036_56, 0.982_60],
    [10.0, 1.009_68, 0.995_23],
    [30.0, 1.001_11, 0.999_45],
    [100.0, 1.000_10, 0.999_95],
];

fn solved() -> InfiniteScsa {
    InfiniteScsa::solve().expect("a solution")
}

/// The numpy program interpolates linearly on 24 points a decade, which is good for some tenths of a per cent.
#[test]
fn agrees_with_an_independent_program() {
    let crossover = solved();
    for [x, kappa, youngs] in NUMPY {
        let (found_kappa, found_youngs) = (crossover.kappa_ratio(x), crossover.youngs_ratio(x));
        assert!(
            (found_kappa / kappa - 1.0).abs() < 4e-3,
            "kappa({x}) is {found_kappa}, not {kappa}"
        );
        assert!(
            (found_youngs / youngs - 1.0).abs() < 4e-3,
            "Y({x}) is {found_youngs}, not {youngs}"
        );
    }
}

/// eta = 4/(1 + sqrt 15) and eta_u = 2 - 2 eta (Le Doussal and Radzihovsky, Phys. Rev. Lett. 69, 1209 (1992)), at points well
/// inside the table, where nothing of its continuation is seen.
#[test]
fn exponents_at_small_q_are_the_exact_ones() {
    let crossover = solved();
    let eta = 4.0 / (1.0 + 15.0_f64.sqrt());
    assert!((SCSA_ETA - eta).abs() < 1e-12);
    let slope = |of: &dyn Fn(f64) -> f64| (of(2e-3) / of(5e-4)).ln() / 4.0_f64.ln();
    let found = -slope(&|x| crossover.kappa_ratio(x));
    assert!((found - eta).abs() < 1e-3, "eta {found}");
    let found = slope(&|x| crossover.youngs_ratio(x));
    assert!((found - (2.0 - 2.0 * eta)).abs() < 1e-3, "eta_u {found}");
}

/// First order in Y: kappa/kappa0 = 1 + x^-2 and Y/Y0 = 1 - x^-2/2 (Nelson and Peliti, J. Phys. France 48, 1085 (1987)); the
/// correction itself to 1 % where the next order, of relative size x^-2, is below that.
#[test]
fn large_q_is_first_order() {
    let crossover = solved();
    for x in [20.0, 50.0, 200.0] {
        let kappa = (crossover.kappa_ratio(x) - 1.0) * x * x;
        let youngs = (1.0 - crossover.youngs_ratio(x)) * 2.0 * x * x;
        assert!(
            (kappa - 1.0).abs() < 0.01 + 1.5 / x / x * 4.0,
            "kappa at {x}: {kappa}"
        );
        assert!(
            (youngs - 1.0).abs() < 0.01 + 1.5 / x / x * 4.0,
            "Y at {x}: {youngs}"
        );
    }
}

/// Ripples alone have -1/3 (Le Doussal and Radzihovsky 1992); from a bare 0.17 the whole is -0.12, -0.24, -0.29 at 0.1, 0.01,
/// 0.001 q_th (independent quadrature over the numpy solution).
#[test]
fn poisson_ratio_goes_to_minus_one_third() {
    let crossover = solved();
    for (x, expected) in [(0.1, -0.12), (0.01, -0.24), (0.001, -0.29)] {
        let found = crossover.poisson_ratio(0.17, x);
        assert!((found - expected).abs() < 0.01, "at {x}: {found}");
    }
    let far = crossover.poisson_ratio(0.17, 1e-9);
    assert!((far + 1.0 / 3.0).abs() < 1e-3, "{far}");
}

/// Outside the table the laws go on without a step.
#[test]
fn the_ends_of_the_table_join_their_continuations() {
    let crossover = solved();
    for edge in [1e-5, 1e3] {
        let ratio = |of: &dyn Fn(f64) -> f64| of(edge * 1.001) / of(edge * 0.999) - 1.0;
        assert!(ratio(&|x| crossover.kappa_ratio(x)).abs() < 0.002 * 0.83);
        assert!(ratio(&|x| crossover.youngs_ratio(x)).abs() < 0.002 * 0.37);
    }
    assert!((crossover.kappa_ratio(1e9) - 1.0).abs() < 1e-9);
}
