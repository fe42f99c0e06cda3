//! The rippled plate's fit on spectra drawn from the box SCSA: what went in comes out, with errors that are right, and data that
//! cannot carry a number do not get one.

use planish::estimates::{RunEstimates, SheetEstimates, Tension};
use planish::fits::{Fit, FitOptions, Fitted, PlateModel, Quantity, RippledPlate, Verdict};
use planish::theory::plate::thermal_length;
use planish::theory::{BoxModes, PlateState, box_scsa};
use planish::units::N_PER_M_PER_EV_PER_A2;

mod synthetic_run;
use synthetic_run::{Synthetic, boron_nitride_box, moments};

const TRUTH: PlateState = PlateState {
    kappa: 0.878,
    youngs: 250.2 / N_PER_M_PER_EV_PER_A2,
    lattice_term: 0.25,
    tension: 0.0,
    temperature: 300.0,
};

fn options() -> FitOptions {
    FitOptions {
        plate: PlateModel::Rippled,
        window: None,
        wanted_error: 0.05,
    }
}

fn draw(truth: &PlateState, slowest_samples: f64, seed: u64) -> (RunEstimates, f64) {
    let (cell, zone) = boron_nitride_box();
    let modes = BoxModes::in_zone(cell, &zone);
    let solution = box_scsa::solve(&modes, truth).expect("a solution");
    let synthetic = Synthetic {
        temperature: truth.temperature,
        slowest_samples,
        seed,
    };
    let run = synthetic.draw(&modes, &solution.power);
    let smallest = run.spectrum.modes[0].integers;
    let mode = modes
        .integers
        .iter()
        .position(|&m| m == smallest)
        .expect("the mode");
    (run, solution.kappa[mode])
}

fn fit(run: RunEstimates, options: &FitOptions) -> Fitted {
    let sheet = SheetEstimates {
        name: "sheet".to_owned(),
        runs: vec![run],
    };
    RippledPlate.fit(&sheet, options)
}

fn named<'a>(fitted: &'a Fitted, name: &str) -> &'a Quantity {
    fitted
        .quantities
        .iter()
        .find(|quantity| quantity.name == name)
        .expect("the quantity")
}

/// Sixty runs of 900 K, where heights carry Y: no bias beyond three errors of the mean (and one per cent), pulls of unit width
/// within the errors of sixty draws. The larger of two variances is taken, so that pulls come out a little narrow.
#[test]
fn parameters_are_recovered_with_right_errors() {
    const RUNS: u32 = 60;
    let truth = PlateState {
        temperature: 900.0,
        ..TRUTH
    };
    let mut pulls: [Vec<f64>; 4] = Default::default();
    let mut covered = [0; 4];
    for seed in 0..RUNS {
        let (run, rigidity) = draw(&truth, 40.0, u64::from(seed));
        let fitted = fit(run, &options());
        let truths = [
            ("bending_rigidity", rigidity),
            ("bending_rigidity_bare", truth.kappa),
            ("youngs_modulus_bare", truth.youngs * N_PER_M_PER_EV_PER_A2),
            ("lattice_term", truth.lattice_term),
        ];
        for (index, (name, truth)) in truths.into_iter().enumerate() {
            let quantity = named(&fitted, name);
            let value = quantity
                .value
                .unwrap_or_else(|| panic!("{name}: {}", quantity.note));
            let pull = if name == "lattice_term" {
                (value.value - truth) / value.error
            } else {
                (value.value / truth).ln() * value.value / value.error
            };
            pulls[index].push(pull);
            covered[index] += i32::from(value.interval95[0] <= truth && truth <= value.interval95[1]);
        }
    }
    for (pulls, covered) in pulls.iter().zip(covered) {
        let [mean, width] = moments(pulls);
        assert!(
            mean.abs() < 3.0 / f64::from(RUNS).sqrt() + 0.1,
            "mean pull {mean}"
        );
        assert!((0.7..1.25).contains(&width), "width of pulls {width}");
        assert!(covered >= 52, "{covered} of {RUNS} intervals hold the truth");
    }
}

