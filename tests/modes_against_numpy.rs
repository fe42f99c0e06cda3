//! Modes from the non-uniform FFT against a plain direct sum that numpy computes (`oracles/modes_oracle.py`).
//! What belongs here: modes handed to the outside oracle. `tests/all.sh` names the Python to use in
//! PLANISH_ORACLE_PYTHON; without it the checks say that they are skipped.

use std::fs::File;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use ndarray::Array2;
use ndarray_npy::NpzWriter;
use num_complex::Complex64;
use planish::numerics::NonuniformFft;
use rand::{RngExt, SeedableRng};
use rand_distr::StandardNormal;
use rand_xoshiro::Xoshiro256PlusPlus;

/// The tolerance that the projection plans its transforms for.
const TOLERANCE: f64 = 1e-9;

struct OracleCase {
    sites: Array2<f64>,
    heights: Array2<f64>,
    integers: Array2<i32>,
    modes: Array2<Complex64>,
}

impl OracleCase {
    /// A rippled sheet: 42 x 24 sites scattered about a lattice, heights from waves whose power falls as q^-4, noise on
    /// top. The smallest modes stand some 1e4 below the largest, as on a real sheet.
    fn of_rippled_sheet(frames: usize) -> Self {
        let mut rng = Xoshiro256PlusPlus::seed_from_u64(2026);
        let (n1, n2, max) = (42, 24, 20);
        let points: Vec<[f64; 2]> = (0..n1)
            .flat_map(|i| (0..n2).map(move |k| [i, k]))
            .map(|[i, k]| {
                let mut near = |index: i32, count: i32| {
                    let scatter: f64 = rng.sample(StandardNormal);
                    (f64::from(index) + 0.2 * scatter) / f64::from(count)
                };
                [near(i, n1), near(k, n2)]
            })
            .collect();
        let integers: Vec<[i32; 2]> = (0..=max)
            .flat_map(|m1| (-max..=max).map(move |m2| [m1, m2]))
            .filter(|&m| m > [0, 0])
            .collect();

        let plan = NonuniformFft::plan(&points, [max as usize; 2], TOLERANCE);
        let mut scratch = plan.scratch();
        let mut heights = Array2::zeros((frames, points.len()));
        let mut modes = Array2::zeros((frames, integers.len()));
        for frame in 0..frames {
            let strengths = rippled_heights(&points, &mut rng);
            let mut out = vec![Complex64::default(); integers.len()];
            plan.modes_into(&strengths, &mut scratch, &integers, &mut out);
            for (j, height) in strengths.iter().enumerate() {
                heights[[frame, j]] = *height;
            }
            for (k, mode) in out.iter().enumerate() {
                modes[[frame, k]] = mode / points.len() as f64;
            }
        }
        Self {
            sites: Array2::from(points),
            heights,
            integers: Array2::from(integers),
            modes,
        }
    }

    fn write(&self, path: &Path) {
        let mut npz = NpzWriter::new(File::create(path).expect("the temporary folder is writable"));
        npz.add_array("sites", &self.sites).expect("sites are written");
        npz.add_array("heights", &self.heights)
            .expect("heights are written");
        npz.add_array("integers", &self.integers)
            .expect("integers are written");
        npz.add_array("modes", &self.modes).expect("modes are written");
        npz.finish().expect("the archive closes");
    }

    fn root_mean_square(&self) -> f64 {
        (self.modes.iter().map(Complex64::norm_sqr).sum::<f64>() / self.modes.len() as f64).sqrt()
    }
}

fn rippled_heights(points: &[[f64; 2]], rng: &mut Xoshiro256PlusPlus) -> Vec<f64> {
    let mut heights: Vec<f64> = points
        .iter()
        .map(|_| 1e-3 * rng.sample::<f64, _>(StandardNormal))
        .collect();
    for m1 in 0..6_i32 {
        for m2 in -5..6_i32 {
            let square = f64::from(m1 * m1 + m2 * m2);
            if square == 0.0 {
                continue;
            }
            let amplitude = rng.sample::<f64, _>(StandardNormal) / square;
            let start: f64 = rng.random();
            for (height, [x, y]) in heights.iter_mut().zip(points) {
                let turns = f64::from(m1) * x + f64::from(m2) * y + start;
                *height += amplitude * (std::f64::consts::TAU * turns).cos();
            }
        }
    }
    heights
}

/// Runs the oracle on a file; `None`, said aloud, where no Python was named.
fn ask_numpy(path: &Path) -> Option<Output> {
    let Some(python) = std::env::var_os("PLANISH_ORACLE_PYTHON") else {
        // Written to the stream itself: the test harness captures only the print macros.
        writeln!(
            std::io::stderr(),
            "skipped: PLANISH_ORACLE_PYTHON is not set; `bash tests/all.sh` sets it"
        )
        .expect("stderr is writable");
        return None;
    };
    let script: PathBuf = [env!("CARGO_MANIFEST_DIR"), "tests", "oracles", "modes_oracle.py"]
        .iter()
        .collect();
    let output = Command::new(&python)
        .arg(script)
        .arg(path)
        .output()
        .unwrap_or_else(|error| panic!("cannot start {}: {error}", python.display()));
    Some(output)
}

#[test]
fn modes_are_the_direct_sum() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join("modes.npz");
    OracleCase::of_rippled_sheet(5).write(&path);
    if let Some(output) = ask_numpy(&path) {
        assert!(
            output.status.success(),
            "{}{}",
            String::from_utf8_lossy(&output.stdout),
            String::from_utf8_lossy(&output.stderr)
        );
    }
}

/// The oracle can fail: one mode off by two parts in a million of the root-mean-square mode is found.
#[test]
fn a_wrong_mode_is_found() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join("modes.npz");
    let mut case = OracleCase::of_rippled_sheet(2);
    let off = 2e-6 * case.root_mean_square();
    case.modes[[1, 17]] += off;
    case.write(&path);
    if let Some(output) = ask_numpy(&path) {
        assert_eq!(
            output.status.code(),
            Some(1),
            "{}",
            String::from_utf8_lossy(&output.stderr)
        );
    }
}
