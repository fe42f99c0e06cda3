//! Histories minted from Ornstein-Uhlenbeck modes whose relaxation, power, cell and strains are known in closed form:
//! effective samples, rows, static ripples, strains, pooling, and the shapes of history that must not panic.

use ndarray::Array2;
use num_complex::Complex64;
use planish::estimates::{EstimateError, RunEstimates, RunFacts, Tension, pool};
use planish::measurements::{BlockRecord, History, ModeSums, Record, Series};
use planish::sheet::{LONG_WAVES, ModeSet};
use rand::SeedableRng;
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

const INTERVAL: f64 = 0.4;
const SIDE: f64 = 52.0;

/// Modes of a square cell with |m| up to `most`, sorted by |q|.
fn modes(most: i32) -> ModeSet {
    let mut integers: Vec<[i32; 2]> = (0..=most)
        .flat_map(|x| (-most..=most).map(move |y| [x, y]))
        .filter(|&[x, y]| (x > 0 || y > 0) && x * x + y * y <= most * most)
        .collect();
    integers.sort_by_key(|&[x, y]| (x * x + y * y, x, y));
    let zone_weight = vec![1.0; integers.len()];
    ModeSet {
        integers,
        zone_weight,
    }
}

fn wave_vector([x, y]: [i32; 2]) -> f64 {
    std::f64::consts::TAU / SIDE * f64::from(x * x + y * y).sqrt()
}

/// One planted case: rho_h(k) = correlation^k cos(k angle), <|h|^2> and mean h, per mode.
struct Case<'a> {
    modes: &'a ModeSet,
    correlation: &'a dyn Fn(f64) -> f64,
    /// Phase in radians by which h oscillates from frame to frame, at |q|.
    angle: &'a dyn Fn(f64) -> f64,
    power: &'a dyn Fn(f64) -> f64,
    ripple: &'a dyn Fn(usize) -> f64,
    block_frames: usize,
    frames: usize,
}

fn mint(case: &Case<'_>, random: &mut Xoshiro256PlusPlus) -> History {
    let count = case.modes.len();
    let long = count.min(LONG_WAVES);
    let mut normal = || -> f64 { StandardNormal.sample(random) };
    let mut complex = || Complex64::new(normal(), normal()) * std::f64::consts::FRAC_1_SQRT_2;
    let q: Vec<f64> = case.modes.integers.iter().map(|&m| wave_vector(m)).collect();
    // Two counter-rotating Ornstein-Uhlenbeck processes make a damped standing wave.
    let mut state: Vec<[Complex64; 2]> = (0..count).map(|_| [complex(), complex()]).collect();
    let mut heights = Array2::<Complex64>::zeros((case.frames, count));
    for frame in 0..case.frames {
        for m in 0..count {
            let phi = (case.correlation)(q[m]);
            let turn = Complex64::from_polar(phi, (case.angle)(q[m]));
            let noise = (1.0 - phi * phi).sqrt();
            let [left, right] = state[m];
            state[m] = [
                left * turn + complex() * noise,
                right * turn.conj() + complex() * noise,
            ];
            let wave = (state[m][0] + state[m][1]) * std::f64::consts::FRAC_1_SQRT_2;
            heights[[frame, m]] = wave * (case.power)(q[m]).sqrt() + (case.ripple)(m);
        }
    }
    let mut strain = || 1e-3 * normal();
    let cells: Vec<[f64; 2]> = (0..case.frames)
        .map(|_| [SIDE * (1.0 + strain()), SIDE * (1.0 + strain())])
        .collect();
    let mut blocks = Vec::new();
    let mut start = 0;
    while start < case.frames {
        let end = (start + case.block_frames).min(case.frames);
        blocks.push(block(&heights, &cells, start..end, long));
        start = end;
    }
    History {
        modes: case.modes.clone(),
        frame_interval_ps: Some(INTERVAL),
        first_time_ps: Some(0.0),
        blocks,
    }
}

