//! Histories minted from damped standing waves: complex Gaussian modes of known power and correlation on a cell with
//! uncorrelated strains, cut into blocks as a measurement leaves them.

use ndarray::Array2;
use num_complex::Complex64;
use planish::measurements::{BlockRecord, History, ModeSums, Record, Series};
use planish::sheet::{LONG_WAVES, ModeSet};
use rand_distr::{Distribution, StandardNormal};
use rand_xoshiro::Xoshiro256PlusPlus;

pub const INTERVAL: f64 = 0.4;
pub const SIDE: f64 = 52.0;

/// Modes of a square cell with |m| up to `most`, sorted by |q|.
pub fn modes(most: i32) -> ModeSet {
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

pub fn wave_vector([x, y]: [i32; 2]) -> f64 {
    std::f64::consts::TAU / SIDE * f64::from(x * x + y * y).sqrt()
}

/// A property of a wave by its |q|.
pub type OfWave<'a> = &'a dyn Fn(f64) -> f64;

/// One planted case: rho_h(k) = correlation^k cos(k angle), <|h|^2> and mean h, per mode.
pub struct Case<'a> {
    pub modes: &'a ModeSet,
    pub correlation: OfWave<'a>,
    /// Phase in radians by which h oscillates from frame to frame, at |q|.
    pub angle: OfWave<'a>,
    pub power: OfWave<'a>,
    pub ripple: &'a dyn Fn(usize) -> f64,
    pub block_frames: usize,
    pub frames: usize,
}

pub fn mint(case: &Case<'_>, random: &mut Xoshiro256PlusPlus) -> History {
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
