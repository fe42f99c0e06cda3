//! The non-uniform fast Fourier transform and the planned exact sums, held against the sum written out term by term.
//! What belongs here: accuracy, symmetry and reproducibility of the transforms, on points of every awkward kind.

use num_complex::Complex64;
use planish::numerics::{DirectSum, NonuniformFft, mode_by_definition, modes_of_moving_points};
use proptest::prelude::*;
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

/// What the transform promises at the tolerance it is planned for here, relative to sum |c_j|.
const TOLERANCE: f64 = 1e-9;

fn every_mode([m1, m2]: [i32; 2]) -> Vec<[i32; 2]> {
    (-m1..=m1).flat_map(|i| (-m2..=m2).map(move |k| [i, k])).collect()
}

fn random_points(count: usize, rng: &mut Xoshiro256PlusPlus) -> Vec<[f64; 2]> {
    (0..count)
        .map(|_| [rng.random::<f64>(), rng.random::<f64>()])
        .collect()
}

fn random_strengths(count: usize, rng: &mut Xoshiro256PlusPlus) -> Vec<f64> {
    (0..count).map(|_| 2.0 * rng.random::<f64>() - 1.0).collect()
}

fn fast_modes(points: &[[f64; 2]], strengths: &[f64], max_modes: [i32; 2], tolerance: f64) -> Vec<Complex64> {
    let wanted = every_mode(max_modes);
    let plan = NonuniformFft::plan(points, max_modes.map(|m| m as usize), tolerance);
    let mut out = vec![Complex64::default(); wanted.len()];
    plan.modes_into(strengths, &mut plan.scratch(), &wanted, &mut out);
    out
}

/// Largest error over all modes, relative to sum |c_j|.
fn largest_error(points: &[[f64; 2]], strengths: &[f64], max_modes: [i32; 2], tolerance: f64) -> f64 {
    let norm: f64 = strengths.iter().map(|c| c.abs()).sum();
    fast_modes(points, strengths, max_modes, tolerance)
        .iter()
        .zip(every_mode(max_modes))
        .map(|(fast, m)| (fast - mode_by_definition(points, strengths, m)).norm() / norm)
        .fold(0.0, f64::max)
}

#[test]
fn random_points_even_and_odd_sizes() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(11);
    for (count, max_modes) in [
        (1, [3, 3]),
        (97, [0, 0]),
        (200, [1, 17]),
        (333, [16, 9]),
        (1008, [24, 23]),
    ] {
        let points = random_points(count, &mut rng);
        let strengths = random_strengths(count, &mut rng);
        let error = largest_error(&points, &strengths, max_modes, TOLERANCE);
        assert!(
            error < TOLERANCE,
            "{count} points, modes to {max_modes:?}: error {error:e}"
        );
    }
}

#[test]
fn clustered_points() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(12);
    let points: Vec<[f64; 2]> = random_points(400, &mut rng)
        .iter()
        .map(|[x, y]| [0.999 + 1e-3 * x * x, 1e-4 * y])
        .collect();
    let strengths = random_strengths(400, &mut rng);
    let error = largest_error(&points, &strengths, [20, 20], TOLERANCE);
    assert!(error < TOLERANCE, "error {error:e}");
}

/// Points on a lattice, some exactly on grid lines and on the cell's edge: sums vanish exactly but for lattice modes.
#[test]
fn lattice_points_give_only_lattice_modes() {
    let (n1, n2) = (12, 10);
    let points: Vec<[f64; 2]> = (0..n1)
        .flat_map(|i| (0..n2).map(move |k| [f64::from(i) / f64::from(n1), f64::from(k) / f64::from(n2)]))
        .collect();
    let strengths = vec![1.0; points.len()];
    let modes = fast_modes(&points, &strengths, [13, 11], TOLERANCE);
    for (mode, [m1, m2]) in modes.iter().zip(every_mode([13, 11])) {
        let exact = if m1 % n1 == 0 && m2 % n2 == 0 {
            points.len() as f64
        } else {
            0.0
        };
        assert!(
            (mode - exact).norm() < TOLERANCE * points.len() as f64,
            "mode ({m1}, {m2}): {mode}"
        );
    }
}

