//! The two record shapes, and the only merge in the program: appending records in frame order.

use ndarray::Array2;
use num_complex::Complex64;

use crate::sheet::ModeSet;

/// Lags, in frames, of the products conj(h(t)) h(t + k) that every mode keeps within a block.
pub const LAGS: [usize; 4] = [1, 2, 4, 8];

/// One number (or a few) per frame.
#[derive(Clone, Debug, PartialEq)]
pub struct Series {
    /// Name of each column, with its unit.
    pub columns: Vec<String>,
    /// Shape (frames, columns).
    pub values: Array2<f64>,
}

impl Series {
    /// A series from its values row by row.
    ///
    /// # Panics
    /// Where the values are not whole rows: a measurement's own mistake.
    #[must_use]
    pub fn from_rows(columns: &[&str], values: Vec<f64>) -> Self {
        let shape = (values.len() / columns.len(), columns.len());
        let values = Array2::from_shape_vec(shape, values).expect("a measurement pushes whole rows");
        Self {
            columns: columns.iter().map(|&c| c.to_owned()).collect(),
            values,
        }
    }
}

/// Sums over the frames of a block, one entry per mode that keeps no series of its own.
#[derive(Clone, Debug, PartialEq)]
pub struct ModeSums {
    /// Sum of h, in A.
    pub height: Vec<Complex64>,
    /// Sum of |h|^2, in A^2.
    pub power: Vec<f64>,
    /// Sum of |h|^4, in A^4.
    pub power_squared: Vec<f64>,
    /// Sums of conj(h(t)) h(t + k) over the pairs within the block, one vector for each lag of [`LAGS`], in A^2.
    pub lagged: [Vec<Complex64>; 4],
}

impl ModeSums {
    /// Sums over no frame, for this many modes.
    #[must_use]
    pub fn zero(modes: usize) -> Self {
        Self {
            height: vec![Complex64::default(); modes],
            power: vec![0.0; modes],
            power_squared: vec![0.0; modes],
            lagged: std::array::from_fn(|_| vec![Complex64::default(); modes]),
        }
    }
}

/// What one measurement leaves of one block.
#[derive(Clone, Debug, PartialEq)]
pub struct Record {
    /// Name of the measurement.
    pub measurement: String,
    /// The per-frame part, where there is one.
    pub series: Option<Series>,
    /// The summed part, where there is one.
    pub sums: Option<ModeSums>,
}

/// A closed block: some consecutive frames of a run, and what every measurement made of them.
#[derive(Clone, Debug, PartialEq)]
pub struct BlockRecord {
    /// How many frames the block holds; only a run's last block may hold fewer than the pipeline's `block_frames`.
    pub frames: usize,
    /// One record a measurement, in the order of the registry.
    pub records: Vec<Record>,
}

/// The records of a run in frame order, and what is needed to read them.
#[derive(Clone, Debug, PartialEq)]
pub struct History {
    /// The modes that sums and series of h are keyed by.
    pub modes: ModeSet,
    /// Time between frames, in ps, where known.
    pub frame_interval_ps: Option<f64>,
    /// Time of the first frame, in ps, where known.
    pub first_time_ps: Option<f64>,
    /// The blocks, in frame order.
    pub blocks: Vec<BlockRecord>,
}
