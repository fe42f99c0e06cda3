//! The demo's joint fits: molecular dynamics of boron nitride under two potentials against what the same potentials give without
//! temperature. What belongs here: checks of the whole chain, trajectories to bare plate, against static values.

use std::path::PathBuf;

use planish::estimates::{RunEstimates, RunFacts, SheetEstimates, Tension};
use planish::fits::{Fit, FitOptions, Fitted, JointPlateFit, Quantity, Verdict};
use planish::pipeline::{MeasureOptions, Plan, Progress, RunLabel, SheetPlan, measure_run};
use planish::theory::{BoxModes, BoxScsa, PlateState};
use planish::units::{BOLTZMANN_EV_PER_K, N_PER_M_PER_EV_PER_A2};
use statrs::distribution::{ChiSquared, ContinuousCDF, Gamma, Normal};

/// kappa (eV), Y (N/m) and Poisson's ratio of each potential at 0 K, from the engine's energies of deformed flat sheets
/// (demo-trajectories/README.md), and b (A^2), with which kappa (1 - b q^2) passes through its table of kappa(q).
const STATIC: [(&str, [f64; 4]); 2] = [
    ("hbn-a", [0.878, 250.2, 0.311, 0.25]),
    ("hbn-b", [0.631, 269.1, 0.179, 0.25]),
];

/// Mean of the thermo series of the run in a fixed cell, -0.014 +- 0.006 N/m (demo-trajectories/README.md), in eV/A^2.
const FIXED_CELL_TENSION: Tension = Tension::Measured {
    value: -0.014 / N_PER_M_PER_EV_PER_A2,
    error: 0.006 / N_PER_M_PER_EV_PER_A2,
};

struct Unwatched;

impl Progress for Unwatched {
    fn run_started(&self, _sheet: &str, _run: &str, _frames: usize) {}
    fn frames_done(&self, _frames: usize, _atoms: usize) {}
    fn run_finished(&self) {}
    fn warning(&self, _message: &str) {}
    fn note(&self, _message: &str) {}
}

/// A run's estimates and its frames' spacing in ps.
struct Measured {
    estimates: RunEstimates,
    interval: f64,
}

/// Sheets of one of the shipped pipelines, each with its name.
fn demo(pipeline: &str) -> (Vec<(String, Vec<Measured>)>, FitOptions) {
    let file = PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("pipelines")
        .join(pipeline);
    let plan = Plan::load(&file).expect("the demo's pipeline is right");
    let options = MeasureOptions {
        positions: plan.project.positions,
        q_max: plan.spectrum.q_max,
        block_frames: plan.spectrum.block_frames,
    };
    let measured = plan
        .sheets
        .iter()
        .map(|sheet| (sheet.name.clone(), measured(sheet, &options)));
    (measured.collect(), plan.fit.clone())
}

fn measured(sheet: &SheetPlan, options: &MeasureOptions) -> Vec<Measured> {
    let runs = sheet.runs.iter().map(|run| {
        let label = RunLabel {
            sheet: &sheet.name,
            run: &run.name,
        };
        let measured =
            measure_run(label, &run.input, options, 2, &Unwatched).expect("the demo's run is right");
        let facts = RunFacts {
            name: run.name.clone(),
            temperature: run.temperature,
            tension: run.tension.map_or(FIXED_CELL_TENSION, Tension::Stated),
            atoms: measured.facts.atoms,
            mass: measured.facts.mass,
            reservations: Vec::new(),
        };
        Measured {
            estimates: RunEstimates::from_history(&measured.history, facts).expect("long enough"),
            interval: measured.history.frame_interval_ps.expect("times"),
        }
    });
    runs.collect()
}

fn named<'a>(fitted: &'a Fitted, name: &str) -> &'a Quantity {
    let of_name = |quantity: &&Quantity| quantity.name == name && quantity.condition.temperature.is_none();
    fitted.quantities.iter().find(of_name).expect("the quantity")
}

