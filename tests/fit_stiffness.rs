//! Stiffness from cell fluctuations: a planted tensor recovered by the fit with errors that mean what they say, and what is
//! written where strains were clamped, coupled or suppressed.

use nalgebra::{Matrix3, Vector3};
use ndarray::Array2;
use planish::estimates::{
    Cut, Estimate, RunEstimates, SheetEstimates, SpectrumEstimate, StrainEstimate, Tension,
};
use planish::fits::{CellStiffnessFit, Fit, FitOptions, PlateModel, Quantity, Verdict};
use planish::theory::PlaneCell;
use planish::units::{BOLTZMANN_EV_PER_K, N_PER_M_PER_EV_PER_A2};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

const TEMPERATURE: f64 = 300.0;
const CELL: PlaneCell = PlaneCell {
    a: [52.4, 0.0],
    b: [0.0, 51.8],
};

fn options() -> FitOptions {
    FitOptions {
        plate: PlateModel::Harmonic,
        window: None,
        wanted_error: 0.05,
    }
}

fn run(covariance: Matrix3<f64>, samples: f64, free: [bool; 3], coupled: bool) -> SheetEstimates {
    let strain = StrainEstimate {
        cell: CELL,
        covariance: std::array::from_fn(|i| std::array::from_fn(|j| covariance[(i, j)])),
        effective_samples: [[samples; 3]; 3],
        split_r_hat: [[Some(1.0); 3]; 3],
        free,
        coupled,
    };
    let run = RunEstimates {
        name: "300K".into(),
        temperature: TEMPERATURE,
        tension: Tension::Stated(0.0),
        atoms: 1008,
        mass: None,
        frames: 301,
        cut: Cut {
            frames_read: 301,
            frames_cut: 0,
            blocks_cut: 0,
            block_frames: 16,
        },
        area: Estimate {
            value: CELL.area(),
            error: 0.2,
            effective_samples: samples,
            split_r_hat: Some(1.0),
        },
        area_blocks: vec![],
        spectrum: SpectrumEstimate {
            cell: CELL,
            modes: vec![],
            rows: vec![],
            block_powers: Array2::zeros((0, 0)),
            block_frames: vec![],
        },
        strain,
        excess_area: None,
        reservations: vec![],
    };
    SheetEstimates {
        name: "sheet".into(),
        runs: vec![run],
    }
}

fn fit(sheet: &SheetEstimates) -> Vec<Quantity> {
    CellStiffnessFit.fit(sheet, &options()).quantities
}

/// C of boron nitride's size in eV/A^2, with some shear coupling so that no component vanishes.
fn truth() -> Matrix3<f64> {
    Matrix3::new(277.0, 86.0, 10.0, 86.0, 260.0, -15.0, 10.0, -15.0, 95.0) / N_PER_M_PER_EV_PER_A2
}

/// What each name must be for the stiffness `c` (the definitions of elasticity: compliance S = C^-1).
fn expected(name: &str, c: Matrix3<f64>) -> f64 {
    let s = c.try_inverse().unwrap();
    let unit = N_PER_M_PER_EV_PER_A2;
    match name {
        "stiffness_11" => c[(0, 0)] * unit,
        "stiffness_22" => c[(1, 1)] * unit,
        "stiffness_12" => c[(0, 1)] * unit,
        "stiffness_66" | "shear_modulus" => c[(2, 2)] * unit,
        "stiffness_16" => c[(0, 2)] * unit,
        "stiffness_26" => c[(1, 2)] * unit,
        "youngs_modulus" => unit / s[(0, 0)],
        "bulk_modulus" => unit / (s[(0, 0)] + s[(1, 1)] + 2.0 * s[(0, 1)]),
        "poisson_ratio" => -s[(0, 1)] / s[(0, 0)],
        other => panic!("unexpected {other}"),
    }
}

fn thermal_covariance(c: Matrix3<f64>) -> Matrix3<f64> {
    c.try_inverse().unwrap() * (BOLTZMANN_EV_PER_K * TEMPERATURE / CELL.area())
}

/// 95 and 68 % intervals of every value from n independent samples: coverage near nominal, bias a fraction of the error.
#[test]
fn intervals_cover_the_planted_tensor() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(21);
    let root = thermal_covariance(truth()).cholesky().unwrap().l();
    for samples in [30, 60, 200] {
        let sets = 2000;
        let mut tally: Vec<(&str, u32, u32, f64, f64)> = vec![];
        for _ in 0..sets {
            let strains: Vec<Vector3<f64>> = (0..samples)
                .map(|_| root * Vector3::from_fn(|_, _| StandardNormal.sample(&mut random)))
                .collect();
            let mean = strains.iter().sum::<Vector3<f64>>() / f64::from(samples);
            let scatter: Matrix3<f64> = strains.iter().map(|e| (e - mean) * (e - mean).transpose()).sum();
            let sheet = run(
                scatter / f64::from(samples - 1),
                f64::from(samples),
                [true; 3],
                false,
            );
            let quantities = fit(&sheet);
            tally.resize(quantities.len(), ("", 0, 0, 0.0, 0.0));
            for (q, entry) in quantities.iter().zip(&mut tally) {
                let value = q.value.unwrap();
                let truth = expected(q.name, truth());
                entry.0 = q.name;
                entry.1 += u32::from(value.interval95[0] < truth && truth < value.interval95[1]);
                entry.2 += u32::from((value.value - truth).abs() < value.error);
                entry.3 += (value.value - truth) / f64::from(sets);
                entry.4 += value.error / f64::from(sets);
            }
        }
        assert_eq!(tally.len(), 10);
        for (name, inside95, inside68, shift, error) in tally {
            let bias = shift / error;
            let (c95, c68) = (
                f64::from(inside95) / f64::from(sets),
                f64::from(inside68) / f64::from(sets),
            );
            assert!((0.92..=0.98).contains(&c95), "{name} at n = {samples}: {c95}");
            assert!((0.62..=0.74).contains(&c68), "{name} at n = {samples}: {c68}");
            assert!(bias.abs() < 0.1, "{name} at n = {samples}: bias {bias}");
        }
    }
}

