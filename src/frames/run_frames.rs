//! The frames of a run: its files joined in time, cut to the wanted part, reduced to the sheet's atoms, and checked.

use std::sync::Arc;

use super::cell_check::check_cell;
use super::frame_place::FramePlace;
use super::run_files::RunFiles;
use super::topology::{AtomRequest, UNKNOWN_SPECIES, find_atoms};
use super::{Cell, Clock, Frame, FrameError, ReadNote, RunInput, SheetAtoms};

/// The frames of one run that `from`, `to` and `stride` leave, in time order.
///
/// Memory does not grow with the number of frames but for 8 bytes a frame (24 to 40 more for text dumps, 8 more where
/// times are uneven).
pub struct RunFrames {
    files: RunFiles,
    input: RunInput,
    atoms: Arc<SheetAtoms>,
    atoms_in_file: usize,
    kept: Arc<Vec<KeptFrame>>,
    interval_ps: Option<f64>,
    notes: Vec<ReadNote>,
    /// A whole frame of a file, before the selection.
    whole: Frame,
}

/// Where a kept frame lies.
#[derive(Clone, Copy, Debug)]
struct KeptFrame {
    file: u32,
    frame: u32,
}

impl RunFrames {
    /// Opens the files of a run: reads the time of every frame, joins the files, and finds the sheet's atoms on the first
    /// frame of the first file.
    ///
    /// The files of a glob are sorted by the first time in each, then in natural name order. Frames that are not later than the
    /// last one before them (the overlap of a restart) are left out with a note; `from`, `to` and `stride` count
    /// what remains. With a stated frame interval the files' own times are not used, and nothing is taken for an overlap.
    ///
    /// # Errors
    /// Where a file cannot be read, the first frame has no cell, the topology or selection does not fit, `from` or `to` is
    /// given without times, or no frame is left.
    pub fn open(input: &RunInput) -> Result<Self, FrameError> {
        let mut files = RunFiles::open(input)?;
        let mut notes = files.take_notes();
        let request = AtomRequest {
            topology: input.topology.clone(),
            species: input.species.clone(),
            select: input.select.clone(),
        };
        let atoms = find_atoms(files.source(0)?, &request)?;
        note_unknown(&atoms, &mut notes);
        let mut whole = Frame {
            time_ps: None,
            cell: Cell {
                vectors: [[0.0; 3]; 3],
            },
            positions: Vec::new(),
        };
        files.source(0)?.read(0, &mut whole)?;
        let atoms_in_file = whole.positions.len();
        let mut run = Self {
            files,
            input: input.clone(),
            atoms: Arc::new(atoms),
            atoms_in_file,
            kept: Arc::default(),
            interval_ps: None,
            notes,
            whole,
        };
        run.keep()?;
        run.measure_spacing();
        Ok(run)
    }

    /// Decides which frames are kept.
    fn keep(&mut self) -> Result<(), FrameError> {
        let input = &self.input;
        for (key, bound) in [("from", input.from), ("to", input.to)] {
            if bound.is_some()
                && let Some((path, reason)) = self.files.without_times()
            {
                return Err(FrameError::TimesNeeded { path, key, reason });
            }
        }
        // The latest time so far, and the file it stands in.
        let mut last: Option<(f64, usize)> = None;
        let mut wanted = 0usize;
        let mut kept = Vec::new();
        for file in 0..self.files.len() {
            let mut dropped: Option<(usize, f64, f64)> = None;
            for frame in 0..self.files.frames(file) {
                let time = self.files.time(file, frame);
                // 20.4 ps must include the frame at 20.39999 ps, and find it again in a restart.
                let slack = time.map_or(0.0, |time| self.files.slack(file, time));
                if let (Some((last, last_file)), Some(time)) = (last, time)
                    && time <= last + if last_file == file { 0.0 } else { slack }
                {
                    let (count, first, _) = dropped.unwrap_or((0, time, time));
                    dropped = Some((count + 1, first, time));
                    continue;
                }
                last = time.map(|time| (time, file)).or(last);
                let early = input
                    .from
                    .zip(time)
                    .is_some_and(|(from, time)| time < from - slack);
                let late = input.to.zip(time).is_some_and(|(to, time)| time > to + slack);
                if early || late {
                    continue;
                }
                if wanted.is_multiple_of(input.stride.max(1)) {
                    kept.push(KeptFrame {
                        file: file as u32,
                        frame: frame as u32,
                    });
                }
                wanted += 1;
            }
            if let Some((frames, first_ps, last_ps)) = dropped {
                let path = self.files.path(file).to_owned();
                self.notes.push(ReadNote::OverlapDropped {
                    path,
                    frames,
                    first_ps,
                    last_ps,
                });
            }
        }
        if kept.is_empty() {
            let last_file = self.files.len() - 1;
            return Err(FrameError::NoFramesLeft {
                path: self.files.path(0).to_owned(),
                frames: self.source_len(),
                first: self.files.time(0, 0).unwrap_or(0.0),
                last: self
                    .files
                    .time(last_file, self.files.frames(last_file) - 1)
                    .unwrap_or(0.0),
            });
        }
        kept.shrink_to_fit();
        self.kept = Arc::new(kept);
        Ok(())
    }

