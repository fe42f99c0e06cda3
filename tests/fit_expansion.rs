//! Thermal expansion from area ladders: planted curves, few temperatures, ladders that must not mix; and least squares
//! against a certified reference.

use ndarray::Array2;
use planish::estimates::{
    Cut, Estimate, RunEstimates, SheetEstimates, SpectrumEstimate, StrainEstimate, Tension,
};
use planish::fits::{AreaFit, Fit, FitOptions, Fitted, PlateModel, ThermalExpansionFit, Verdict};
use planish::numerics::LinearLeastSquares;
use planish::theory::PlaneCell;
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

const C1: f64 = -4.0e-5;
const C2: f64 = 5.0e-6;
const ERROR: f64 = 0.3;

fn true_area(t: f64) -> f64 {
    2720.0 * (C1 * t + C2 * t * t.ln()).exp()
}

fn true_expansion(t: f64) -> f64 {
    0.5 * (C1 + C2 * (t.ln() + 1.0))
}

fn run(temperature: f64, area: f64, samples: f64) -> RunEstimates {
    let cell = PlaneCell::from_metric(area, 0.0, area);
    RunEstimates {
        name: format!("{temperature}K"),
        temperature,
        tension: Tension::Stated(0.0),
        atoms: 1008,
        mass: Some(12_506.0),
        frames: 301,
        cut: Cut {
            frames_read: 301,
            frames_cut: 0,
            blocks_cut: 0,
            block_frames: 16,
        },
        area: Estimate {
            value: area,
            error: ERROR,
            effective_samples: samples,
            split_r_hat: Some(1.0),
        },
        area_blocks: vec![],
        spectrum: SpectrumEstimate {
            cell,
            modes: vec![],
            rows: vec![],
            block_powers: Array2::zeros((0, 0)),
            block_frames: vec![],
        },
        strain: StrainEstimate {
            cell,
            covariance: [[0.0; 3]; 3],
            effective_samples: [[samples; 3]; 3],
            split_r_hat: [[None; 3]; 3],
            free: [true, true, false],
            coupled: false,
        },
        excess_area: None,
        reservations: vec![],
    }
}

fn ladder(temperatures: &[f64]) -> Vec<RunEstimates> {
    temperatures
        .iter()
        .map(|&t| run(t, true_area(t), 100.0))
        .collect()
}

fn fit(runs: Vec<RunEstimates>) -> Fitted {
    let options = FitOptions {
        plate: PlateModel::Harmonic,
        window: None,
        wanted_error: 0.05,
    };
    let name = "sheet".into();
    ThermalExpansionFit.fit(&SheetEstimates { name, runs }, &options)
}

#[test]
fn exact_areas_give_the_planted_curve() {
    let temperatures = [150.0, 300.0, 450.0, 600.0, 900.0];
    let fitted = fit(ladder(&temperatures));
    assert_eq!(fitted.quantities.len(), 5);
    for (q, t) in fitted.quantities.iter().zip(temperatures) {
        let value = q.value.unwrap();
        assert!(
            (value.value - true_expansion(t)).abs() < 1e-12,
            "{t} K: {}",
            value.value
        );
        assert_eq!(q.verdict, Verdict::Good);
        assert_eq!(
            (q.condition.temperature, q.condition.run.clone()),
            (Some(t), Some(format!("{t}K")))
        );
    }
    let curve = fitted.area_curve.unwrap();
    for (t, area) in curve.temperature.iter().zip(&curve.area_per_atom) {
        assert!((area * 1008.0 / true_area(*t) - 1.0).abs() < 1e-12);
    }
}

#[test]
fn errors_cover_the_planted_curve() {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(31);
    let temperatures = [150.0, 300.0, 450.0, 600.0, 900.0];
    let sets = 1000;
    let mut inside = [0_u32; 5];
    for _ in 0..sets {
        let mut runs = ladder(&temperatures);
        for run in &mut runs {
            let noise: f64 = StandardNormal.sample(&mut random);
            run.area.value += ERROR * noise;
        }
        for ((q, t), inside) in fit(runs).quantities.iter().zip(temperatures).zip(&mut inside) {
            let [low, high] = q.value.unwrap().interval95;
            *inside += u32::from(low < true_expansion(t) && true_expansion(t) < high);
        }
    }
    assert!(inside.iter().all(|i| (930..=970).contains(i)), "{inside:?}");
}

#[test]
fn few_temperatures_are_weak() {
    let three = fit(ladder(&[150.0, 300.0, 450.0])).quantities;
    assert_eq!(three.len(), 3);
    assert!(
        three
            .iter()
            .all(|q| q.verdict == Verdict::Weak && q.value.is_some())
    );
    assert!((three[1].value.unwrap().value - true_expansion(300.0)).abs() < 1e-12);

    let two = fit(ladder(&[200.0, 400.0])).quantities;
    assert_eq!((two.len(), two[0].verdict), (1, Verdict::Weak));
    assert_eq!(
        (two[0].condition.run.clone(), two[0].condition.temperature),
        (None, Some(300.0))
    );
    let slope = 0.5 * (true_area(400.0) / true_area(200.0)).ln() / 200.0;
    assert!((two[0].value.unwrap().value - slope).abs() < 1e-14);

    let one = fit(ladder(&[300.0])).quantities;
    assert_eq!(
        (one.len(), one[0].verdict, one[0].value),
        (1, Verdict::Unusable, None)
    );
}

