//! Histories minted from Ornstein-Uhlenbeck modes whose relaxation, power, cell and strains are known in closed form:
//! effective samples, rows, static ripples, strains, pooling, and the shapes of history that must not panic.

mod minted_histories;

use minted_histories::{Case, INTERVAL, OfWave, SIDE, mint, modes, wave_vector};
use planish::estimates::{EstimateError, RunEstimates, RunFacts, Tension, pool};
use planish::measurements::BlockRecord;
use planish::sheet::LONG_WAVES;
use rand::SeedableRng;
use rand_xoshiro::Xoshiro256PlusPlus;

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
    let cases: [(&str, OfWave<'_>, OfWave<'_>); 2] = [
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

/// An area that starts far off is cut with its whole blocks; every block stays in the area's record.
#[test]
fn equilibration_is_cut_in_whole_blocks() {
    let modes = modes(8);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(17);
    let case = Case {
        modes: &modes,
        correlation: &|_| 0.5,
        angle: &|_| 0.0,
        power: &|q| 1e-3 / q.powi(4),
        ripple: &|_| 0.0,
        block_frames: 16,
        frames: 301,
    };
    let mut history = mint(&case, &mut random);
    // Five standard deviations of the area, sqrt(2) x 1e-3 x 52^2 = 3.8 A^2, in the first three blocks.
    for block in &mut history.blocks[..3] {
        block.records[0].series.as_mut().unwrap().values += 19.0;
    }
    let run = RunEstimates::from_history(&history, facts()).unwrap();
    assert_eq!(
        (run.cut.frames_read, run.cut.frames_cut, run.cut.blocks_cut),
        (301, 48, 3)
    );
    assert_eq!(
        (run.frames, run.area_blocks.len(), run.spectrum.block_frames.len()),
        (253, 19, 16)
    );
    assert!((run.area.value - SIDE * SIDE).abs() < 4.0 * run.area.error);
    // The middle of block 1 is frame 23.5, and the last block holds 13 frames.
    assert!((run.area_blocks[1].time_ps.unwrap() - 23.5 * INTERVAL).abs() < 1e-12);
    assert_eq!(run.spectrum.block_frames[15], 13);
}

/// A run of more frames than are searched one by one is cut on its block means, and its blocks are joined pairwise.
#[test]
fn long_runs_are_cut_and_stay_bounded() {
    let modes = modes(3);
    let mut random = Xoshiro256PlusPlus::seed_from_u64(18);
    let case = Case {
        modes: &modes,
        correlation: &|_| 0.5,
        angle: &|_| 0.0,
        power: &|q| 1e-3 / q.powi(4),
        ripple: &|_| 0.0,
        block_frames: 16,
        frames: 20_000,
    };
    let mut history = mint(&case, &mut random);
    for block in &mut history.blocks[..200] {
        block.records[0].series.as_mut().unwrap().values += 19.0;
    }
    let run = RunEstimates::from_history(&history, facts()).unwrap();
    assert!((200..210).contains(&run.cut.blocks_cut), "{:?}", run.cut);
    assert_eq!(run.cut.frames_cut, 16 * run.cut.blocks_cut);
    assert!(run.spectrum.block_frames.len() <= 512);
    assert_eq!(run.spectrum.block_frames.iter().sum::<usize>(), run.frames);
}