    /// The same frames for another thread, which then reads any of them on its own; `None` where a file is best read by
    /// one reader in order. It brings no notes.
    ///
    /// # Errors
    /// Where a file cannot be opened again.
    pub fn another(&self) -> Result<Option<Self>, FrameError> {
        Ok(self.files.another()?.map(|files| Self {
            files,
            input: self.input.clone(),
            atoms: Arc::clone(&self.atoms),
            atoms_in_file: self.atoms_in_file,
            kept: Arc::clone(&self.kept),
            interval_ps: self.interval_ps,
            notes: Vec::new(),
            whole: Frame::empty(),
        }))
    }

    /// Finds the spacing of the kept frames, its median where it is uneven.
    fn measure_spacing(&mut self) {
        if let Some((path, reason)) = self.files.without_times() {
            if !matches!(self.input.clock, Clock::FrameInterval(_)) {
                self.notes.push(ReadNote::TimesMissing { path, reason });
            }
            return;
        }
        let times: Option<Vec<f64>> = self
            .kept
            .iter()
            .map(|kept| self.files.time(kept.file as usize, kept.frame as usize))
            .collect();
        let Some(times) = times.filter(|times| times.len() > 1) else {
            return;
        };
        let mut spacings: Vec<f64> = times.windows(2).map(|pair| pair[1] - pair[0]).collect();
        let widest = (0..spacings.len())
            .max_by(|&i, &j| spacings[i].total_cmp(&spacings[j]))
            .unwrap_or(0);
        let after = self.place(widest + 1).to_string();
        spacings.sort_by(f64::total_cmp);
        let used_ps = spacings[spacings.len() / 2];
        let (smallest_ps, largest_ps) = (spacings[0], spacings[spacings.len() - 1]);
        let allowed = super::time_table::tolerance(used_ps, times[times.len() - 1]);
        // The mean has the smaller rounding error where the median is only one of many equal spacings.
        self.interval_ps = Some(if largest_ps - smallest_ps <= allowed {
            (times[times.len() - 1] - times[0]) / (times.len() - 1) as f64
        } else {
            self.notes.push(ReadNote::UnevenSpacing {
                smallest_ps,
                largest_ps,
                used_ps,
                after,
            });
            used_ps
        });
    }

    /// The sheet's atoms, in the order of the positions in each frame.
    #[must_use]
    pub fn atoms(&self) -> &SheetAtoms {
        &self.atoms
    }

    /// How many frames are kept.
    #[must_use]
    pub fn len(&self) -> usize {
        self.kept.len()
    }

