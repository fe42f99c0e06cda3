//! Measured runs on disk: one `.npz` per run in `blocks/`, any array of which numpy opens; what makes a re-run cheap.
//!
//! | array | shape | what |
//! | --- | --- | --- |
//! | `about` | (bytes,) | JSON: format, key, facts of the sheet, times, names of series columns |
//! | `modes`, `zone_weight` | (K, 2), (K,) | the integers of each mode, its weight in the first zone |
//! | `block_frames` | (B,) | frames in each block |
//! | `sites`, `cell` | (N, 3), (3, 3) | reference sites (scaled, scaled, height in A) and their mean cell in A, rows a, b, c |
//! | `NAME.series` | (frames, columns) | the per-frame part of measurement NAME |
//! | `NAME.height`, `.power`, `.power_squared`, `.lagged` | (B, modes) and (B, lags, modes) | its sums, block by block |

use std::io::{Cursor, Read, Seek};
use std::path::Path;

use ndarray::{Array1, Array2, Array3, Axis, Slice};
use ndarray_npy::{NpzReader, NpzWriter, ReadNpzError, WriteNpzError};
use num_complex::Complex64;
use serde::{Deserialize, Serialize};
use thiserror::Error;

use super::measure::{MeasuredRun, SheetFacts};
use crate::frames::Cell;
use crate::measurements::{BlockRecord, History, LAGS, ModeSums, Record, Series};
use crate::sheet::ModeSet;

/// Version of the layout above; files of another one are measured again.
const FORMAT: &str = "planish.blocks/1";

/// The part of a stored run that is no array.
#[derive(Serialize, Deserialize)]
struct About {
    format: String,
    key: String,
    facts: SheetFacts,
    frame_interval_ps: Option<f64>,
    first_time_ps: Option<f64>,
    measurements: Vec<StoredMeasurement>,
}

/// What a stored measurement has.
#[derive(Serialize, Deserialize)]
struct StoredMeasurement {
    name: String,
    /// Names of the series' columns, where there is a series.
    columns: Option<Vec<String>>,
    /// Whether there are sums.
    sums: bool,
}