fn block(
    heights: &Array2<Complex64>,
    cells: &[[f64; 2]],
    range: std::ops::Range<usize>,
    long: usize,
) -> BlockRecord {
    let frames = range.len();
    let start = range.start;
    let series = |names: &[&str], value: &dyn Fn(usize, usize) -> f64| Series {
        columns: names.iter().map(|&n| n.to_owned()).collect(),
        values: Array2::from_shape_fn((frames, names.len()), |(f, c)| value(start + f, c)),
    };
    let names: Vec<String> = (0..2 * long).map(|c| format!("h{c}")).collect();
    let names: Vec<&str> = names.iter().map(String::as_str).collect();
    let sum = |f: &dyn Fn(Complex64) -> f64| -> Vec<f64> {
        (long..heights.ncols())
            .map(|m| range.clone().map(|t| f(heights[[t, m]])).sum())
            .collect()
    };
    let (re, im) = (sum(&|h| h.re), sum(&|h| h.im));
    let sums = ModeSums {
        height: re
            .into_iter()
            .zip(im)
            .map(|(re, im)| Complex64::new(re, im))
            .collect(),
        power: sum(&|h| h.norm_sqr()),
        power_squared: sum(&|h| h.norm_sqr().powi(2)),
        lagged: std::array::from_fn(|_| vec![Complex64::ZERO; heights.ncols() - long]),
    };
    let record = |measurement: &str, series, sums| Record {
        measurement: measurement.into(),
        series: Some(series),
        sums,
    };
    let spectrum = series(&names, &|t, c| {
        let h = heights[[t, c / 2]];
        if c % 2 == 0 { h.re } else { h.im }
    });
    BlockRecord {
        frames,
        records: vec![
            record(
                "area",
                series(&["area_A2"], &|t, _| cells[t][0] * cells[t][1]),
                None,
            ),
            record(
                "strain",
                series(&["aa_A2", "ab_A2", "bb_A2"], &|t, c| match c {
                    0 => cells[t][0].powi(2),
                    1 => 0.0,
                    _ => cells[t][1].powi(2),
                }),
                None,
            ),
            record("spectrum", spectrum, Some(sums)),
        ],
    }
}

fn facts() -> RunFacts {
    RunFacts {
        name: "300K".into(),
        temperature: 300.0,
        tension: Tension::Stated(0.0),
        atoms: 1008,
        mass: None,
        reservations: vec![],
    }
}

fn estimates(case: &Case<'_>, random: &mut Xoshiro256PlusPlus) -> RunEstimates {
    RunEstimates::from_history(&mint(case, random), facts()).unwrap()
}

/// Effective samples of long waves (series) and of the others (block sums), within 10 % of the closed form on average.
///
/// The autocorrelation of |h|^2 is rho_h^2 (Gaussian fourth moments): g = 1 + 2 sum_k phi^(2 k) cos^2(k angle). The cases:
/// overdamped, with |h|^2 from 2 ps at the smallest q down; and underdamped at 1/ps, with several turns between frames at large q.
#[test]
fn effective_samples_are_right_on_average() {
    let modes = modes(8);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(11);
    let overdamped = |q: f64| (-INTERVAL / 4.0 * (1.0 + q)).exp();
    let underdamped = |_: f64| (-INTERVAL / 2.0).exp();
    // omega = sqrt(kappa/rho) q^2: about 48 A^2/ps for 1 eV on 7e-7 kg/m^2.
    let swinging = |q: f64| 48.0 * q * q * INTERVAL;
    let still = |_: f64| 0.0;
    let cases: [(&str, &dyn Fn(f64) -> f64, &dyn Fn(f64) -> f64); 2] = [
        ("overdamped", &overdamped, &still),
        ("underdamped", &underdamped, &swinging),
    ];
    for (name, correlation, angle) in cases {
        let case = Case {
            modes: &modes,
            correlation,
            angle,
            power: &|q| 1e-3 / q.powi(4),
            ripple: &|_| 0.0,
            block_frames: 16,
            frames: 301,
        };
        let sets = 40;
        let mut ratios = vec![0.0; modes.len()];
        let mut power = 0.0;
        for _ in 0..sets {
            let run = estimates(&case, &mut random);
            for (m, mode) in run.spectrum.modes.iter().enumerate() {
                let q = wave_vector(mode.integers);
                let rho = |k: i32| correlation(q).powi(k) * (f64::from(k) * angle(q)).cos();
                let g = 1.0 + 2.0 * (1..200).map(|k| rho(k).powi(2)).sum::<f64>();
                ratios[m] += mode.effective_samples * g / run.frames as f64 / f64::from(sets);
                power += mode.power / (1e-3 / mode.length.powi(4)) / f64::from(sets);
            }
        }
        let mean = |r: &[f64]| r.iter().sum::<f64>() / r.len() as f64;
        let (long, others) = (mean(&ratios[..LONG_WAVES]), mean(&ratios[LONG_WAVES..]));
        let power = power / modes.len() as f64;
        println!("{name}: n over truth: long waves {long:.3}, others {others:.3}; power {power:.4}");
        assert!(
            (long - 1.0).abs() < 0.1 && (others - 1.0).abs() < 0.1,
            "{name}: {long} {others}"
        );
        assert!((power - 1.0).abs() < 0.02, "{name}: {power}");
    }
}