#[test]
fn one_good_run_gives_every_quantity_of_the_plate() {
    let (run, _) = draw(&TRUTH, 60.0, 7);
    let area = run.area.value;
    let smallest = run.spectrum.modes[0].length;
    let fitted = fit(run, &options());
    let rigidity = named(&fitted, "bending_rigidity");
    assert_eq!(rigidity.verdict, Verdict::Good, "{}", rigidity.note);
    assert_eq!(rigidity.unit, "eV");
    assert!(
        rigidity.method.starts_with("height-spectrum"),
        "{}",
        rigidity.method
    );
    assert!(
        (rigidity.condition.length.expect("a length") * smallest / std::f64::consts::TAU - 1.0).abs() < 1e-12
    );
    assert_eq!(rigidity.condition.tension, Some(0.0));
    let number = |name: &str| named(&fitted, name).value.expect("a value").value;
    let (kappa, youngs) = (number("bending_rigidity_bare"), number("youngs_modulus_bare"));
    let length = thermal_length(kappa, youngs / N_PER_M_PER_EV_PER_A2, 300.0);
    assert!((number("thermal_length") / length - 1.0).abs() < 1e-9);
    let stretch = youngs / N_PER_M_PER_EV_PER_A2 / kappa;
    assert!((number("foppl_von_karman") / (stretch * area) - 1.0).abs() < 1e-9);
    assert!((number("crossover_tension") / (8.617_333_262e-5 * 300.0 * youngs / kappa) - 1.0).abs() < 1e-9);
    let covariance = &fitted.covariances[0];
    assert_eq!(
        covariance.names,
        ["bending_rigidity_bare", "youngs_modulus_bare", "lattice_term"]
    );
    for (index, name) in covariance.names.iter().enumerate() {
        let error = named(&fitted, name).value.expect("a value").error;
        assert!(
            (covariance.matrix[[index, index]].sqrt() / error - 1.0).abs() < 1e-9,
            "{name}"
        );
    }
    let curve = &fitted.plate_curves[0];
    assert!((curve.kappa[0] / number("bending_rigidity") - 1.0).abs() < 0.02);
    assert!((curve.q[0] - smallest).abs() < 0.01 * smallest && curve.window[1] > 0.4);
}

/// At 0.1 K nothing ripples: heights tell nothing of Y, and kappa is right all the same.
#[test]
fn heights_without_ripples_give_kappa_and_no_youngs_modulus() {
    let truth = PlateState {
        temperature: 0.1,
        ..TRUTH
    };
    let (mut kept, mut missed) = (0, 0);
    for seed in 0..12 {
        let (run, rigidity) = draw(&truth, 60.0, seed);
        let fitted = fit(run, &options());
        let quantity = named(&fitted, "bending_rigidity");
        let value = quantity.value.expect("a value");
        assert!(
            value.error < 0.1 * rigidity && quantity.verdict == Verdict::Good,
            "{quantity:?}"
        );
        missed += i32::from(!(value.interval95[0]..=value.interval95[1]).contains(&rigidity));
        let youngs = named(&fitted, "youngs_modulus_bare");
        assert_eq!(youngs.value.is_none(), youngs.verdict == Verdict::Unusable);
        kept += i32::from(youngs.value.is_some());
    }
    // Noise of two standard errors is rare, not impossible.
    assert!(
        kept <= 2,
        "{kept} of 12 runs without ripples have a Young's modulus"
    );
    assert!(missed <= 2, "{missed} of 12 intervals miss the rigidity");
}