/// A stored run that cannot be used.
#[derive(Debug, Error)]
pub enum BlockStoreError {
    /// The file could not be made.
    #[error("cannot store measured blocks: {0}")]
    Write(#[from] WriteNpzError),
    /// The file is not what this program writes.
    #[error("cannot read stored blocks: {0}")]
    Read(#[from] ReadNpzError),
    /// The part that is no array is damaged.
    #[error("stored blocks are damaged: {0}")]
    About(#[from] serde_json::Error),
    /// Arrays that do not belong together.
    #[error("stored blocks are damaged: {0}")]
    Shape(String),
}

/// The bytes of the file that keeps `run` under `key`.
///
/// # Errors
/// Where an array cannot be encoded.
pub fn encode(run: &MeasuredRun, key: &str) -> Result<Vec<u8>, BlockStoreError> {
    let history = &run.history;
    let mut writer = NpzWriter::new(Cursor::new(Vec::new()));
    let mut measurements = Vec::new();
    let first = history.blocks.first().map_or(&[][..], |block| &block.records);
    for (place, record) in first.iter().enumerate() {
        measurements.push(StoredMeasurement {
            name: record.measurement.clone(),
            columns: record.series.as_ref().map(|series| series.columns.clone()),
            sums: record.sums.is_some(),
        });
        write_measurement(&mut writer, history, place, &record.measurement)?;
    }
    let about = About {
        format: FORMAT.to_owned(),
        key: key.to_owned(),
        facts: run.facts.clone(),
        frame_interval_ps: history.frame_interval_ps,
        first_time_ps: history.first_time_ps,
        measurements,
    };
    writer.add_array("about", &Array1::from(serde_json::to_vec(&about)?))?;
    let integers: Vec<i32> = history.modes.integers.iter().flatten().copied().collect();
    let integers = Array2::from_shape_vec((history.modes.len(), 2), integers).expect("two integers a mode");
    writer.add_array("modes", &integers)?;
    writer.add_array("zone_weight", &Array1::from(history.modes.zone_weight.clone()))?;
    let frames: Vec<u64> = history.blocks.iter().map(|block| block.frames as u64).collect();
    writer.add_array("block_frames", &Array1::from(frames))?;
    writer.add_array("sites", &rows_of(&run.sites))?;
    writer.add_array("cell", &rows_of(&run.cell.vectors))?;
    Ok(writer.finish()?.into_inner())
}

/// Triples as the rows of an array.
fn rows_of(triples: &[[f64; 3]]) -> Array2<f64> {
    Array2::from_shape_fn((triples.len(), 3), |(row, column)| triples[row][column])
}

/// Triples from the rows of the array `name`.
fn read_rows<R: Read + Seek>(
    reader: &mut NpzReader<R>,
    name: &str,
) -> Result<Vec<[f64; 3]>, BlockStoreError> {
    let array: Array2<f64> = reader.by_name(name)?;
    if array.ncols() != 3 {
        return Err(BlockStoreError::Shape(format!(
            "{name} has {} columns, not 3",
            array.ncols()
        )));
    }
    Ok(array
        .rows()
        .into_iter()
        .map(|row| [row[0], row[1], row[2]])
        .collect())
}

/// Writes the arrays of the measurement that stands at `place` in every block.
fn write_measurement(
    writer: &mut NpzWriter<Cursor<Vec<u8>>>,
    history: &History,
    place: usize,
    name: &str,
) -> Result<(), BlockStoreError> {
    let records: Vec<&Record> = history.blocks.iter().map(|block| &block.records[place]).collect();
    let series: Vec<_> = records
        .iter()
        .filter_map(|r| r.series.as_ref())
        .map(|s| s.values.view())
        .collect();
    if !series.is_empty() {
        let joined =
            ndarray::concatenate(Axis(0), &series).map_err(|e| BlockStoreError::Shape(e.to_string()))?;
        writer.add_array(format!("{name}.series"), &joined)?;
    }
    let sums: Vec<&ModeSums> = records.iter().filter_map(|r| r.sums.as_ref()).collect();
    if let Some(first) = sums.first() {
        let shape = (sums.len(), first.power.len());
        let height: Array2<Complex64> = Array2::from_shape_fn(shape, |(b, k)| sums[b].height[k]);
        writer.add_array(format!("{name}.height"), &height)?;
        writer.add_array(
            format!("{name}.power"),
            &Array2::from_shape_fn(shape, |(b, k)| sums[b].power[k]),
        )?;
        let squared = Array2::from_shape_fn(shape, |(b, k)| sums[b].power_squared[k]);
        writer.add_array(format!("{name}.power_squared"), &squared)?;
        let lagged: Array3<Complex64> =
            Array3::from_shape_fn((shape.0, LAGS.len(), shape.1), |(b, l, k)| sums[b].lagged[l][k]);
        writer.add_array(format!("{name}.lagged"), &lagged)?;
    }
    Ok(())
}

/// The run stored in `path`, if it is there, whole, and was measured under `key`; `None` otherwise.
#[must_use]
pub fn load(path: &Path, key: &str) -> Option<MeasuredRun> {
    let file = std::fs::File::open(path).ok()?;
    // A store that is damaged or from another version is measured again; nothing is lost by not saying so.
    decode(file, key).ok().flatten()
}

/// Decodes a stored run; `None` where it was measured under another key.
///
/// # Errors
/// Where the file is not one this version writes, or is damaged.
pub fn decode<R: Read + Seek>(file: R, key: &str) -> Result<Option<MeasuredRun>, BlockStoreError> {
    let mut reader = NpzReader::new(file)?;
    let about: Array1<u8> = reader.by_name("about")?;
    let about: About = serde_json::from_slice(&about.to_vec())?;
    if about.format != FORMAT || about.key != key {
        return Ok(None);
    }
    let integers: Array2<i32> = reader.by_name("modes")?;
    let zone_weight: Array1<f64> = reader.by_name("zone_weight")?;
    let modes = ModeSet {
        integers: integers.rows().into_iter().map(|row| [row[0], row[1]]).collect(),
        zone_weight: zone_weight.to_vec(),
    };
    let frames: Array1<u64> = reader.by_name("block_frames")?;
    let mut blocks: Vec<BlockRecord> = frames
        .iter()
        .map(|&frames| BlockRecord {
            frames: frames as usize,
            records: Vec::new(),
        })
        .collect();
    for stored in &about.measurements {
        read_measurement(&mut reader, stored, &mut blocks)?;
    }
    let history = History {
        modes,
        frame_interval_ps: about.frame_interval_ps,
        first_time_ps: about.first_time_ps,
        blocks,
    };
    let vectors = read_rows(&mut reader, "cell")?;
    let vectors = vectors
        .try_into()
        .map_err(|_| BlockStoreError::Shape("cell has not three rows".to_owned()))?;
    Ok(Some(MeasuredRun {
        history,
        facts: about.facts,
        sites: read_rows(&mut reader, "sites")?,
        cell: Cell { vectors },
    }))
}

/// Adds the record of one stored measurement to every block.
fn read_measurement<R: Read + Seek>(
    reader: &mut NpzReader<R>,
    stored: &StoredMeasurement,
    blocks: &mut [BlockRecord],
) -> Result<(), BlockStoreError> {
    let name = &stored.name;
    let frames: usize = blocks.iter().map(|block| block.frames).sum();
    let wrong = |what: &str| {
        BlockStoreError::Shape(format!(
            "{name}.{what} has another number of rows than its blocks"
        ))
    };
    let series: Option<Array2<f64>> = if stored.columns.is_some() {
        Some(reader.by_name(&format!("{name}.series"))?)
    } else {
        None
    };
    if series.as_ref().is_some_and(|s| s.nrows() != frames) {
        return Err(wrong("series"));
    }
    let sums = if stored.sums {
        Some(StoredSums::read(reader, name)?)
    } else {
        None
    };
    if sums.as_ref().is_some_and(|s| s.blocks() != blocks.len()) {
        return Err(wrong("sums"));
    }
    let mut first = 0;
    for (index, block) in blocks.iter_mut().enumerate() {
        let last = first + block.frames;
        block.records.push(Record {
            measurement: name.clone(),
            series: series
                .as_ref()
                .zip(stored.columns.as_ref())
                .map(|(values, columns)| Series {
                    columns: columns.clone(),
                    values: values.slice_axis(Axis(0), Slice::from(first..last)).to_owned(),
                }),
            sums: sums.as_ref().map(|sums| sums.block(index)),
        });
        first = last;
    }
    Ok(())
}

/// The summed arrays of one measurement.
struct StoredSums {
    height: Array2<Complex64>,
    power: Array2<f64>,
    power_squared: Array2<f64>,
    lagged: Array3<Complex64>,
}

impl StoredSums {
    fn read<R: Read + Seek>(reader: &mut NpzReader<R>, name: &str) -> Result<Self, BlockStoreError> {
        let sums = Self {
            height: reader.by_name(&format!("{name}.height"))?,
            power: reader.by_name(&format!("{name}.power"))?,
            power_squared: reader.by_name(&format!("{name}.power_squared"))?,
            lagged: reader.by_name(&format!("{name}.lagged"))?,
        };
        let (blocks, modes) = sums.power.dim();
        if sums.height.dim() != (blocks, modes)
            || sums.power_squared.dim() != (blocks, modes)
            || sums.lagged.dim() != (blocks, LAGS.len(), modes)
        {
            return Err(BlockStoreError::Shape(format!(
                "the sums of {name} differ in shape"
            )));
        }
        Ok(sums)
    }

    fn blocks(&self) -> usize {
        self.power.nrows()
    }

    fn block(&self, index: usize) -> ModeSums {
        ModeSums {
            height: self.height.row(index).to_vec(),
            power: self.power.row(index).to_vec(),
            power_squared: self.power_squared.row(index).to_vec(),
            lagged: std::array::from_fn(|lag| {
                self.lagged
                    .index_axis(Axis(0), index)
                    .index_axis(Axis(0), lag)
                    .to_vec()
            }),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Two blocks, the second a short one, with a series and sums.
    fn sample() -> MeasuredRun {
        let block = |frames: usize, seed: f64| {
            let mut sums = ModeSums::zero(2);
            sums.power = vec![seed, 2.0 * seed];
            sums.height = vec![Complex64::new(seed, -1.0), Complex64::new(0.1, seed)];
            sums.lagged[3][1] = Complex64::new(0.0, seed);
            let values = (0..2 * frames).map(|k| seed + k as f64 / 7.0).collect();
            BlockRecord {
                frames,
                records: vec![Record {
                    measurement: "spectrum".to_owned(),
                    series: Some(Series::from_rows(&["x", "y"], values)),
                    sums: Some(sums),
                }],
            }
        };
        let modes = ModeSet {
            integers: vec![[0, 1], [1, -1]],
            zone_weight: vec![1.0, 1.0 / 3.0],
        };
        MeasuredRun {
            history: History {
                modes,
                frame_interval_ps: Some(0.4),
                first_time_ps: None,
                blocks: vec![block(3, 0.1), block(1, 1e-300)],
            },
            facts: SheetFacts {
                atoms: 2,
                mass: Some(24.8),
                planes: 1,
                primitive_cells: None,
                transform: "exact sum".to_owned(),
                cell_height: 40.0,
                frames_in_files: 4,
                first_hop: None,
                notes: vec!["a note".to_owned()],
            },
            sites: vec![[0.1, 0.2, 0.3], [0.4, 0.5, -0.6]],
            cell: Cell {
                vectors: [[10.0, 0.0, 0.0], [3.0, 9.0, 0.0], [0.0, 0.0, 40.0]],
            },
        }
    }

    #[test]
    fn a_stored_run_comes_back_to_the_bit_under_its_key_only() {
        let run = sample();
        let bytes = encode(&run, "key").expect("encoded");
        assert_eq!(decode(Cursor::new(&bytes), "key").expect("whole"), Some(run));
        assert_eq!(decode(Cursor::new(&bytes), "other").expect("whole"), None);
        assert!(
            decode(Cursor::new(&bytes[..bytes.len() / 2]), "key").is_err(),
            "half a file is none"
        );
    }
}
