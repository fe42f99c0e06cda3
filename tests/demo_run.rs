//! The demo pipelines, run end to end: what is known of the two boron nitride sheets (demo-trajectories/README.md) is found in
//! the result files. What belongs here: physics of the demo as a whole, read from the output folder.

mod program;

use std::path::{Path, PathBuf};
use std::sync::OnceLock;

use planish::fits::Verdict;
use planish::parameters::{Parameter, Sheet};
use program::{Table, run, sheets, shipped};
use tempfile::TempDir;

const RUNS: [(&str, &[&str]); 2] = [
    ("hbn-a", &["150K", "300K", "450K", "600K", "750K", "900K"]),
    ("hbn-b", &["150K", "300K", "600K", "900K"]),
];

/// Young's modulus at 0 K in N/m, by finite differences (demo-trajectories/README.md).
const YOUNGS_AT_0_K: [f64; 2] = [250.2, 269.1];

/// kappa at 0 K and q = 0.718 /A in eV, from frozen waves (demo-trajectories/README.md).
const KAPPA_AT_0_K: [f64; 2] = [0.767, 0.551];

/// The waves at 0.12 and 0.17 /A: the three longest of the cell.
const LONG: [f64; 2] = [0.115, 0.18];

struct Demo {
    // Held so that the folder lives as long as the tests.
    _folder: TempDir,
    out: PathBuf,
    spectrum: Table,
    sheets: Vec<Sheet>,
}

fn run_shipped(pipeline: &str) -> Demo {
    let folder = TempDir::new().expect("a temporary folder");
    let out = folder.path().join("out");
    run(&shipped(pipeline), &out, &[]).expect(0);
    Demo {
        spectrum: Table::read(&out.join("spectrum.csv")),
        sheets: sheets(&out),
        out,
        _folder: folder,
    }
}

fn drumhead() -> &'static Demo {
    static DEMO: OnceLock<Demo> = OnceLock::new();
    DEMO.get_or_init(|| run_shipped("pipelines/drumhead.toml"))
}

fn fixed_cell() -> &'static Demo {
    static DEMO: OnceLock<Demo> = OnceLock::new();
    DEMO.get_or_init(|| run_shipped("pipelines/fixed-cell.toml"))
}

impl Demo {
    /// kappa of the rows within a band of q and its error, weighted by effective samples (the error of a row is too
    /// noisy a weight, and goes with its value).
    fn kappa(&self, sheet: &str, run: &str, band: [f64; 2]) -> [f64; 2] {
        let (mut weight, mut value, mut variance) = (0.0, 0.0, 0.0);
        for row in self.spectrum.of_run(sheet, run) {
            if (band[0]..=band[1]).contains(&row.number("q_per_A")) {
                let samples = row.number("effective_samples");
                weight += samples;
                value += samples * row.number("kappa_eV");
                variance += (samples * row.number("kappa_error_eV")).powi(2);
            }
        }
        assert!(weight > 0.0, "{sheet}/{run} has no row in {band:?}");
        [value / weight, variance.sqrt() / weight]
    }

    fn parameter(&self, sheet: usize, name: &str, run: &str) -> &Parameter {
        self.sheets[sheet]
            .find(name, Some(run))
            .unwrap_or_else(|| panic!("no {name} of {run}"))
    }
}

/// By how many of its errors `a` exceeds `b`.
fn errors_above(a: [f64; 2], b: [f64; 2]) -> f64 {
    (a[0] - b[0]) / a[1].hypot(b[1])
}

fn every_run() -> impl Iterator<Item = (usize, &'static str, &'static str)> {
    RUNS.into_iter()
        .enumerate()
        .flat_map(|(index, (sheet, runs))| runs.iter().map(move |run| (index, sheet, *run)))
}

/// Ripples stiffen the long waves (Nelson and Peliti, J. Phys. France 48, 1085 (1987)).
#[test]
fn long_waves_are_stiffer_than_short_ones() {
    for (_, sheet, run) in every_run() {
        let long = drumhead().kappa(sheet, run, LONG);
        let short = drumhead().kappa(sheet, run, [0.4, 0.5]);
        let errors = errors_above(long, short);
        assert!(
            errors > 2.0,
            "{sheet}/{run}: {long:?} and {short:?}, {errors:.1} errors"
        );
    }
}

