//! Text dumps of the LAMMPS engine, plain or compressed.
//!
//! Format: "dump" and "Howto triclinic" pages of the LAMMPS manual. Each frame has optional `ITEM: UNITS` and
//! `ITEM: TIME`, then the step, the number of atoms, the box, and a table of atoms whose columns are named.

use std::io;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use super::atom_order::AtomOrder;
use super::dump_columns::{AtomRow, DumpColumns};
use super::dump_header::{FrameHead, Header, HeaderError, read_header};
use super::dump_table::{DumpTable, TableError};
use super::error::unreadable;
use super::source::FirstFrameWork;
use super::text_file::TextFile;
use super::time_table::TimeTable;
use super::{Clock, EngineUnits, Frame, FrameError, FrameSource, ReadNote, ReadOptions, SheetAtoms};

/// A text dump: an index of its frames, made when it is opened, and the order of its atoms.
///
/// Atoms stand in ascending order of their ids, whatever their order in the file; a dump of a group, whose ids have gaps,
/// is read like any other. Without an id column the order of the file is kept, with a note.
pub struct LammpsDumpSource {
    path: PathBuf,
    text: TextFile,
    frames: Arc<Vec<FrameHead>>,
    clock: Clock,
    units: Option<EngineUnits>,
    table: DumpTable,
    notes: Vec<ReadNote>,
    line: Vec<u8>,
}

/// What a dump says of an atom.
pub(super) struct DumpAtom {
    id: u64,
    /// Its element, where there is such a column, else its type.
    name: String,
    kind: String,
    mass: Option<f64>,
    position: [f64; 3],
}

/// The atoms as a chemfiles frame.
pub(super) fn frame_of(atoms: &[DumpAtom]) -> chemfiles::Frame {
    let mut frame = chemfiles::Frame::new();
    for described in atoms {
        let mut atom = chemfiles::Atom::new(described.name.as_str());
        atom.set_atomic_type(described.kind.as_str());
        if let Some(mass) = described.mass {
            atom.set_mass(mass);
        }
        frame.add_atom(&atom, described.position, None);
    }
    frame
}

impl LammpsDumpSource {
    /// Opens a dump and indexes its frames: one pass over the text, in which headers are searched for and parsed. Whether
    /// a table has as many lines as its header says is found out when it is read, but for the last one.
    ///
    /// # Errors
    /// Where a header is malformed, the file holds no whole frame, or its units are unknown or contradict
    /// `engine_units`.
    pub fn open(path: &Path, options: &ReadOptions) -> Result<Self, FrameError> {
        let text = TextFile::open(path).map_err(|error| unreadable(path, &error))?;
        let mut source = Self {
            path: path.to_owned(),
            text,
            frames: Arc::default(),
            clock: options.clock,
            units: options.engine_units,
            table: DumpTable::default(),
            notes: Vec::new(),
            line: Vec::new(),
        };
        let mut frames = Vec::new();
        source.index(&mut frames, options.engine_units)?;
        frames.shrink_to_fit();
        source.frames = Arc::new(frames);
        if source.frames.is_empty() {
            return Err(FrameError::NoFrames {
                path: path.to_owned(),
                reason: "the first frame is incomplete".to_owned(),
            });
        }
        source.find_ids()?;
        Ok(source)
    }

    fn index(&mut self, frames: &mut Vec<FrameHead>, asked: Option<EngineUnits>) -> Result<(), FrameError> {
        loop {
            let frame = frames.len();
            // Only the heads matter here, and the units may still be unknown; boxes are read again with each frame.
            let header = match read_header(&mut self.text, 1.0) {
                Ok(header) => header,
                Err(HeaderError::End(true)) => return Ok(()),
                Err(HeaderError::End(false)) => {
                    self.notes.push(ReadNote::IncompleteFrame {
                        path: self.path.clone(),
                        frame,
                    });
                    return Ok(());
                }
                Err(HeaderError::Io(error)) => return Err(unreadable(&self.path, &error)),
                Err(HeaderError::Content(reason)) => return Err(self.bad_frame(frame, reason)),
            };
            if frame == 0
                && let Some(name) = &header.units
            {
                self.units = Some(self.agreed_units(name, asked)?);
            }
            let whole = self
                .skip_table(header.head.atoms)
                .map_err(|error| unreadable(&self.path, &error))?;
            if !whole {
                self.notes.push(ReadNote::IncompleteFrame {
                    path: self.path.clone(),
                    frame,
                });
                return Ok(());
            }
            frames.push(header.head);
        }
    }

