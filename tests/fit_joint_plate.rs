//! The joint fit on heights drawn from the box SCSA and strains drawn from the box's compliance: what went in comes out with
//! errors that are right, and runs that cannot take part do not.

use nalgebra::Matrix2;
use planish::estimates::{RunEstimates, SheetEstimates, Tension};
use planish::fits::{Fit, FitOptions, Fitted, JointPlateFit, PlateModel, Quantity, Verdict};
use planish::theory::{BoxModes, BoxScsa, PlateState};
use planish::units::N_PER_M_PER_EV_PER_A2;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::SeedableRng;

mod synthetic_run;
use synthetic_run::{Synthetic, boron_nitride_box, moments};

const KAPPA: f64 = 0.878;
const YOUNGS: f64 = 250.2;
const POISSON: f64 = 0.311;
const LATTICE_TERM: f64 = 0.25;

/// Change of kappa (eV/K) and Y (N/m/K).
const SLOPES: [f64; 2] = [-1e-4, -0.03];

fn options() -> FitOptions {
    FitOptions {
        plate: PlateModel::Rippled,
        window: None,
        wanted_error: 0.05,
    }
}

/// A run at `temperature` in a cell whose shear is clamped, as many barostats do, or all of it.
fn draw(temperature: f64, fixed: bool, seed: u64) -> RunEstimates {
    draw_in(1.0, temperature, fixed, seed)
}

/// The same in a box `size` times as long.
fn draw_in(size: f64, temperature: f64, fixed: bool, seed: u64) -> RunEstimates {
    const STRAIN_SAMPLES: usize = 150;
    let (mut cell, zone) = boron_nitride_box();
    for vector in [&mut cell.a, &mut cell.b] {
        *vector = vector.map(|component| size * component);
    }
    let modes = BoxModes::in_zone(cell, &zone);
    let state = PlateState {
        kappa: KAPPA + SLOPES[0] * temperature,
        youngs: (YOUNGS + SLOPES[1] * temperature) / N_PER_M_PER_EV_PER_A2,
        lattice_term: LATTICE_TERM,
        tension: 0.0,
        temperature,
    };
    let solver = BoxScsa::new(&modes);
    let clamped = [fixed, fixed, true];
    let solution = solver
        .solve_clamped(&state, clamped, POISSON, None)
        .expect("a solution");
    let synthetic = Synthetic {
        temperature,
        slowest_samples: 40.0,
        seed,
    };
    let mut run = synthetic.draw(&modes, &solution.power);
    run.name = format!("{temperature}K{}", if fixed { "-fixed" } else { "" });
    if fixed {
        run.strain.free = [false; 3];
        return run;
    }
    let compliance = solver.box_compliance(&solution, POISSON).expect("a compliance");
    let scale = state.thermal_energy() / cell.area();
    let covariance = Matrix2::from_fn(|i, j| scale * compliance[i][j]);
    let lower = covariance.cholesky().expect("positive definite").l();
    let mut generator = Xoshiro256PlusPlus::seed_from_u64(1_000_000 + seed);
    let mut sample = Matrix2::zeros();
    for _ in 0..STRAIN_SAMPLES - 1 {
        let normal = nalgebra::Vector2::from_fn(|_, _| StandardNormal.sample(&mut generator));
        let strain = lower * normal;
        sample += strain * strain.transpose() / (STRAIN_SAMPLES - 1) as f64;
    }
    for i in 0..2 {
        for j in 0..2 {
            run.strain.covariance[i][j] = sample[(i, j)];
        }
    }
    run.strain.effective_samples = [[STRAIN_SAMPLES as f64; 3]; 3];
    run
}

fn fit(runs: Vec<RunEstimates>) -> Fitted {
    let sheet = SheetEstimates {
        name: "sheet".to_owned(),
        runs,
    };
    JointPlateFit.fit(&sheet, &options())
}

fn named<'a>(fitted: &'a Fitted, name: &str) -> &'a Quantity {
    let of_name = |quantity: &&Quantity| quantity.name == name;
    fitted.quantities.iter().find(of_name).expect("the quantity")
}

const NAMES: [&str; 6] = [
    "bending_rigidity_bare",
    "bending_rigidity_bare_slope",
    "youngs_modulus_bare",
    "youngs_modulus_bare_slope",
    "lattice_term",
    "poisson_ratio_bare",
];

/// Twenty-four sheets of three temperatures, one of them with a fixed twin: no bias beyond three errors of the mean, pulls of unit
/// width within the errors of the draws, and intervals that hold the truth. The larger of two variances is taken, so that pulls come out a
/// little narrow.
#[test]
fn parameters_are_recovered_with_right_errors() {
    const SHEETS: u64 = 24;
    let truths = [KAPPA, SLOPES[0], YOUNGS, SLOPES[1], LATTICE_TERM, POISSON];
    let mut pulls: [Vec<f64>; 6] = Default::default();
    for sheet in 0..SHEETS {
        let fitted = fit(vec![
            draw(300.0, false, 10 * sheet),
            draw(600.0, false, 10 * sheet + 1),
            draw(900.0, false, 10 * sheet + 2),
            draw(600.0, true, 10 * sheet + 3),
        ]);
        for ((name, truth), pulls) in NAMES.iter().zip(truths).zip(&mut pulls) {
            let quantity = named(&fitted, name);
            let value = quantity
                .value
                .unwrap_or_else(|| panic!("{name}: {}", quantity.note));
            pulls.push((value.value - truth) / value.error);
        }
    }
    for (name, pulls) in NAMES.iter().zip(&pulls) {
        let [mean, width] = moments(pulls);
        let covered = pulls.iter().filter(|pull| pull.abs() < 1.96).count();
        assert!(
            mean.abs() < 3.0 / (SHEETS as f64).sqrt() + 0.1,
            "{name}: mean pull {mean}"
        );
        assert!((0.6..1.4).contains(&width), "{name}: width of pulls {width}");
        assert!(
            covered >= 20,
            "{name}: {covered} of {SHEETS} intervals hold the truth"
        );
    }
}

