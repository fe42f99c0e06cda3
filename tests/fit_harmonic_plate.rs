//! The harmonic plate's fit on spectra drawn from a harmonic plate under tension.

use planish::estimates::{RunEstimates, SheetEstimates};
use planish::fits::{Fit, FitOptions, Fitted, HarmonicPlate, PlateModel, Quantity, Verdict};
use planish::theory::plate::harmonic_power;
use planish::theory::{BoxModes, PlateState};
use planish::units::N_PER_M_PER_EV_PER_A2;

mod synthetic_run;
use synthetic_run::{Synthetic, boron_nitride_box, moments};

const OPTIONS: FitOptions = FitOptions {
    plate: PlateModel::Harmonic,
    window: None,
    wanted_error: 0.05,
};

fn truth(tension: f64) -> PlateState {
    PlateState {
        kappa: 1.2,
        youngs: 1.0,
        lattice_term: 0.3,
        tension: tension / N_PER_M_PER_EV_PER_A2,
        temperature: 300.0,
    }
}

fn draw(truth: &PlateState, slowest_samples: f64, seed: u64) -> RunEstimates {
    let (cell, zone) = boron_nitride_box();
    let modes = BoxModes::in_zone(cell, &zone);
    let power = |q: &[f64; 2]| {
        let q = q[0].hypot(q[1]);
        harmonic_power(
            cell.area(),
            truth.bare_kappa(q),
            truth.tension,
            truth.temperature,
            q,
        )
    };
    let power: Vec<f64> = modes.wave_vectors().iter().map(power).collect();
    let synthetic = Synthetic {
        temperature: truth.temperature,
        slowest_samples,
        seed,
    };
    synthetic.draw(&modes, &power)
}

fn fit(run: RunEstimates) -> Fitted {
    let sheet = SheetEstimates {
        name: "sheet".to_owned(),
        runs: vec![run],
    };
    HarmonicPlate.fit(&sheet, &OPTIONS)
}

fn named<'a>(fitted: &'a Fitted, name: &str) -> &'a Quantity {
    fitted
        .quantities
        .iter()
        .find(|quantity| quantity.name == name)
        .expect("the quantity")
}

/// Two hundred runs under tension and two hundred under slight compression: no bias, pulls of unit width.
#[test]
fn rigidity_lattice_term_and_tension_are_recovered_with_right_errors() {
    const RUNS: u32 = 200;
    for tension in [0.2, -0.1] {
        let truth = truth(tension);
        let mut pulls: [Vec<f64>; 3] = Default::default();
        for seed in 0..RUNS {
            let run = draw(&truth, 30.0, u64::from(seed));
            let smallest = run.spectrum.modes[0].length;
            let fitted = fit(run);
            let truths = [
                ("bending_rigidity", truth.bare_kappa(smallest)),
                ("lattice_term", truth.lattice_term),
                ("tension", tension),
            ];
            for (pulls, (name, truth)) in pulls.iter_mut().zip(truths) {
                let value = named(&fitted, name).value.expect("a value");
                pulls.push((value.value - truth) / value.error);
            }
        }
        for pulls in &pulls {
            let [mean, width] = moments(pulls);
            assert!(
                mean.abs() < 3.0 / f64::from(RUNS).sqrt() + 0.1,
                "mean pull {mean}"
            );
            assert!((0.8..1.15).contains(&width), "width of pulls {width}");
        }
    }
}

#[test]
fn one_run_gives_units_conditions_and_covariance() {
    let fitted = fit(draw(&truth(0.2), 60.0, 1));
    let tension = named(&fitted, "tension");
    assert_eq!((tension.unit, tension.verdict), ("N/m", Verdict::Good));
    assert!(
        named(&fitted, "bending_rigidity")
            .condition
            .length
            .is_some_and(|length| (length - 52.45).abs() < 0.1)
    );
    let covariance = &fitted.covariances[0];
    assert_eq!(covariance.names, ["bending_rigidity", "lattice_term", "tension"]);
    for (index, name) in covariance.names.iter().enumerate() {
        let error = named(&fitted, name).value.expect("a value").error;
        assert!(
            (covariance.matrix[[index, index]].sqrt() / error - 1.0).abs() < 1e-9,
            "{name}"
        );
    }
    // Rigidity and tension trade against each other.
    assert!(covariance.matrix[[0, 2]] < 0.0);
}

#[test]
fn too_few_frames_give_no_number() {
    let mut run = draw(&truth(0.0), 60.0, 1);
    run.frames = 12;
    let fitted = fit(run);
    assert!(
        fitted
            .quantities
            .iter()
            .all(|q| q.value.is_none() && q.verdict == Verdict::Unusable)
    );
    assert!(fitted.plate_curves.is_empty());
}
