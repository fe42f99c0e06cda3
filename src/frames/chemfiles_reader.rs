//! Trajectories in every format that chemfiles reads, compressed where chemfiles unpacks them.

use std::path::{Path, PathBuf};

use chemfiles::{CellShape, Property, Trajectory};

use super::chemfiles_thread::{OpenFile, close, on_chemfiles_thread, take_warnings};
use super::source::FirstFrameWork;
use super::time_table::{TimeTable, probe_times};
use super::{Cell, Clock, Frame, FrameError, FrameSource, ReadNote, ReadOptions, SheetAtoms};

/// Formats whose frames carry the step of the simulation. For the others chemfiles gives the number of the frame.
const FORMATS_WITH_STEPS: [&str; 4] = ["XTC", "TRR", "TNG", "LAMMPS"];

/// A trajectory read through chemfiles.
///
/// chemfiles' calls are made on one thread (see `chemfiles_thread`). Frames are always asked for by number: where they
/// come in order no format moves in its file for it, and formats disagree on which frame follows a jump otherwise.
#[derive(Debug)]
pub struct ChemfilesSource {
    path: PathBuf,
    format: String,
    key: u64,
    len: usize,
    clock: Clock,
    notes: Vec<ReadNote>,
}

/// What is taken from a chemfiles frame.
struct Snapshot {
    time: Option<f64>,
    step: usize,
    cell: Option<Cell>,
    positions: Vec<[f64; 3]>,
    warnings: Vec<String>,
}

impl ChemfilesSource {
    /// Opens a file as `format`, chemfiles' name with the compression behind a slash ("XYZ / GZ").
    ///
    /// A last frame that cannot be read, in a file of more than one, is left out with a note: simulations that are
    /// killed, or still run, leave half a frame.
    ///
    /// # Errors
    /// Where chemfiles does not read the file, it holds no frame, or `timestep` is given and the format has no steps.
    pub fn open(path: &Path, format: &str, options: &ReadOptions) -> Result<Self, FrameError> {
        let bare_format = format.split('/').next().unwrap_or(format).trim().to_owned();
        if matches!(options.clock, Clock::Timestep(_)) && !FORMATS_WITH_STEPS.contains(&bare_format.as_str())
        {
            return Err(FrameError::StepsNeeded {
                path: path.to_owned(),
                format: bare_format,
            });
        }
        let (file, asked) = (path.to_owned(), format.to_owned());
        let opened = on_chemfiles_thread(move |files| {
            take_warnings();
            let mut trajectory = Trajectory::open_with_format(&file, 'r', asked.as_str())?;
            let len = trajectory.nsteps();
            let file = OpenFile {
                trajectory,
                frame: chemfiles::Frame::new(),
            };
            Ok::<_, chemfiles::Error>((files.insert(file), len, take_warnings()))
        })?;
        let (key, len, warnings) = opened.map_err(|error| FrameError::Unreadable {
            path: path.to_owned(),
            reason: format!(
                "{} (read as {format}); if the file is still being written or was cut off, remove its last, incomplete frame",
                error.message
            ),
        })?;
        let path = path.to_owned();
        let mut source = Self {
            path,
            format: bare_format,
            key,
            len,
            clock: options.clock,
            notes: Vec::new(),
        };
        source.keep_warnings(warnings);
        if len == 0 {
            return Err(FrameError::NoFrames {
                path: source.path.clone(),
                reason: format!("read as {format}"),
            });
        }
        if len > 1 && source.snapshot(len - 1, Vec::new()).is_err() {
            source.len = len - 1;
            source.notes.push(ReadNote::IncompleteFrame {
                path: source.path.clone(),
                frame: len - 1,
            });
        }
        Ok(source)
    }

    fn bad_frame(&self, frame: usize, reason: String) -> FrameError {
        FrameError::BadFrame {
            path: self.path.clone(),
            frame,
            reason,
        }
    }

    fn keep_warnings(&mut self, warnings: Vec<String>) {
        for message in warnings {
            let note = ReadNote::Reader {
                path: self.path.clone(),
                message,
            };
            // A warning that comes with every frame is said once.
            if self.notes.len() < 20 && !self.notes.contains(&note) {
                self.notes.push(note);
            }
        }
    }