    /// Goes to the frame after a table, by searching for it; the lines of the last table are counted. Returns whether they
    /// are all there.
    fn skip_table(&mut self, atoms: usize) -> io::Result<bool> {
        // Going back is dear in a compressed text, and unpacking it takes longer than to count its lines.
        if !self.text.is_plain() {
            return self.text.skip_lines(atoms);
        }
        let table = self.text.position();
        if self.text.find_line(b"ITEM:")? {
            return Ok(true);
        }
        self.text.seek(table)?;
        self.text.skip_lines(atoms)
    }

    fn agreed_units(&self, name: &str, asked: Option<EngineUnits>) -> Result<EngineUnits, FrameError> {
        let found = EngineUnits::from_name(name).ok_or_else(|| FrameError::Units {
            path: self.path.clone(),
            reason: format!(
                "the dump says ITEM: UNITS {name}, which planish does not know; it takes {}: write the dump in one of these",
                EngineUnits::NAMES
            ),
        })?;
        match asked {
            Some(asked) if asked != found => Err(FrameError::Units {
                path: self.path.clone(),
                reason: format!(
                    "the dump says ITEM: UNITS {name}, but engine_units = \"{}\"; remove `engine_units` or correct it",
                    asked.name()
                ),
            }),
            _ => Ok(found),
        }
    }

    /// Takes the ids of the first frame as the order of the atoms.
    fn find_ids(&mut self) -> Result<(), FrameError> {
        let mut ids = Vec::with_capacity(self.frames[0].atoms);
        self.for_each_atom(0, |_, row| {
            if let Some(id) = row.id {
                ids.push(id);
            }
            Ok(())
        })?;
        let order =
            AtomOrder::new(ids).map_err(|id| self.bad_frame(0, format!("two atoms have the id {id}")))?;
        if order.is_of_file() {
            self.notes.push(ReadNote::OrderAssumed {
                path: self.path.clone(),
            });
        }
        self.table = DumpTable::new(order);
        Ok(())
    }

    /// Reads the head of a frame, so that its first atom comes next.
    fn go_to_table(&mut self, frame: usize) -> Result<(Header, DumpColumns), FrameError> {
        let start = self.frames[frame].start;
        self.text
            .seek(start)
            .map_err(|error| unreadable(&self.path, &error))?;
        let length = self.units.map_or(1.0, EngineUnits::length_a);
        let header = read_header(&mut self.text, length).map_err(|error| match error {
            HeaderError::End(_) => self.bad_frame(frame, "the file ends within the frame".to_owned()),
            HeaderError::Io(error) => unreadable(&self.path, &error),
            HeaderError::Content(reason) => self.bad_frame(frame, reason),
        })?;
        let columns = DumpColumns::parse(&header.columns).map_err(|reason| self.bad_frame(frame, reason))?;
        Ok((header, columns))
    }