/// The joint bare kappa within 6 % and Y within 15 % of the static values, or two of their own standard errors, which are at most 4
/// and 12 %.
#[test]
fn joint_bare_plate_is_that_of_the_potential_at_rest() {
    let (sheets, options) = demo("drumhead.toml");
    for ((name, runs), (expected_name, [kappa, youngs, poisson, _])) in sheets.into_iter().zip(STATIC) {
        assert_eq!(name, expected_name);
        let sheet = SheetEstimates {
            name: name.clone(),
            runs: runs.into_iter().map(|run| run.estimates).collect(),
        };
        let fitted = JointPlateFit.fit(&sheet, &options);
        for (quantity, truth, share, largest_error) in [
            ("bending_rigidity_bare", kappa, 0.06, 0.04),
            ("youngs_modulus_bare", youngs, 0.15, 0.12),
        ] {
            let quantity = named(&fitted, quantity);
            let value = quantity
                .value
                .unwrap_or_else(|| panic!("{name}: {}", quantity.note));
            let allowed = (share * truth).max(2.0 * value.error);
            assert!(
                (value.value - truth).abs() < allowed,
                "{name}: {quantity:?}, {truth} at 0 K"
            );
            assert!(value.error < largest_error * truth, "{name}: {quantity:?}");
            assert_eq!(quantity.verdict, Verdict::Good, "{name}: {quantity:?}");
        }
        let ratio = named(&fitted, "poisson_ratio_bare").value.expect("a value");
        assert!(
            (ratio.value - poisson).abs() < 3.0 * ratio.error,
            "{name}: {ratio:?}"
        );
    }
}

/// The same sheet at 300 K once free and once fixed: one bare plate passes through both, and it is the potential's. With the clamp
/// ignored the fixed cell reads stiffer, and pulls the plate's Y up.
#[test]
fn free_and_fixed_cell_have_one_bare_plate() {
    let (sheets, options) = demo("fixed-cell.toml");
    let (name, runs) = sheets.into_iter().next().expect("a sheet");
    let mut sheet = SheetEstimates {
        name,
        runs: runs.into_iter().map(|run| run.estimates).collect(),
    };
    let [kappa, youngs, ..] = STATIC[0].1;
    let clamped = JointPlateFit.fit(&sheet, &options);
    let value = |fitted: &Fitted, name: &str| named(fitted, name).value.expect("a value");
    let (rigidity, modulus) = (
        value(&clamped, "bending_rigidity_bare"),
        value(&clamped, "youngs_modulus_bare"),
    );
    assert!(
        (rigidity.value - kappa).abs() < (0.06 * kappa).max(2.0 * rigidity.error),
        "{rigidity:?}"
    );
    assert!(
        (modulus.value - youngs).abs() < (0.15 * youngs).max(2.0 * modulus.error),
        "{modulus:?}"
    );
    assert_eq!(named(&clamped, "youngs_modulus_bare").verdict, Verdict::Good);
    let fixed = &mut sheet.runs[1].strain;
    assert_eq!(fixed.free, [false; 3]);
    // Said to be free, with a cell that tells nothing.
    fixed.free = [true, true, false];
    fixed.effective_samples = [[1.0; 3]; 3];
    let ignored = value(&JointPlateFit.fit(&sheet, &options), "youngs_modulus_bare");
    assert!(
        ignored.value > modulus.value,
        "{ignored:?} with the clamp ignored, {modulus:?} with it"
    );
}

/// A run in a fixed cell and its free twin, each on its own in two halves, have the same bare plate within two combined errors.
#[test]
fn fixed_cell_alone_has_the_bare_plate_of_its_free_twin() {
    let file = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("pipelines/fixed-cell.toml");
    let plan = Plan::load(&file).expect("the pipeline is right");
    let options = MeasureOptions {
        positions: plan.project.positions,
        q_max: plan.spectrum.q_max,
        block_frames: plan.spectrum.block_frames,
    };
    let [free, fixed] = [(0, 60.0), (1, 120.0)].map(|(index, middle)| {
        let mut halves = plan.sheets[0].clone();
        halves.runs = vec![halves.runs[index].clone(), halves.runs[index].clone()];
        halves.runs[0].input.to = Some(middle);
        halves.runs[1].input.from = Some(middle + 0.2);
        let sheet = SheetEstimates {
            name: halves.name.clone(),
            runs: measured(&halves, &options)
                .into_iter()
                .map(|run| run.estimates)
                .collect(),
        };
        assert_eq!(sheet.runs[0].cell_is_fixed(), index == 1);
        JointPlateFit.fit(&sheet, &plan.fit)
    });
    for name in ["bending_rigidity_bare", "youngs_modulus_bare"] {
        let value = |fitted: &Fitted| named(fitted, name).value.expect("a value");
        let (free, fixed) = (value(&free), value(&fixed));
        let combined = free.error.hypot(fixed.error);
        assert!(
            (free.value - fixed.value).abs() < 2.0 * combined,
            "{name}: {free:?}, {fixed:?}"
        );
    }
    assert!(
        named(&fixed, "youngs_modulus_bare")
            .note
            .contains("Poisson's ratio, taken as")
    );
}