/// With very many samples the values are the tensor's own.
#[test]
fn exact_covariance_gives_the_tensor() {
    for q in fit(&run(thermal_covariance(truth()), 1e12, [true; 3], false)) {
        let (value, truth) = (q.value.unwrap().value, expected(q.name, truth()));
        assert!(
            (value / truth - 1.0).abs() < 1e-9,
            "{}: {value} against {truth}",
            q.name
        );
        assert_eq!(q.verdict, Verdict::Good);
        assert!((q.condition.length.unwrap() - CELL.area().sqrt()).abs() < 1e-9);
    }
}

/// Clamped shear: the 2x2 block is exact, Young's modulus is (C11 C22 - C12^2)/C22, and there is no shear modulus.
#[test]
fn clamped_shear_leaves_the_free_block() {
    let c = truth();
    let block = c.fixed_view::<2, 2>(0, 0).into_owned().try_inverse().unwrap();
    let mut covariance = Matrix3::zeros();
    covariance
        .fixed_view_mut::<2, 2>(0, 0)
        .copy_from(&(block * (BOLTZMANN_EV_PER_K * TEMPERATURE / CELL.area())));
    let quantities = fit(&run(covariance, 1e12, [true, true, false], false));
    let of = |name: &str| {
        quantities
            .iter()
            .find(|q| q.name == name)
            .map(|q| q.value.unwrap().value)
    };
    for name in ["stiffness_11", "stiffness_22", "stiffness_12"] {
        assert!(
            (of(name).unwrap() / expected(name, c) - 1.0).abs() < 1e-9,
            "{name}"
        );
    }
    let [c11, c22, c12] = [(0, 0), (1, 1), (0, 1)].map(|ij| c[ij] * N_PER_M_PER_EV_PER_A2);
    assert!((of("youngs_modulus").unwrap() / ((c11 * c22 - c12 * c12) / c22) - 1.0).abs() < 1e-9);
    assert!((of("poisson_ratio").unwrap() / (c12 / c22) - 1.0).abs() < 1e-9);
    for name in ["shear_modulus", "stiffness_66", "stiffness_16", "stiffness_26"] {
        assert_eq!(of(name), None);
    }
    let youngs = quantities.iter().find(|q| q.name == "youngs_modulus").unwrap();
    assert!(youngs.note.contains("shear"), "{}", youngs.note);
}

/// A fixed cell has no stiffness, an isotropic barostat the bulk modulus alone, a rescaling one is caught.
#[test]
fn what_did_not_fluctuate_is_absent() {
    let fixed = fit(&run(Matrix3::zeros(), 301.0, [false; 3], false));
    assert_eq!(fixed.len(), 1);
    assert_eq!(
        (fixed[0].name, fixed[0].verdict, fixed[0].value),
        ("youngs_modulus", Verdict::Unusable, None)
    );
    assert!(fixed[0].note.contains("held"));

    // One strain e = e1 = e2: var(dA/A) = 4 var(e) = kB T/(A B).
    let bulk = 180.0 / N_PER_M_PER_EV_PER_A2;
    let e = BOLTZMANN_EV_PER_K * TEMPERATURE / (4.0 * CELL.area() * bulk);
    let coupled = fit(&run(
        Matrix3::new(e, e, 0.0, e, e, 0.0, 0.0, 0.0, 0.0),
        1e12,
        [true, true, false],
        true,
    ));
    let values: Vec<_> = coupled.iter().filter(|q| q.value.is_some()).collect();
    assert_eq!((values.len(), values[0].name), (1, "bulk_modulus"));
    assert!((values[0].value.unwrap().value / 180.0 - 1.0).abs() < 1e-9);

    let suppressed = fit(&run(thermal_covariance(truth()) * 0.01, 100.0, [true; 3], false));
    assert!(
        suppressed
            .iter()
            .all(|q| q.verdict == Verdict::Weak && q.note.contains("barostat"))
    );
}

/// Verdicts follow the slowest product's samples.
#[test]
fn few_samples_are_weak_and_fewer_unusable() {
    let covariance = thermal_covariance(truth());
    for (samples, verdict) in [
        (4.0, Verdict::Unusable),
        (12.0, Verdict::Weak),
        (25.0, Verdict::Good),
    ] {
        let quantities = fit(&run(covariance, samples, [true; 3], false));
        assert!(
            quantities.iter().all(|q| q.verdict == verdict),
            "{samples}: {quantities:?}"
        );
        assert!(
            quantities
                .iter()
                .all(|q| q.value.is_none() == (verdict == Verdict::Unusable))
        );
        assert!(
            quantities
                .iter()
                .all(|q| q.note.is_empty() == (verdict == Verdict::Good)),
            "{quantities:?}"
        );
    }
}