/// The same points moved by whole periods are the same points; quarters are exact in binary, so that nothing is rounded.
#[test]
fn points_outside_the_cell_wrap() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(13);
    let points: Vec<[f64; 2]> = random_points(150, &mut rng)
        .iter()
        .map(|p| p.map(|x| (x * 1024.0).floor() / 1024.0))
        .collect();
    let strengths = random_strengths(150, &mut rng);
    let moved: Vec<[f64; 2]> = points
        .iter()
        .enumerate()
        .map(|(j, [x, y])| [x + (j % 7) as f64 - 3.0, y - (j % 5) as f64])
        .collect();
    assert_eq!(
        fast_modes(&points, &strengths, [9, 9], TOLERANCE),
        fast_modes(&moved, &strengths, [9, 9], TOLERANCE)
    );
    let tiny_negative = [[-1e-30, -1e-18], [1.0 - f64::EPSILON / 2.0, -0.0]];
    let error = largest_error(&tiny_negative, &[1.0, -0.5], [9, 9], TOLERANCE);
    assert!(error < TOLERANCE, "error {error:e}");
}

#[test]
fn tolerance_is_kept_from_coarse_to_fine() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(14);
    let points = random_points(300, &mut rng);
    let strengths = random_strengths(300, &mut rng);
    for digits in 1..=13 {
        let tolerance = 10_f64.powi(-digits);
        let error = largest_error(&points, &strengths, [15, 15], tolerance);
        assert!(error < tolerance, "tolerance {tolerance:e}: error {error:e}");
    }
    // A looser tolerance must buy something: the kernel is not simply always as wide as can be.
    assert!(largest_error(&points, &strengths, [15, 15], 1e-2) > 1e-9);
}

#[test]
fn one_point_is_a_plane_wave() {
    let modes = fast_modes(&[[0.3, 0.85]], &[2.0], [6, 5], TOLERANCE);
    for (mode, [m1, m2]) in modes.iter().zip(every_mode([6, 5])) {
        let angle = -std::f64::consts::TAU * (0.3 * f64::from(m1) + 0.85 * f64::from(m2));
        assert!((mode - Complex64::from_polar(2.0, angle)).norm() < 2.0 * TOLERANCE);
    }
}

#[test]
fn no_points_give_zero() {
    assert!(
        fast_modes(&[], &[], [4, 4], TOLERANCE)
            .iter()
            .all(|f| *f == Complex64::default())
    );
    let mut out = [Complex64::new(1.0, 1.0)];
    DirectSum::plan(&[], &[[1, 0]]).modes_into(&[], &mut out);
    assert_eq!(out, [Complex64::default()]);
}

/// A plan is used for many frames: what an earlier frame left in the scratch must not reach a later one, and other
/// points through the same planned transforms give what a plan of their own gives.
#[test]
fn scratch_and_plan_are_reusable() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(15);
    let wanted = every_mode([8, 12]);
    let first = random_points(120, &mut rng);
    let second = random_points(75, &mut rng);
    let strengths: Vec<Vec<f64>> = (0..3).map(|_| random_strengths(120, &mut rng)).collect();
    let plan = NonuniformFft::plan(&first, [8, 12], TOLERANCE);
    let mut scratch = plan.scratch();
    let mut out = vec![Complex64::default(); wanted.len()];
    for frame in &strengths {
        plan.modes_into(frame, &mut scratch, &wanted, &mut out);
        assert_eq!(out, fast_modes(&first, frame, [8, 12], TOLERANCE));
    }
    let moved = plan.at_points(&second);
    moved.modes_into(&strengths[0][..75], &mut scratch, &wanted, &mut out);
    assert_eq!(out, fast_modes(&second, &strengths[0][..75], [8, 12], TOLERANCE));
}

