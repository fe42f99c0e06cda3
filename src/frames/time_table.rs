//! The times of all frames of a file, found without reading it twice where it can be helped.

use super::{Cell, Frame, FrameError, FrameSource};

/// The times of the frames of one file, in ps.
#[derive(Clone, Debug, PartialEq)]
pub enum TimeTable {
    /// The frames have no times, for this reason.
    Absent(String),
    /// Frame k is at `first + k * interval`.
    Even {
        /// Time of the first frame.
        first: f64,
        /// Time between two frames.
        interval: f64,
    },
    /// One time a frame.
    Listed(Vec<f64>),
}

impl TimeTable {
    /// The table of these times: one line where all lie on it (within [`tolerance`]), the times themselves otherwise.
    #[must_use]
    pub(super) fn of_times(times: Vec<f64>) -> Self {
        let (Some(&first), Some(&last), true) = (times.first(), times.last(), times.len() > 1) else {
            return Self::Listed(times);
        };
        let interval = (last - first) / (times.len() - 1) as f64;
        let on_line = |(index, time): (usize, &f64)| {
            (interval.mul_add(index as f64, first) - time).abs() <= tolerance(interval, *time)
        };
        if times.iter().enumerate().all(on_line) {
            return Self::Even { first, interval };
        }
        Self::Listed(times)
    }

    /// The time of frame `index` in ps.
    #[must_use]
    pub fn time(&self, index: usize) -> Option<f64> {
        match self {
            Self::Absent(_) => None,
            Self::Even { first, interval } => Some(interval.mul_add(index as f64, *first)),
            Self::Listed(times) => times.get(index).copied(),
        }
    }
}

/// How far two times may differ and still be the same one: a hundredth of the interval, and the rounding of times that
/// are stored in single precision.
#[must_use]
pub(super) fn tolerance(interval: f64, time: f64) -> f64 {
    4.0f64.mul_add(f64::from(f32::EPSILON) * time.abs(), 0.01 * interval.abs())
}

/// Finds the times by reading frames.
///
/// Frames 0, 1, the last, and those at a quarter, a half and three quarters are read. Where the six lie on one line
/// (within [`tolerance`]) all do: a restart inside the file, which repeats some frames, or a gap shifts every later frame
/// off that line. Otherwise every frame is read once. A file that fools the six is found out when its frames are
/// read, since each frame's own time is compared with the table's.
pub(super) fn probe_times<S: FrameSource + ?Sized>(source: &mut S) -> Result<TimeTable, FrameError> {
    let count = source.len();
    let mut frame = Frame {
        time_ps: None,
        cell: Cell {
            vectors: [[0.0; 3]; 3],
        },
        positions: Vec::new(),
    };
    let mut time_of = |source: &mut S, index: usize| -> Result<Option<f64>, FrameError> {
        source.read(index, &mut frame)?;
        Ok(frame.time_ps.filter(|time| time.is_finite()))
    };
    let absent = || TimeTable::Absent("the file stores none".to_owned());
    if count == 0 {
        return Ok(TimeTable::Listed(Vec::new()));
    }
    let Some(first) = time_of(source, 0)? else {
        return Ok(absent());
    };
    if count == 1 {
        return Ok(TimeTable::Listed(vec![first]));
    }
    let mut even = true;
    let mut interval = 0.0;
    for index in [count - 1, 1, count / 4, count / 2, 3 * count / 4] {
        let Some(time) = time_of(source, index)? else {
            return Ok(absent());
        };
        if index == count - 1 {
            interval = (time - first) / index as f64;
        }
        even = even && (interval.mul_add(index as f64, first) - time).abs() <= tolerance(interval, time);
    }
    if even && interval > 0.0 {
        return Ok(TimeTable::Even { first, interval });
    }
    let mut times = Vec::with_capacity(count);
    for index in 0..count {
        match time_of(source, index)? {
            Some(time) => times.push(time),
            None => return Ok(absent()),
        }
    }
    Ok(TimeTable::Listed(times))
}