    /// Reads a frame, its positions into the memory of `positions`.
    fn snapshot(&mut self, index: usize, mut positions: Vec<[f64; 3]>) -> Result<Snapshot, FrameError> {
        let key = self.key;
        let format = self.format.clone();
        let snapshot = on_chemfiles_thread(move |files| {
            take_warnings();
            let file = files.get(key).ok_or_else(|| "the file was closed".to_owned())?;
            file.trajectory
                .read_step(index, &mut file.frame)
                .map_err(|error| error.message)?;
            positions.clear();
            positions.extend_from_slice(file.frame.positions());
            Ok::<_, String>(Snapshot {
                time: file_time(&file.frame, &format),
                step: file.frame.step(),
                cell: cell_of(&file.frame),
                positions,
                warnings: take_warnings(),
            })
        })?;
        snapshot.map_err(|reason| self.bad_frame(index, reason))
    }
}

impl FrameSource for ChemfilesSource {
    fn path(&self) -> &Path {
        &self.path
    }

    fn len(&self) -> usize {
        self.len
    }

    fn read(&mut self, index: usize, frame: &mut Frame) -> Result<(), FrameError> {
        let snapshot = self.snapshot(index, std::mem::take(&mut frame.positions))?;
        frame.positions = snapshot.positions;
        self.keep_warnings(snapshot.warnings);
        frame.time_ps = match self.clock {
            Clock::File => snapshot.time,
            Clock::Timestep(timestep) => Some(snapshot.step as f64 * timestep),
            Clock::FrameInterval(_) => None,
        };
        frame.cell = snapshot.cell.ok_or_else(|| FrameError::NoCell {
            path: self.path.clone(),
            frame: index,
        })?;
        Ok(())
    }

    fn with_first_frame(&mut self, work: FirstFrameWork) -> Result<SheetAtoms, FrameError> {
        let key = self.key;
        let outcome = on_chemfiles_thread(move |files| {
            let file = files.get(key).ok_or_else(|| "the file was closed".to_owned())?;
            let mut frame = chemfiles::Frame::new();
            file.trajectory
                .read_step(0, &mut frame)
                .map_err(|error| error.message)?;
            Ok::<_, String>(work(frame))
        })?;
        outcome.map_err(|reason| self.bad_frame(0, reason))?
    }

    fn times(&mut self) -> Result<TimeTable, FrameError> {
        if self.format == "DCD" && self.clock == Clock::File {
            return Ok(TimeTable::Absent(
                "a DCD does not say what unit its times are in".to_owned(),
            ));
        }
        probe_times(self)
    }

    fn notes(&self) -> &[ReadNote] {
        &self.notes
    }
}

impl Drop for ChemfilesSource {
    fn drop(&mut self) {
        close(self.key);
    }
}

/// The frame's own time in ps.
///
/// An extended XYZ may say `time=12.5`, taken to be in ps, in its comment line. GROMACS writes the time of a .gro frame into its title, "... t= 12.5 step= ...". The time in a DCD is in a unit that
/// depends on the program that wrote it and that the file does not say, so it is not used.
fn file_time(frame: &chemfiles::Frame, format: &str) -> Option<f64> {
    if format == "DCD" {
        return None;
    }
    match frame.get("time") {
        Some(Property::Double(time)) => return Some(time),
        // Properties in the comment line of extended XYZ come as text.
        Some(Property::String(time)) => return time.trim().parse().ok(),
        _ => {}
    }
    match frame.get("name") {
        Some(Property::String(title)) if format == "GRO" => {
            let (_, after) = title.rsplit_once("t=")?;
            after.split_whitespace().next()?.parse().ok()
        }
        _ => None,
    }
}

/// The cell as three vectors in rows; chemfiles stores them in the columns of its matrix.
fn cell_of(frame: &chemfiles::Frame) -> Option<Cell> {
    let cell = frame.cell();
    if cell.shape() == CellShape::Infinite {
        return None;
    }
    let matrix = cell.matrix();
    let vectors = std::array::from_fn(|vector| std::array::from_fn(|component| matrix[component][vector]));
    Some(Cell { vectors })
}