    /// Calls `take` with each atom of a frame, in the order of the file.
    fn for_each_atom(
        &mut self,
        frame: usize,
        mut take: impl FnMut(usize, AtomRow<'_>) -> Result<(), String>,
    ) -> Result<(), FrameError> {
        let (header, columns) = self.go_to_table(frame)?;
        for row in 0..header.head.atoms {
            let whole = self
                .text
                .read_line(&mut self.line)
                .map_err(|error| unreadable(&self.path, &error))?;
            let parsed = if whole {
                let line = std::str::from_utf8(&self.line).map_err(|error| error.to_string());
                line.and_then(|line| columns.row(line, &header.bounds))
                    .and_then(|atom| take(row, atom))
            } else {
                Err("the file ends within the frame".to_owned())
            };
            parsed.map_err(|reason| self.bad_frame(frame, format!("atom line {}: {reason}", row + 1)))?;
        }
        Ok(())
    }

    /// Refuses lines between the table just read and the next frame, other than blank ones.
    fn check_end_of_table(&mut self, frame: usize) -> Result<(), FrameError> {
        let Some(next) = self.frames.get(frame + 1).map(|next| next.start) else {
            return Ok(());
        };
        while self.text.position() < next {
            let whole = self
                .text
                .read_line(&mut self.line)
                .map_err(|error| unreadable(&self.path, &error))?;
            if !whole || !self.line.trim_ascii().is_empty() {
                let line = String::from_utf8_lossy(&self.line);
                let reason = format!(
                    "found \"{}\" after the {} atoms of the frame, where \"ITEM: TIMESTEP\" was expected",
                    line.trim(),
                    self.frames[frame].atoms
                );
                return Err(self.bad_frame(frame, reason));
            }
        }
        Ok(())
    }

    /// The atoms of the first frame, in ascending order of their ids.
    pub(super) fn first_atoms(&mut self) -> Result<Vec<DumpAtom>, FrameError> {
        let mut atoms = Vec::with_capacity(self.frames[0].atoms);
        self.for_each_atom(0, |row, atom| {
            let name = atom.element.or(atom.kind).unwrap_or("").to_owned();
            let kind = atom.kind.unwrap_or(&name).to_owned();
            let id = atom.id.unwrap_or(row as u64);
            atoms.push(DumpAtom {
                id,
                name,
                kind,
                mass: atom.mass,
                position: atom.position,
            });
            Ok(())
        })?;
        atoms.sort_by_key(|atom| atom.id);
        Ok(atoms)
    }

    fn time(&self, frame: usize) -> Option<f64> {
        let head = &self.frames[frame];
        match self.clock {
            Clock::Timestep(timestep) => Some(head.step as f64 * timestep),
            // Metal and real units share the A but not the unit of time, so a bare time is used only where they are said.
            Clock::File => Some(head.time? * self.units?.time_ps()),
            Clock::FrameInterval(_) => None,
        }
    }

    fn bad_frame(&self, frame: usize, reason: String) -> FrameError {
        FrameError::BadFrame {
            path: self.path.clone(),
            frame,
            reason,
        }
    }
}

impl FrameSource for LammpsDumpSource {
    fn path(&self) -> &Path {
        &self.path
    }

    fn len(&self) -> usize {
        self.frames.len()
    }

    fn read(&mut self, index: usize, frame: &mut Frame) -> Result<(), FrameError> {
        let atoms = self.frames[index].atoms;
        let expected = self.frames[0].atoms;
        if atoms != expected {
            return Err(FrameError::AtomCountChanged {
                path: self.path.clone(),
                frame: index,
                found: atoms,
                expected,
            });
        }
        let (header, columns) = self.go_to_table(index)?;
        frame.positions.clear();
        frame.positions.resize(atoms, [0.0; 3]);
        self.table
            .read(&mut self.text, &columns, &header.bounds, &mut frame.positions)
            .map_err(|error| match error {
                TableError::Io(error) => unreadable(&self.path, &error),
                TableError::Row(row, reason) => {
                    self.bad_frame(index, format!("atom line {}: {reason}", row + 1))
                }
            })?;
        self.check_end_of_table(index)?;
        frame.cell = header.bounds.cell();
        frame.time_ps = self.time(index);
        Ok(())
    }

    fn another(&self) -> Result<Option<Box<dyn FrameSource>>, FrameError> {
        if !self.text.is_plain() {
            return Ok(None);
        }
        Ok(Some(Box::new(Self {
            path: self.path.clone(),
            text: TextFile::open(&self.path).map_err(|error| unreadable(&self.path, &error))?,
            frames: Arc::clone(&self.frames),
            clock: self.clock,
            units: self.units,
            table: self.table.for_another_thread(),
            notes: Vec::new(),
            line: Vec::new(),
        })))
    }

    fn with_first_frame(&mut self, work: FirstFrameWork) -> Result<SheetAtoms, FrameError> {
        let atoms = self.first_atoms()?;
        super::chemfiles_thread::on_chemfiles_thread(move |_| work(frame_of(&atoms)))?
    }

    fn times(&mut self) -> Result<TimeTable, FrameError> {
        let times: Option<Vec<f64>> = (0..self.len()).map(|frame| self.time(frame)).collect();
        Ok(times.map_or_else(
            || {
                let reason = if self.frames.iter().all(|head| head.time.is_some()) {
                    "its ITEM: TIME has no unit; give `engine_units`"
                } else {
                    "the dump stores steps only; write it with `dump_modify time yes units yes`"
                };
                TimeTable::Absent(reason.to_owned())
            },
            TimeTable::Listed,
        ))
    }

    fn notes(&self) -> &[ReadNote] {
        &self.notes
    }
}