#[test]
fn ladders_do_not_mix_and_skip_fixed_cells() {
    let mut runs = ladder(&[150.0, 300.0, 450.0, 600.0, 750.0]);
    runs[1].strain.free = [false; 3];
    let mut other = run(500.0, 5000.0, 100.0);
    other.atoms = 2000;
    let mut stretched = run(500.0, 2800.0, 100.0);
    stretched.tension = Tension::Stated(0.01);
    runs.extend([other, stretched]);
    let fitted = fit(runs);
    let values: Vec<_> = fitted.quantities.iter().filter(|q| q.value.is_some()).collect();
    assert_eq!(values.len(), 4, "{values:?}");
    for q in values {
        assert!((q.value.unwrap().value - true_expansion(q.condition.temperature.unwrap())).abs() < 1e-12);
        assert_eq!(q.verdict, Verdict::Good);
    }
    // One weak area in four leaves three quarters good, two do not; a repeated temperature is no further step.
    let mut weak = ladder(&[150.0, 300.0, 450.0, 600.0]);
    weak[0].area.effective_samples = 10.0;
    assert!(
        fit(weak.clone())
            .quantities
            .iter()
            .all(|q| q.verdict == Verdict::Good)
    );
    weak[1].area.effective_samples = 10.0;
    assert!(fit(weak).quantities.iter().all(|q| q.verdict == Verdict::Weak));
    let repeated = fit(ladder(&[150.0, 300.0, 450.0, 450.0]));
    assert!(repeated.quantities.iter().all(|q| q.verdict == Verdict::Weak));
}

/// Area per atom and areal density of the boron nitride sheet: 504 B (10.81 g/mol) and 504 N (14.007 g/mol) on 2714 A^2
/// weigh 12507.8 g/mol x 1.66054e-27 kg over 2714e-20 m^2 = 7.653e-7 kg/m^2 (by hand).
#[test]
fn area_and_density() {
    let mut one = run(300.0, 2714.0, 100.0);
    one.mass = Some(504.0 * (10.81 + 14.007));
    let sheet = SheetEstimates {
        name: "sheet".into(),
        runs: vec![one],
    };
    let options = FitOptions {
        plate: PlateModel::Rippled,
        window: None,
        wanted_error: 0.05,
    };
    let quantities = AreaFit.fit(&sheet, &options).quantities;
    let of = |name: &str| quantities.iter().find(|q| q.name == name).unwrap().value.unwrap();
    assert!((of("area_per_atom").value - 2714.0 / 1008.0).abs() < 1e-12);
    assert!((of("area_per_atom").error - ERROR / 1008.0).abs() < 1e-12);
    assert!(
        (of("areal_density").value / 7.653e-7 - 1.0).abs() < 1e-4,
        "{}",
        of("areal_density").value
    );
    assert_eq!(of("tension").value, 0.0);
}

/// Least squares on the NIST Statistical Reference Dataset "Norris" (linear, 36 points): certified
/// B0 = -0.262323073774029, B1 = 1.00211681802045 (values from memory of the published set).
#[test]
fn least_squares_reproduces_norris() {
    let x = [
        0.2, 337.4, 118.2, 884.6, 10.1, 226.5, 666.3, 996.3, 448.6, 777.0, 558.2, 0.4, 0.6, 775.5, 666.9,
        338.0, 447.5, 11.6, 556.0, 228.1, 995.8, 887.6, 120.2, 0.3, 0.3, 556.8, 339.1, 887.2, 999.0, 779.0,
        11.1, 118.3, 229.2, 669.1, 448.9, 0.5,
    ];
    let y = [
        0.1, 338.8, 118.1, 888.0, 9.2, 228.1, 668.5, 998.5, 449.1, 778.9, 559.2, 0.3, 0.1, 778.1, 668.8,
        339.3, 448.9, 10.8, 557.7, 228.3, 998.0, 888.8, 119.6, 0.3, 0.6, 557.6, 339.3, 888.0, 998.5, 778.9,
        10.2, 117.6, 228.9, 668.4, 449.2, 0.2,
    ];
    let rows: Vec<Vec<f64>> = x.iter().map(|&x| vec![1.0, x]).collect();
    let fit = LinearLeastSquares::solve(&rows, &y, &[1.0; 36]).unwrap();
    assert!(
        (fit.coefficients[0] + 0.262_323_073_774_029).abs() < 1e-10,
        "{}",
        fit.coefficients
    );
    assert!((fit.coefficients[1] - 1.002_116_818_020_45).abs() < 1e-12);
    // Certified residual standard deviation 0.884796396144373 and standard deviation of B0 0.232818234301152.
    let residual = (fit.chi_square / 34.0).sqrt();
    assert!((residual - 0.884_796_396_144_373).abs() < 1e-10);
    assert!((fit.covariance[(0, 0)].sqrt() * residual - 0.232_818_234_301_152).abs() < 1e-10);
    assert_eq!(
        LinearLeastSquares::solve(&[vec![1.0, 1.0], vec![1.0, 1.0]], &[0.0, 0.0], &[1.0, 1.0]),
        None
    );
}
