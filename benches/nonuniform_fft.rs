//! The non-uniform FFT against the exact sums, for one frame of a sheet: where each is the cheaper way.
//!
//! `cargo bench --bench nonuniform_fft`. Read the rows of one sheet against each other: the ratio of the medians is what
//! decides which transform the projection takes.

use divan::{Bencher, black_box};
use num_complex::Complex64;
use planish::numerics::{DirectSum, NonuniformFft, modes_of_moving_points};
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

const TOLERANCE: f64 = 1e-9;

fn main() {
    divan::main();
}

/// A sheet by its number of atoms and the highest mode along each axis.
#[derive(Clone, Copy)]
struct Sheet {
    atoms: usize,
    max_mode: i32,
}

impl std::fmt::Display for Sheet {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{} atoms, {} modes", self.atoms, self.wanted().len())
    }
}

impl Sheet {
    fn points(self) -> Vec<[f64; 2]> {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(1);
        (0..self.atoms).map(|_| [rng.random(), rng.random()]).collect()
    }

    fn strengths(self) -> Vec<f64> {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(2);
        (0..self.atoms).map(|_| 2.0 * rng.random::<f64>() - 1.0).collect()
    }

    /// Half of all modes: q and -q are one.
    fn wanted(self) -> Vec<[i32; 2]> {
        let m = self.max_mode;
        (0..=m)
            .flat_map(|m1| (-m..=m).map(move |m2| [m1, m2]))
            .filter(|&mode| mode > [0, 0])
            .collect()
    }
}

/// Sheets small enough that the exact sum's matrix of phases fits in memory.
const SMALL: [Sheet; 4] = [
    Sheet {
        atoms: 1008,
        max_mode: 2,
    },
    Sheet {
        atoms: 1008,
        max_mode: 6,
    },
    Sheet {
        atoms: 1008,
        max_mode: 20,
    },
    Sheet {
        atoms: 4032,
        max_mode: 20,
    },
];

const LARGE: [Sheet; 1] = [Sheet {
    atoms: 100_000,
    max_mode: 100,
}];

#[divan::bench(args = SMALL.into_iter().chain(LARGE))]
fn fast_transform(bencher: Bencher<'_, '_>, sheet: Sheet) {
    let plan = NonuniformFft::plan(&sheet.points(), [sheet.max_mode as usize; 2], TOLERANCE);
    let (wanted, strengths) = (sheet.wanted(), sheet.strengths());
    let mut scratch = plan.scratch();
    let mut out = vec![Complex64::default(); wanted.len()];
    bencher
        .bench_local(|| plan.modes_into(black_box(&strengths), &mut scratch, &wanted, black_box(&mut out)));
}

#[divan::bench(args = SMALL.into_iter().chain(LARGE))]
fn fast_transform_at_new_points(bencher: Bencher<'_, '_>, sheet: Sheet) {
    let points = sheet.points();
    let plan = NonuniformFft::plan(&points, [sheet.max_mode as usize; 2], TOLERANCE);
    let (wanted, strengths) = (sheet.wanted(), sheet.strengths());
    let mut scratch = plan.scratch();
    let mut out = vec![Complex64::default(); wanted.len()];
    bencher.bench_local(|| {
        plan.at_points(black_box(&points))
            .modes_into(&strengths, &mut scratch, &wanted, black_box(&mut out));
    });
}

#[divan::bench(args = SMALL)]
fn planned_exact_sum(bencher: Bencher<'_, '_>, sheet: Sheet) {
    let (wanted, strengths) = (sheet.wanted(), sheet.strengths());
    let plan = DirectSum::plan(&sheet.points(), &wanted);
    let mut out = vec![Complex64::default(); wanted.len()];
    bencher.bench_local(|| plan.modes_into(black_box(&strengths), black_box(&mut out)));
}

#[divan::bench(args = SMALL)]
fn exact_sum_at_new_points(bencher: Bencher<'_, '_>, sheet: Sheet) {
    let (points, wanted, strengths) = (sheet.points(), sheet.wanted(), sheet.strengths());
    let mut out = vec![Complex64::default(); wanted.len()];
    bencher
        .bench_local(|| modes_of_moving_points(black_box(&points), &strengths, &wanted, black_box(&mut out)));
}