/// A row's error covers the row's true power, and rows hold modes within 1 % of their first.
#[test]
fn row_errors_cover_the_truth() {
    let modes = modes(8);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(12);
    let case = Case {
        modes: &modes,
        correlation: &|_| 0.7,
        angle: &|_| 0.0,
        power: &|q| 1e-3 / q.powi(4),
        ripple: &|_| 0.0,
        block_frames: 16,
        frames: 301,
    };
    let (mut inside, mut total) = (0, 0);
    for _ in 0..40 {
        let run = estimates(&case, &mut random);
        let mut next = 0;
        for row in &run.spectrum.rows {
            assert_eq!(row.modes.start, next);
            next = row.modes.end;
            let first = run.spectrum.modes[row.modes.start].length;
            assert!(run.spectrum.modes[row.modes.end - 1].length <= 1.01 * first);
            // q^4 <|h|^2> is 1e-3 in every mode, up to the breathing of the cell.
            inside += i32::from((row.weighted_power - 1e-3).abs() < row.weighted_power_error);
            total += 1;
        }
        assert_eq!(next, modes.len());
    }
    let share = f64::from(inside) / f64::from(total);
    println!("rows within one error: {share:.3} of {total}");
    assert!((0.60..0.74).contains(&share), "{share}");
}

/// A planted static ripple is removed; chance removes next to none.
#[test]
fn static_ripples_are_taken_out() {
    let modes = modes(8);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(13);
    let amplitude = (1e-3 / wave_vector([5, 3]).powi(4)).sqrt();
    let planted = modes.integers.iter().position(|&m| m == [5, 3]).unwrap();
    let mut case = Case {
        modes: &modes,
        correlation: &|_| 0.6,
        angle: &|_| 0.0,
        power: &|q| 1e-3 / q.powi(4),
        ripple: &|m| if m == planted { amplitude } else { 0.0 },
        block_frames: 16,
        frames: 301,
    };
    let run = estimates(&case, &mut random);
    let mode = run.spectrum.modes.iter().find(|m| m.integers == [5, 3]).unwrap();
    assert!(mode.static_removed);
    let thermal = mode.power / amplitude.powi(2);
    assert!(
        (thermal - 1.0).abs() < 4.0 / mode.effective_samples.sqrt(),
        "{thermal}"
    );
    case.ripple = &|_| 0.0;
    let removed: usize = (0..40)
        .map(|_| {
            estimates(&case, &mut random)
                .spectrum
                .modes
                .iter()
                .filter(|m| m.static_removed)
                .count()
        })
        .sum();
    let share = removed as f64 / (40 * modes.len()) as f64;
    println!("removed by chance: {share:.5}");
    assert!(share < 3e-3, "{share} removed, p is 0.001");
}

