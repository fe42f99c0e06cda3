//! The files of a run in time order, and the time of every frame in them.

use std::cmp::Ordering;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use super::reader;
use super::time_table::TimeTable;
use super::{Clock, FrameError, FrameSource, ReadNote, ReadOptions, RunInput};

/// Files kept open at a time; a run of thousands of restart files must not run out of file handles.
const OPEN_FILES: usize = 32;

/// The trajectory files of a run, in time order.
pub(super) struct RunFiles {
    files: Arc<Vec<RunFile>>,
    clock: Clock,
    options: ReadOptions,
    /// The files that are open, the one opened last standing last.
    open: Vec<(usize, Box<dyn FrameSource>)>,
    notes: Vec<ReadNote>,
}

struct RunFile {
    path: PathBuf,
    frames: usize,
    /// Frames in the files before it.
    frames_before: usize,
    /// The file's own times.
    times: TimeTable,
}

impl RunFiles {
    /// Opens every file once to learn its frames and times, and sorts the matches of each glob.
    pub fn open(input: &RunInput) -> Result<Self, FrameError> {
        // With a stated frame interval the files' own times, where there are any, still put a glob in order.
        let source_clock = match input.clock {
            Clock::FrameInterval(_) => Clock::File,
            clock => clock,
        };
        let options = ReadOptions {
            clock: source_clock,
            engine_units: input.engine_units,
        };
        let mut run_files = Vec::new();
        let mut run = Self {
            files: Arc::default(),
            clock: input.clock,
            options,
            open: Vec::new(),
            notes: Vec::new(),
        };
        let mut sources = Vec::new();
        for entry in &input.trajectory {
            let mut files = Vec::with_capacity(entry.len());
            for path in entry {
                let mut source = reader::open(path, &options)?;
                let times = source.times()?;
                run.notes.extend_from_slice(source.notes());
                let file = RunFile {
                    path: path.clone(),
                    frames: source.len(),
                    frames_before: 0,
                    times,
                };
                // The first files stay open, so that a run of a few files indexes each of them once.
                let stays = sources.len() + files.len() < OPEN_FILES;
                files.push((file, stays.then_some(source)));
            }
            let timed = files.iter().all(|(file, _)| file.times.time(0).is_some());
            files.sort_by(|(one, _), (other, _)| in_time_order(timed, one, other));
            for (file, source) in files {
                run_files.push(file);
                sources.push(source);
            }
        }
        let opened = sources.into_iter().enumerate();
        run.open = opened
            .filter_map(|(file, source)| Some((file, source?)))
            .collect();
        if run_files.is_empty() {
            return Err(FrameError::NoFiles);
        }
        let mut before = 0;
        for file in &mut run_files {
            file.frames_before = before;
            before += file.frames;
        }
        run.files = Arc::new(run_files);
        Ok(run)
    }

    /// The same files for another thread; `None` where one of those that are open is best read by one reader in order.
    pub fn another(&self) -> Result<Option<Self>, FrameError> {
        let mut open = Vec::with_capacity(self.open.len());
        for (file, source) in &self.open {
            match source.another()? {
                Some(source) => open.push((*file, source)),
                None => return Ok(None),
            }
        }
        Ok(Some(Self {
            files: Arc::clone(&self.files),
            clock: self.clock,
            options: self.options,
            open,
            notes: Vec::new(),
        }))
    }

    /// How many files there are; at least one.
    pub fn len(&self) -> usize {
        self.files.len()
    }

    /// The path of a file.
    pub fn path(&self, file: usize) -> &Path {
        &self.files[file].path
    }

    /// How many frames a file holds; at least one.
    pub fn frames(&self, file: usize) -> usize {
        self.files[file].frames
    }

    /// The time of a frame in ps, as the clock says.
    pub fn time(&self, file: usize, frame: usize) -> Option<f64> {
        let file = &self.files[file];
        match self.clock {
            Clock::FrameInterval(interval) => Some((file.frames_before + frame) as f64 * interval),
            Clock::File | Clock::Timestep(_) => file.times.time(frame),
        }
    }

    /// How far two times near `time` may differ and still be the same: the rounding of times that are stored in single
    /// precision, but well below the time between two frames of the file.
    pub fn slack(&self, file: usize, time: f64) -> f64 {
        let rounding = f64::from(f32::EPSILON) * time.abs();
        match (self.time(file, 0), self.time(file, 1)) {
            (Some(first), Some(second)) if self.frames(file) > 1 => {
                rounding.min(0.25 * (second - first).abs())
            }
            _ => rounding,
        }
    }

    /// The first file whose frames have no times, and why.
    pub fn without_times(&self) -> Option<(PathBuf, String)> {
        if matches!(self.clock, Clock::FrameInterval(_)) {
            return None;
        }
        self.files.iter().find_map(|file| match &file.times {
            TimeTable::Absent(reason) => Some((file.path.clone(), reason.clone())),
            TimeTable::Even { .. } | TimeTable::Listed(_) => None,
        })
    }

    /// Takes what the readers had to say when the files were opened.
    pub fn take_notes(&mut self) -> Vec<ReadNote> {
        std::mem::take(&mut self.notes)
    }

    /// The reader of a file, opened again where it was closed.
    pub fn source(&mut self, file: usize) -> Result<&mut dyn FrameSource, FrameError> {
        let place = if let Some(place) = self.open.iter().position(|(open, _)| *open == file) {
            place
        } else {
            if self.open.len() == OPEN_FILES {
                self.open.remove(0);
            }
            let source = reader::open(&self.files[file].path, &self.options)?;
            self.open.push((file, source));
            self.open.len() - 1
        };
        Ok(self.open[place].1.as_mut())
    }
}

/// By the first time where every file has one, then by name, numbers in it counted as numbers.
fn in_time_order(timed: bool, one: &RunFile, other: &RunFile) -> Ordering {
    let by_time = match (one.times.time(0), other.times.time(0)) {
        (Some(one), Some(other)) if timed => one.total_cmp(&other),
        _ => Ordering::Equal,
    };
    by_time.then_with(|| alphanumeric_sort::compare_path(&one.path, &other.path))
}