#[test]
fn fixed_cell_is_weak_and_gives_no_bare_parameters() {
    let (mut run, _) = draw(&TRUTH, 60.0, 7);
    run.strain.free = [false; 3];
    let fitted = fit(run, &options());
    let rigidity = named(&fitted, "bending_rigidity");
    assert_eq!(rigidity.verdict, Verdict::Weak);
    assert!(
        rigidity.value.is_some() && rigidity.note.contains("clamped"),
        "{}",
        rigidity.note
    );
    for name in [
        "bending_rigidity_bare",
        "youngs_modulus_bare",
        "lattice_term",
        "thermal_length",
    ] {
        let quantity = named(&fitted, name);
        assert!(
            quantity.value.is_none() && quantity.verdict == Verdict::Unusable,
            "{quantity:?}"
        );
    }
    assert!(fitted.covariances.is_empty());
}

#[test]
fn reservations_and_few_samples_lower_the_verdict() {
    let (mut run, _) = draw(&TRUTH, 60.0, 7);
    run.reservations.push("sites hop".to_owned());
    let fitted = fit(run, &options());
    let rigidity = named(&fitted, "bending_rigidity");
    assert_eq!(rigidity.verdict, Verdict::Weak);
    assert!(rigidity.note.contains("sites hop"));
    for (samples, verdict) in [(10.0, Verdict::Weak), (3.0, Verdict::Unusable)] {
        let (run, _) = draw(&TRUTH, samples, 11);
        let fitted = fit(run, &options());
        let rigidity = named(&fitted, "bending_rigidity");
        assert_eq!(rigidity.verdict, verdict, "{}", rigidity.note);
        assert_eq!(rigidity.value.is_none(), verdict == Verdict::Unusable);
        assert!(rigidity.note.contains("times as long"), "{}", rigidity.note);
    }
}

/// A measured tension's error widens the rigidity by what refits at the tension moved either way say.
#[test]
fn measured_tension_carries_its_error() {
    let with = |tension: Tension| {
        let (mut run, _) = draw(&TRUTH, 60.0, 7);
        run.tension = tension;
        let fitted = fit(
            run,
            &FitOptions {
                window: Some([0.0, 0.8]),
                ..options()
            },
        );
        named(&fitted, "bending_rigidity").value.expect("a value")
    };
    let error = 0.002;
    let plain = with(Tension::Stated(0.0));
    let measured = with(Tension::Measured { value: 0.0, error });
    let step = 0.1 * error;
    let shift =
        (with(Tension::Stated(step)).value - with(Tension::Stated(-step)).value) / (2.0 * step) * error;
    let expected = plain.error.hypot(shift);
    assert!(
        shift.abs() > 0.2 * plain.error,
        "the tension matters here: {shift}"
    );
    assert!(
        (measured.error / expected - 1.0).abs() < 0.1,
        "{} is not {expected}",
        measured.error
    );
    assert_eq!(plain.value, measured.value);
}

/// A stated window is kept; a model that fails beyond some q ends the chosen one before it.
#[test]
fn window_is_the_stated_one_or_ends_where_the_plate_does() {
    let stated = FitOptions {
        window: Some([0.2, 0.7]),
        ..options()
    };
    let (run, _) = draw(&TRUTH, 60.0, 5);
    let fitted = fit(run.clone(), &stated);
    let [first, last] = fitted.plate_curves[0].window;
    assert!(
        (0.2..0.24).contains(&first) && (0.67..=0.7).contains(&last),
        "{first} {last}"
    );
    let mut kinked = run;
    for mode in 0..kinked.spectrum.modes.len() {
        if kinked.spectrum.modes[mode].length > 0.6 {
            kinked.spectrum.modes[mode].power *= 1.5;
        }
    }
    let fitted = fit(kinked, &options());
    assert!(
        fitted.plate_curves[0].window[1] < 0.68,
        "{:?}",
        fitted.plate_curves[0].window
    );
}

#[test]
fn nothing_is_fitted_unless_asked_for() {
    let (run, _) = draw(&TRUTH, 60.0, 5);
    let harmonic = FitOptions {
        plate: PlateModel::Harmonic,
        ..options()
    };
    assert_eq!(fit(run, &harmonic), Fitted::default());
}