/// A probability as standard normal deviate, kept finite.
fn deviate(probability: f64) -> f64 {
    let normal = Normal::new(0.0, 1.0).expect("a normal");
    normal.inverse_cdf(probability.clamp(1e-12, 1.0 - 1e-12))
}

/// The static values through the box theory, nothing adjusted. The three longest waves: Gamma(n, m/n) with n from the theory's own
/// relaxation, tau = (g^2 + omega^2)/(2 g omega^2) for Langevin damping g = 1/ps and omega^2 = kappa(q) q^4/rho. Each cell's
/// e1, e2: Wishart about the box's compliance with the effective samples of the strains, as three independent normal deviates
/// (Bartlett's decomposition; Anderson, An Introduction to Multivariate Statistical Analysis, section 7.2).
#[test]
fn static_values_through_the_box_theory_agree_with_the_runs() {
    const DAMPING: f64 = 1.0;
    /// 1 g/mol in eV ps^2/A^2: 1.66053907e-27 kg over 1.602176634e-19 J, in A and ps (CODATA 2018).
    const MASS: f64 = 1.036_426_965e-4;
    let (sheets, _) = demo("drumhead.toml");
    for ((name, runs), (_, [kappa, youngs, poisson, lattice_term])) in sheets.into_iter().zip(STATIC) {
        let (mut of_waves, mut of_cells) = (Vec::new(), Vec::new());
        for Measured {
            estimates: run,
            interval,
        } in runs
        {
            let state = PlateState {
                kappa,
                youngs: youngs / N_PER_M_PER_EV_PER_A2,
                lattice_term,
                tension: 0.0,
                temperature: run.temperature,
            };
            let zone: Vec<_> = run
                .spectrum
                .modes
                .iter()
                .filter(|mode| mode.zone_weight > 0.0)
                .collect();
            let modes = BoxModes {
                cell: run.spectrum.cell,
                integers: zone.iter().map(|mode| mode.integers).collect(),
                weights: zone.iter().map(|mode| mode.zone_weight).collect(),
            };
            let solver = BoxScsa::new(&modes);
            let solution = solver
                .solve_clamped(&state, [false, false, true], poisson, None)
                .expect("a solution");
            let density = run.mass.expect("masses") * MASS / run.area.value;
            for (place, mode) in zone.iter().enumerate().take(3) {
                let omega_squared = solution.kappa[place] * mode.length.powi(4) / density;
                let tau = (DAMPING * DAMPING + omega_squared) / (2.0 * DAMPING * omega_squared);
                let samples = run.frames as f64 * interval / (2.0 * tau).max(interval);
                let gamma = Gamma::new(samples, samples).expect("a Gamma");
                of_waves.push(deviate(gamma.cdf(mode.power / solution.power[place])));
            }
            let compliance = solver.box_compliance(&solution, poisson).expect("a compliance");
            let factor = run.area.value / (BOLTZMANN_EV_PER_K * run.temperature);
            let measured = |i: usize, j: usize| factor * run.strain.covariance[i][j];
            let inverses: f64 = [(0, 0), (0, 1), (1, 0), (1, 1)]
                .iter()
                .map(|&(i, j)| 1.0 / run.strain.effective_samples[i][j])
                .sum();
            let degrees = 4.0 / inverses - 1.0;
            let regression = |s11: f64, s12: f64, s22: f64| (s12 / s11, s22 - s12 * s12 / s11);
            let (slope, rest) = regression(measured(0, 0), measured(0, 1), measured(1, 1));
            let (true_slope, true_rest) = regression(compliance[0][0], compliance[0][1], compliance[1][1]);
            let chi = |degrees: f64| ChiSquared::new(degrees).expect("a chi-square");
            of_cells.push(deviate(
                chi(degrees).cdf(degrees * measured(0, 0) / compliance[0][0]),
            ));
            of_cells.push(deviate(chi(degrees - 1.0).cdf(degrees * rest / true_rest)));
            of_cells.push((slope - true_slope) * (degrees * measured(0, 0) / true_rest).sqrt());
        }
        for (what, deviates) in [("waves", of_waves), ("cells", of_cells)] {
            let chi_square: f64 = deviates.iter().map(|z| z * z).sum();
            let count = deviates.len() as f64;
            let probability = ChiSquared::new(count).expect("a chi-square").sf(chi_square);
            assert!(
                probability > 0.01,
                "{name}, {what}: {chi_square} of {count}, {deviates:?}"
            );
            assert!(
                deviates.iter().all(|z| z.abs() < 4.0),
                "{name}, {what}: {deviates:?}"
            );
        }
    }
}