#[test]
fn covariance_holds_the_errors_and_the_runs_are_told() {
    let fitted = fit(vec![
        draw(300.0, false, 1),
        draw(600.0, false, 2),
        draw(900.0, false, 3),
    ]);
    let covariance = &fitted.covariances[0];
    assert_eq!(covariance.run, None);
    assert_eq!(covariance.names, NAMES);
    for (index, name) in NAMES.iter().enumerate() {
        let quantity = named(&fitted, name);
        assert_eq!(quantity.condition.run, None);
        assert_eq!(quantity.condition.tension, Some(0.0));
        assert_eq!(quantity.verdict, Verdict::Good, "{quantity:?}");
        let error = quantity.value.expect("a value").error;
        assert!(
            (covariance.matrix[[index, index]].sqrt() / error - 1.0).abs() < 1e-9,
            "{name}"
        );
    }
    // A plate that softens more is stiffer at 0 K.
    assert!(covariance.matrix[[0, 1]] < 0.0);
    let lengths: Vec<_> = fitted
        .quantities
        .iter()
        .filter(|quantity| quantity.name == "thermal_length")
        .collect();
    assert_eq!(lengths.len(), 3);
    assert!(lengths[0].condition.temperature == Some(300.0));
    assert!(named(&fitted, "youngs_modulus_bare").method.contains("3 cells"));
}

/// A run of a box twice as long joins a ladder of temperatures: the plate stays where it was within two errors of the change,
/// sqrt(before^2 - after^2), and is known better.
#[test]
fn larger_box_joins_consistently() {
    let ladder = || {
        vec![
            draw(300.0, false, 31),
            draw(600.0, false, 32),
            draw(900.0, false, 33),
        ]
    };
    let before = fit(ladder());
    let mut runs = ladder();
    runs.push(draw_in(2.0, 600.0, false, 34));
    let after = fit(runs);
    for name in ["bending_rigidity_bare", "youngs_modulus_bare"] {
        let value = |fitted: &Fitted| named(fitted, name).value.expect("a value");
        let (before, after) = (value(&before), value(&after));
        assert!(after.error < before.error, "{name}: {before:?}, then {after:?}");
        let allowed = 2.0 * (before.error.powi(2) - after.error.powi(2)).sqrt();
        assert!(
            (after.value - before.value).abs() < allowed,
            "{name}: {before:?}, then {after:?}"
        );
    }
}

/// Cells bring what heights at one cold temperature cannot: without them Y is several times less certain.
#[test]
fn cells_sharpen_the_youngs_modulus() {
    let error = |runs: Vec<RunEstimates>| {
        let fitted = fit(runs);
        let value = named(&fitted, "youngs_modulus_bare").value.expect("a value");
        value.error / value.value
    };
    let runs = || vec![draw(300.0, false, 21), draw(300.0, false, 22)];
    let mut heights_only = runs();
    for run in &mut heights_only {
        run.strain.effective_samples = [[3.0; 3]; 3];
    }
    let (with, without) = (error(runs()), error(heights_only));
    assert!(with < 0.7 * without, "{with} with cells, {without} without");
}

#[test]
fn what_cannot_take_part_is_left_out_with_a_note() {
    let mut unknown = draw(300.0, true, 5);
    unknown.tension = Tension::Assumed;
    let mut short = draw(900.0, false, 6);
    short.frames = 10;
    let fitted = fit(vec![
        draw(300.0, false, 1),
        draw(600.0, false, 2),
        unknown.clone(),
        short,
    ]);
    let rigidity = named(&fitted, "bending_rigidity_bare");
    assert!(rigidity.value.is_some(), "{rigidity:?}");
    for reason in ["tension is unknown", "10 frames", "held fixed over temperature"] {
        assert!(rigidity.note.contains(reason), "{}", rigidity.note);
    }
    let alone = fit(vec![draw(300.0, false, 1), unknown]);
    let rigidity = named(&alone, "bending_rigidity_bare");
    assert!(rigidity.value.is_none() && rigidity.verdict == Verdict::Unusable);
    assert!(rigidity.note.contains("fewer than two runs"), "{}", rigidity.note);
    assert!(fit(vec![draw(300.0, false, 1)]).quantities.is_empty());
}

/// A cell that fluctuates far more than the plate allows is noticed.
#[test]
fn cells_that_disagree_with_the_heights_make_the_values_weak() {
    // At one temperature, so that no slope can take it up.
    let mut runs = vec![
        draw(300.0, false, 1),
        draw(300.0, false, 2),
        draw(300.0, false, 3),
    ];
    for entry in runs[0].strain.covariance.iter_mut().flatten() {
        *entry *= 2.5;
    }
    let fitted = fit(runs);
    let youngs = named(&fitted, "youngs_modulus_bare");
    assert_eq!(youngs.verdict, Verdict::Weak);
    assert!(youngs.note.contains("cells do not fluctuate"), "{}", youngs.note);
}