/// Strains of variance 1e-6 in e1 and e2, none in e6.
#[test]
fn strains_have_the_planted_covariance() {
    let modes = modes(6);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(14);
    let case = Case {
        modes: &modes,
        correlation: &|_| 0.5,
        angle: &|_| 0.0,
        power: &|q| 1e-3 / q.powi(4),
        ripple: &|_| 0.0,
        block_frames: 16,
        frames: 4000,
    };
    let run = estimates(&case, &mut random);
    for i in 0..2 {
        assert!(
            (run.strain.covariance[i][i] / 1e-6 - 1.0).abs() < 0.1,
            "{:?}",
            run.strain.covariance
        );
    }
    assert!(run.strain.covariance[0][1].abs() < 1e-7);
    assert_eq!(run.strain.free, [true, true, false]);
    assert!(!run.strain.coupled && !run.cell_is_fixed());
    assert!((run.area.value - SIDE * SIDE).abs() < 4.0 * run.area.error);
    let truth: f64 = run.spectrum.modes.iter().map(|m| 1e-3 / m.length.powi(2)).sum();
    let excess = run.excess_area.unwrap();
    assert!(
        (excess.value - truth).abs() < 4.0 * excess.error,
        "{excess:?} against {truth}"
    );
}

/// Two halves pooled hold the samples of both and weigh their means by frames.
#[test]
fn replicas_pool() {
    let modes = modes(7);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(15);
    let mut case = Case {
        modes: &modes,
        correlation: &|_| 0.5,
        angle: &|_| 0.0,
        power: &|q| 1e-3 / q.powi(4),
        ripple: &|_| 0.0,
        block_frames: 16,
        frames: 160,
    };
    let first = estimates(&case, &mut random);
    case.frames = 480;
    let second = estimates(&case, &mut random);
    let pooled = pool(vec![first.clone(), second.clone()]).unwrap().unwrap();
    assert_eq!(pooled.frames, first.frames + second.frames);
    let share = first.frames as f64 / pooled.frames as f64;
    for mode in &pooled.spectrum.modes {
        let of = |run: &RunEstimates| {
            run.spectrum
                .modes
                .iter()
                .find(|m| m.integers == mode.integers)
                .unwrap()
                .clone()
        };
        let (x, y) = (of(&first), of(&second));
        assert!((mode.power / (share * x.power + (1.0 - share) * y.power) - 1.0).abs() < 1e-12);
        assert!((mode.effective_samples - x.effective_samples - y.effective_samples).abs() < 1e-9);
    }
    assert_eq!(
        pooled.spectrum.block_powers.nrows(),
        pooled.spectrum.block_frames.len()
    );
    assert_eq!(pool(vec![]).unwrap(), None);
}

/// Empty and one-frame blocks, few frames, other block lengths: estimates or a stated error, never a panic.
#[test]
fn odd_histories_do_not_panic() {
    let modes = modes(8);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(16);
    for (frames, block_frames) in [
        (0, 16),
        (1, 16),
        (2, 16),
        (3, 1),
        (5, 2),
        (17, 16),
        (19, 4),
        (33, 16),
        (64, 1),
        (301, 400),
    ] {
        let case = Case {
            modes: &modes,
            correlation: &|_| 0.5,
            angle: &|_| 0.0,
            power: &|q| 1e-3 / q.powi(4),
            ripple: &|_| 0.0,
            block_frames,
            frames,
        };
        let mut history = mint(&case, &mut random);
        let mut empty = history.clone();
        empty.blocks.insert(
            0,
            BlockRecord {
                frames: 0,
                records: vec![],
            },
        );
        let found = RunEstimates::from_history(&history, facts());
        if frames < 2 {
            assert_eq!(found, Err(EstimateError::TooFewFrames { found: frames }));
            continue;
        }
        let run = found.unwrap();
        assert!(
            run.area.error.is_finite()
                && run
                    .spectrum
                    .modes
                    .iter()
                    .all(|m| m.power > 0.0 && m.effective_samples >= 1.0)
        );
        assert!(
            run.spectrum
                .rows
                .iter()
                .all(|r| r.power_error.is_finite() && r.power_error > 0.0)
        );
        let with_empty = RunEstimates::from_history(&empty, facts()).unwrap();
        assert_eq!(with_empty.spectrum, run.spectrum);
        history.blocks[0].records.retain(|r| r.measurement != "strain");
        assert!(matches!(
            RunEstimates::from_history(&history, facts()),
            Err(EstimateError::Missing {
                block: 0,
                measurement: "strain",
                ..
            })
        ));
    }
}
