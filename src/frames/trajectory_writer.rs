//! Trajectories in every format that chemfiles writes.

use std::path::{Path, PathBuf};

use chemfiles::{Atom, Trajectory, UnitCell};

use super::chemfiles_thread::{OpenFile, close, on_chemfiles_thread, take_warnings};
use super::{Cell, Frame, FrameError, dot, length};

/// A trajectory being written, its format chosen by chemfiles from the file's extension.
///
/// chemfiles' calls are made on one thread (see `chemfiles_thread`).
#[derive(Debug)]
pub struct TrajectoryWriter {
    path: PathBuf,
    key: u64,
    atoms: usize,
    written: usize,
}

impl TrajectoryWriter {
    /// Extensions, without the dot, of the formats that chemfiles writes with positions and cell.
    #[must_use]
    pub fn extensions() -> Vec<&'static str> {
        chemfiles::formats_list()
            .iter()
            .filter(|format| format.write && format.positions && format.unit_cell)
            .filter_map(|format| format.extension)
            .map(|extension| extension.trim_start_matches('.'))
            .collect()
    }

    /// Opens a file for one sheet whose atoms have these species. An older file of that name is lost.
    ///
    /// # Errors
    /// [`FrameError::Unwritable`] where the extension is of no format that chemfiles writes, or the file cannot be made.
    pub fn create(path: &Path, species: &[String]) -> Result<Self, FrameError> {
        let (file, species) = (path.to_owned(), species.to_vec());
        let atoms = species.len();
        let key = on_chemfiles_thread(move |files| {
            take_warnings();
            let trajectory = Trajectory::open(&file, 'w')?;
            let mut frame = chemfiles::Frame::new();
            for name in &species {
                frame.add_atom(&Atom::new(name.as_str()), [0.0; 3], None);
            }
            Ok::<_, chemfiles::Error>(files.insert(OpenFile { trajectory, frame }))
        })?
        .map_err(|error| FrameError::Unwritable {
            path: path.to_owned(),
            reason: error.message,
        })?;
        Ok(Self {
            path: path.to_owned(),
            key,
            atoms,
            written: 0,
        })
    }

    /// Appends a frame. The cell's vectors must be in the standard orientation: a along x, b in the plane of x and y.
    /// Formats without times or steps leave them out.
    ///
    /// # Errors
    /// [`FrameError::Unwritable`] where the number of atoms is another, or chemfiles cannot write the frame.
    pub fn write(&mut self, frame: &Frame) -> Result<(), FrameError> {
        let unwritable = |reason: String| FrameError::Unwritable {
            path: self.path.clone(),
            reason,
        };
        if frame.positions.len() != self.atoms {
            let found = frame.positions.len();
            return Err(unwritable(format!(
                "a frame has {found} atoms, not {}",
                self.atoms
            )));
        }
        let (key, step, time) = (self.key, self.written, frame.time_ps);
        let positions = frame.positions.clone();
        let [a, b, c] = as_chemfiles_takes_it(frame.cell).vectors;
        on_chemfiles_thread(move |files| {
            let file = files.get(key).ok_or_else(|| "the file was closed".to_owned())?;
            file.frame.positions_mut().copy_from_slice(&positions);
            // chemfiles holds the vectors as columns.
            let columns = [0, 1, 2].map(|row: usize| [a[row], b[row], c[row]]);
            file.frame.set_cell(&UnitCell::from_matrix(columns));
            file.frame.set_step(step);
            if let Some(time) = time {
                file.frame.set("time", time);
            }
            file.trajectory.write(&file.frame).map_err(|error| error.message)
        })?
        .map_err(unwritable)?;
        self.written += 1;
        Ok(())
    }

    /// Closes the file, so that all of it is on its way to the disk when this returns.
    ///
    /// # Errors
    /// [`FrameError::ReaderFailed`] where the thread of the library has ended.
    pub fn finish(self) -> Result<(), FrameError> {
        close(self.key);
        // Jobs are done in order: once the next one is, the file is closed.
        on_chemfiles_thread(|_| ())
    }
}

/// chemfiles calls a cell rectangular where all its angles are within 1e-3 degrees of right ones, and then refuses vectors
/// that lean at all. Such cells are set straight: their angles move by less than 2e-5.
fn as_chemfiles_takes_it(cell: Cell) -> Cell {
    const NEARLY_RIGHT: f64 = 2e-5;
    let [a, b, c] = cell.vectors;
    let cosine = |u: [f64; 3], v: [f64; 3]| (dot(u, v) / (length(u) * length(v))).abs();
    if [(a, b), (b, c), (c, a)]
        .into_iter()
        .any(|(u, v)| cosine(u, v) >= NEARLY_RIGHT)
    {
        return cell;
    }
    Cell {
        vectors: [[a[0], 0.0, 0.0], [0.0, b[1], 0.0], [0.0, 0.0, c[2]]],
    }
}

impl Drop for TrajectoryWriter {
    fn drop(&mut self) {
        close(self.key);
    }
}