#[test]
fn long_waves_stiffen_with_temperature() {
    for (sheet, _) in RUNS {
        let hot = drumhead().kappa(sheet, "900K", LONG);
        let cold = drumhead().kappa(sheet, "150K", LONG);
        let errors = errors_above(hot, cold);
        assert!(errors > 2.0, "{sheet}: {hot:?} and {cold:?}, {errors:.1} errors");
    }
}

/// Where ripples matter least: short waves in the cold. Rows from 0.70 to 0.74 /A, all waves about (6, 0) and (0, 6).
#[test]
fn short_waves_in_the_cold_have_the_rigidity_of_0_k() {
    for ((sheet, _), expected) in RUNS.into_iter().zip(KAPPA_AT_0_K) {
        let [found, error] = drumhead().kappa(sheet, "150K", [0.70, 0.74]);
        assert!(
            (found / expected - 1.0).abs() < 0.1,
            "{sheet}: {found} +- {error}, {expected} at 0 K"
        );
    }
}

#[test]
fn most_runs_are_good() {
    for name in ["bending_rigidity", "area_per_atom"] {
        let good = every_run()
            .filter(|&(sheet, _, run)| drumhead().parameter(sheet, name, run).verdict == Verdict::Good)
            .count();
        assert!(good >= 8, "{name} is good in {good} of 10 runs");
    }
}

/// Ripples soften the sheet in its plane, the more the hotter it is.
#[test]
fn youngs_modulus_falls_with_temperature_from_its_value_at_0_k() {
    for ((sheet, (name, runs)), at_0_k) in RUNS.into_iter().enumerate().zip(YOUNGS_AT_0_K) {
        let mut sums = [0.0; 5];
        for run in runs {
            let modulus = drumhead().parameter(sheet, "youngs_modulus", run);
            let value = modulus.value.expect("a value");
            let t = modulus.temperature_K.expect("a temperature");
            assert!(value < at_0_k, "{name}/{run}: {value} N/m, {at_0_k} at 0 K");
            let weight = modulus.error.expect("an error").powi(-2);
            for (sum, term) in sums.iter_mut().zip([1.0, t, t * t, value, t * value]) {
                *sum += weight * term;
            }
        }
        let [w, t, tt, y, ty] = sums;
        let slope = (w * ty - t * y) / (w * tt - t * t);
        assert!(slope < 0.0, "{name}: Young's modulus changes by {slope} N/m/K");
    }
}

#[test]
fn the_sheet_shrinks_on_heating() {
    for (sheet, name, run) in every_run() {
        let alpha = drumhead().parameter(sheet, "thermal_expansion", run);
        let value = alpha.value.expect("a value");
        assert!(value < 0.0, "{name}/{run}: {value} /K");
    }
}

#[test]
fn every_promised_file_is_there() {
    let out: &Path = &drumhead().out;
    for name in [
        "parameters.toml",
        "parameters.json",
        "spectrum.csv",
        "area.csv",
        "runs.csv",
        "report.html",
        "run.log",
        "figures",
        "blocks",
    ] {
        assert!(out.join(name).exists(), "no {name}");
    }
    let runs = Table::read(&out.join("runs.csv"));
    for (_, sheet, run) in every_run() {
        let row = runs.of_run(sheet, run).next().expect("a row");
        assert_eq!(row.text("frames"), "301", "{sheet}/{run}");
    }
}

#[test]
fn a_fixed_cell_is_told_from_a_free_one() {
    let demo = fixed_cell();
    let [free, fixed] = ["free", "fixed"].map(|run| demo.parameter(0, "bending_rigidity", run));
    assert_eq!(free.verdict, Verdict::Good, "{}", free.note);
    assert_eq!(fixed.verdict, Verdict::Weak, "{}", fixed.note);
    assert!(fixed.note.contains("cell is fixed"), "{}", fixed.note);
    for name in ["bending_rigidity_bare", "youngs_modulus_bare", "lattice_term"] {
        assert!(demo.parameter(0, name, "free").value.is_some(), "{name}");
    }
    for parameter in &demo.sheets[0].parameter {
        let of_plate = parameter.name.contains("_bare") || parameter.name.starts_with("stiffness_");
        let modulus = parameter.name.ends_with("_modulus") || parameter.name == "poisson_ratio";
        if parameter.run.as_deref() == Some("fixed") && (of_plate || modulus) {
            assert!(
                parameter.value.is_none() && !parameter.note.is_empty(),
                "{} has a value in a fixed cell",
                parameter.name
            );
        }
    }
    assert!(demo.parameter(0, "youngs_modulus", "free").value.is_some());
}