    /// Whether no frame is kept; never so for a run that was opened.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.kept.is_empty()
    }

    /// How many frames the files hold, before overlaps, `from`, `to` and `stride`.
    #[must_use]
    pub fn source_len(&self) -> usize {
        (0..self.files.len()).map(|file| self.files.frames(file)).sum()
    }

    /// How many atoms a frame of the files holds, before the selection.
    #[must_use]
    pub fn source_atoms(&self) -> usize {
        self.atoms_in_file
    }

    /// The time between two kept frames in ps: the mean where they are evenly spaced, else the median with a note. `None`
    /// without times, or with fewer than two frames.
    #[must_use]
    pub fn frame_interval_ps(&self) -> Option<f64> {
        self.interval_ps
    }

    /// The time of the first kept frame in ps.
    #[must_use]
    pub fn first_time_ps(&self) -> Option<f64> {
        self.kept
            .first()
            .and_then(|kept| self.files.time(kept.file as usize, kept.frame as usize))
    }

    /// What the user should know of how the run was read.
    #[must_use]
    pub fn notes(&self) -> &[ReadNote] {
        &self.notes
    }

    /// Where kept frame `k` lies, for messages.
    ///
    /// # Panics
    /// Where `k` is not below [`RunFrames::len`].
    #[must_use]
    pub fn place(&self, k: usize) -> FramePlace {
        let KeptFrame { file, frame } = self.kept[k];
        let (file, frame) = (file as usize, frame as usize);
        FramePlace {
            path: self.files.path(file).to_owned(),
            frame_in_file: frame,
            time_ps: self.files.time(file, frame),
        }
    }

    /// Reads kept frame `k` into `frame`: the positions of the sheet's atoms, and the cell with the normal axis last.
    /// Cartesian components are those of the file. Reading in ascending order is the fast way.
    ///
    /// # Errors
    /// Where the frame cannot be parsed, has no cell or a flat one, another number of atoms, a coordinate that is not finite,
    /// or a time off the one its file promised.
    ///
    /// # Panics
    /// Where `k` is not below [`RunFrames::len`].
    pub fn read(&mut self, k: usize, frame: &mut Frame) -> Result<(), FrameError> {
        let KeptFrame { file, frame: index } = self.kept[k];
        let (file, index) = (file as usize, index as usize);
        self.files.source(file)?.read(index, &mut self.whole)?;
        let path = || self.files.path(file).to_owned();
        if self.whole.positions.len() != self.atoms_in_file {
            return Err(FrameError::AtomCountChanged {
                path: path(),
                frame: index,
                found: self.whole.positions.len(),
                expected: self.atoms_in_file,
            });
        }
        let time = self.files.time(file, index);
        let own_times = !matches!(self.input.clock, Clock::FrameInterval(_));
        if let (true, Some(found), Some(expected)) = (own_times, self.whole.time_ps, time) {
            let interval = self.interval_ps.unwrap_or(0.0) / self.input.stride.max(1) as f64;
            if (found - expected).abs() > super::time_table::tolerance(50.0 * interval, expected) {
                return Err(FrameError::TimeJump {
                    path: path(),
                    frame: index,
                    found,
                    expected,
                });
            }
        }
        check_cell(&self.whole.cell).map_err(|fault| fault.error(path(), index))?;
        frame.positions.clear();
        for &atom in &self.atoms.indices {
            let position = self.whole.positions[atom];
            if let Some(axis) = position.iter().position(|component| !component.is_finite()) {
                return Err(FrameError::NotFinite {
                    path: path(),
                    frame: index,
                    what: format!("{} of atom {atom}", ['x', 'y', 'z'][axis]),
                    value: position[axis],
                });
            }
            frame.positions.push(position);
        }
        frame.cell = self.whole.cell.with_normal_last(self.input.normal);
        frame.time_ps = time;
        Ok(())
    }
}

fn note_unknown(atoms: &SheetAtoms, notes: &mut Vec<ReadNote>) {
    let unknown = atoms
        .species
        .iter()
        .filter(|species| *species == UNKNOWN_SPECIES)
        .count();
    if unknown > 0 {
        notes.push(ReadNote::SpeciesUnknown { atoms: unknown });
    }
    if atoms.masses.is_none() {
        let mut species = atoms.species.clone();
        species.sort();
        species.dedup();
        notes.push(ReadNote::MassesUnknown {
            species: species.join(", "),
        });
    }
}
