//! Laws that every registered measurement keeps: what a block leaves does not depend on how frames were shared out.

use num_complex::Complex64;
use planish::measurements::{BlockRecord, LAGS, OpenBlock, REGISTRY};
use planish::sheet::{LONG_WAVES, ModeSet, Surface};
use rand::{RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

const MODES: usize = 50;

fn modes() -> ModeSet {
    ModeSet {
        integers: (1..=MODES as i32).map(|m| [m, 0]).collect(),
        zone_weight: vec![1.0; MODES],
    }
}

fn surfaces(count: usize) -> Vec<Surface> {
    let mut random = Xoshiro256PlusPlus::seed_from_u64(7);
    (0..count)
        .map(|_| Surface {
            modes: (0..MODES)
                .map(|_| Complex64::new(random.random_range(-1.0..1.0), random.random_range(-1.0..1.0)))
                .collect(),
            metric: [
                100.0 + random.random::<f64>(),
                random.random(),
                90.0 + random.random::<f64>(),
            ],
            mean_height: random.random(),
            tilt: [random.random(), 0.0],
            slope: [0.0, random.random()],
            hopped: None,
        })
        .collect()
}

fn measure(frames: &[Surface], block: usize) -> Vec<BlockRecord> {
    frames
        .chunks(block)
        .map(|chunk| {
            let mut open = OpenBlock::new(&modes());
            for surface in chunk {
                open.observe(surface);
            }
            open.close()
        })
        .collect()
}

/// Appending blocks of any length gives the same series to the bit, and the same plain sums to rounding.
#[test]
fn any_block_length_gives_the_same_series_and_sums() {
    let frames = surfaces(37);
    let whole = &measure(&frames, 37)[0];
    for block in [1, 2, 5, 16, 36] {
        let parts = measure(&frames, block);
        assert_eq!(parts.iter().map(|b| b.frames).sum::<usize>(), 37);
        for (place, row) in REGISTRY.iter().enumerate() {
            let expected = &whole.records[place];
            if let Some(series) = &expected.series {
                let values: Vec<_> = parts
                    .iter()
                    .map(|b| b.records[place].series.as_ref().expect("a series").values.view())
                    .collect();
                let joined = ndarray::concatenate(ndarray::Axis(0), &values).expect("same columns");
                assert_eq!(joined, series.values, "series of {}", row.name);
            }
            if let Some(sums) = &expected.sums {
                for k in 0..sums.power.len() {
                    let total: f64 = parts
                        .iter()
                        .map(|b| b.records[place].sums.as_ref().expect("sums").power[k])
                        .sum();
                    assert!(
                        (total - sums.power[k]).abs() < 1e-12 * total,
                        "power of {}",
                        row.name
                    );
                }
            }
        }
    }
}

/// An empty and a one-frame block close like any other, with the same shapes.
#[test]
fn empty_and_one_frame_blocks_close() {
    let frames = surfaces(1);
    for (block, count) in [
        (OpenBlock::new(&modes()).close(), 0),
        (measure(&frames, 16).remove(0), 1),
    ] {
        assert_eq!(block.frames, count);
        for (record, row) in block.records.iter().zip(REGISTRY) {
            assert_eq!(record.measurement, row.name);
            let series = record
                .series
                .as_ref()
                .expect("every measurement of today has a series");
            assert_eq!(series.values.dim(), (count, series.columns.len()), "{}", row.name);
            if let Some(sums) = &record.sums {
                assert_eq!(sums.power.len(), MODES - LONG_WAVES);
                assert!(sums.lagged.iter().flatten().all(|x| *x == Complex64::default()));
            }
        }
    }
}

/// Sums against the definition, mode by mode, lag by lag.
#[test]
fn sums_follow_their_definition() {
    let frames = surfaces(13);
    let block = &measure(&frames, 16)[0];
    let sums = block.records[0].sums.as_ref().expect("the spectrum has sums");
    for k in 0..MODES - LONG_WAVES {
        let h: Vec<Complex64> = frames.iter().map(|s| s.modes[LONG_WAVES + k]).collect();
        assert!((sums.height[k] - h.iter().sum::<Complex64>()).norm() < 1e-12);
        let fourth: f64 = h.iter().map(|x| x.norm_sqr().powi(2)).sum();
        assert!((sums.power_squared[k] - fourth).abs() < 1e-12);
        for (products, lag) in sums.lagged.iter().zip(LAGS) {
            let pairs: Complex64 = h.iter().zip(&h[lag..]).map(|(x, y)| x.conj() * y).sum();
            assert!((products[k] - pairs).norm() < 1e-12, "lag {lag}");
        }
    }
}