/// Threads share a plan, and a subset of modes has the bits it has among all of them.
#[test]
fn a_shared_plan_gives_the_same_bits_on_every_thread() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(16);
    let points = random_points(500, &mut rng);
    let strengths = random_strengths(500, &mut rng);
    let plan = NonuniformFft::plan(&points, [11, 11], TOLERANCE);
    let wanted = [[0, 0], [11, -11], [-3, 7], [11, 11]];
    let compute = || {
        let mut out = vec![Complex64::default(); wanted.len()];
        plan.modes_into(&strengths, &mut plan.scratch(), &wanted, &mut out);
        out
    };
    let (here, there) = std::thread::scope(|scope| {
        let handle = scope.spawn(compute);
        (compute(), handle.join().expect("the other thread ends"))
    });
    assert_eq!(here, there);
    let all = fast_modes(&points, &strengths, [11, 11], TOLERANCE);
    for (mode, m) in here.iter().zip(wanted) {
        let place = every_mode([11, 11])
            .iter()
            .position(|&other| other == m)
            .expect("among all modes");
        assert_eq!(*mode, all[place]);
    }
}

#[test]
fn planned_and_moving_exact_sums_are_the_definition() {
    let mut rng = Xoshiro256PlusPlus::seed_from_u64(17);
    let points: Vec<[f64; 2]> = random_points(203, &mut rng)
        .iter()
        .map(|p| p.map(|x| 6.0 * x - 3.0))
        .collect();
    let strengths = random_strengths(203, &mut rng);
    let norm: f64 = strengths.iter().map(|c| c.abs()).sum();
    let wanted = every_mode([7, 6]);
    let mut planned = vec![Complex64::default(); wanted.len()];
    let mut moving = planned.clone();
    DirectSum::plan(&points, &wanted).modes_into(&strengths, &mut planned);
    modes_of_moving_points(&points, &strengths, &wanted, &mut moving);
    for ((planned, moving), m) in planned.iter().zip(&moving).zip(&wanted) {
        let exact = mode_by_definition(&points, &strengths, *m);
        assert!((planned - exact).norm() < 1e-14 * norm, "planned {m:?}");
        assert!((moving - exact).norm() < 1e-14 * norm, "moving {m:?}");
    }
}

/// The definition itself, against values worked out by hand: a quarter period turns by -i.
#[test]
fn definition_by_hand() {
    let f = mode_by_definition(&[[0.25, 0.0], [0.0, 0.5]], &[1.0, 3.0], [1, 1]);
    assert!((f - Complex64::new(-3.0, -1.0)).norm() < 1e-15, "{f}");
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(48))]

    #[test]
    fn any_points_within_tolerance_and_conjugate(
        sources in prop::collection::vec((-20.0..20.0_f64, -20.0..20.0_f64, -5.0..5.0_f64), 1..60),
        m1 in 0..14_i32,
        m2 in 0..14_i32,
    ) {
        let points: Vec<[f64; 2]> = sources.iter().map(|s| [s.0, s.1]).collect();
        let strengths: Vec<f64> = sources.iter().map(|s| s.2).collect();
        prop_assert!(largest_error(&points, &strengths, [m1, m2], TOLERANCE) < TOLERANCE);

        // Strengths are real: f(-m) is the conjugate of f(m). `every_mode` lists -m where it lists m, backwards. On the
        // line m2 = 0 both are computed, so there they agree to rounding only.
        let modes = fast_modes(&points, &strengths, [m1, m2], TOLERANCE);
        let norm: f64 = strengths.iter().map(|c| c.abs()).sum();
        for (f, g) in modes.iter().zip(modes.iter().rev()) {
            prop_assert!((f - g.conj()).norm() <= 1e-13 * norm);
        }
    }
}
