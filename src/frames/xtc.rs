//! XTC trajectories: the compressed format of GROMACS, decoded by molly.
//!
//! chemfiles reads them too, at under half the speed, but refuses a cell whose angles differ from 90 degrees by less than
//! a thousandth, through which a cell that breathes in shear passes now and then.

use std::fs::File;
use std::io::{self, Read, Seek, SeekFrom};
use std::path::{Path, PathBuf};
use std::sync::Arc;

use molly::XTCReader;
use molly::selection::AtomSelection;

use super::error::unreadable;
use super::{
    Cell, Clock, Frame, FrameError, FrameSource, ReadNote, ReadOptions, SheetAtoms, TimeTable,
    chemfiles_thread, source::FirstFrameWork,
};

/// First four bytes of each frame, big-endian; 2023 marks frames of more than 2^31 bytes.
const MAGIC: [i32; 2] = [1995, 2023];

/// Bytes of a frame's head: magic, atoms, step, time, nine numbers of the cell, atoms again.
const HEAD_BYTES: usize = 56;

/// Frames of up to this many atoms are not compressed.
const UNCOMPRESSED_ATOMS: u64 = 9;

/// Bytes between the head and the length of the compressed part: precision, bounds of the integers, their size.
const BOUNDS_BYTES: u64 = 32;

/// A compressed atom takes at least one bit: a head that claims more atoms than that is damaged.
const ATOMS_PER_BYTE: u64 = 8;

/// One nm in A.
const NANOMETRE: f64 = 10.0;

/// Whether a file starts like an XTC trajectory.
pub(super) fn is_xtc(head: &[u8]) -> bool {
    head.first_chunk()
        .is_some_and(|magic| MAGIC.contains(&i32::from_be_bytes(*magic)))
}

/// What the index keeps of a frame.
#[derive(Clone, Copy, Debug)]
struct FrameHead {
    offset: u64,
    atoms: u64,
    step: i32,
    time: f32,
}

/// An XTC file, its frames indexed by their heads.
pub struct XtcSource {
    path: PathBuf,
    reader: XTCReader<File>,
    frames: Arc<Vec<FrameHead>>,
    clock: Clock,
    decoded: molly::Frame,
    packed: Vec<u8>,
    notes: Vec<ReadNote>,
}

impl XtcSource {
    /// Opens a file and reads the head of every frame. A last frame that is not whole is left out with a note: simulations
    /// that are killed, or still run, leave half a frame.
    ///
    /// # Errors
    /// Where the file cannot be read, a head in it is damaged, or it holds no whole frame.
    pub fn open(path: &Path, options: &ReadOptions) -> Result<Self, FrameError> {
        let mut file = File::open(path).map_err(|error| unreadable(path, &error))?;
        let mut frames = Vec::new();
        let mut notes = Vec::new();
        match index(&mut file, &mut frames).map_err(|error| unreadable(path, &error))? {
            IndexEnd::Whole => {}
            IndexEnd::Incomplete => {
                notes.push(ReadNote::IncompleteFrame {
                    path: path.to_owned(),
                    frame: frames.len(),
                });
            }
            IndexEnd::Damaged(reason) => {
                return Err(FrameError::BadFrame {
                    path: path.to_owned(),
                    frame: frames.len(),
                    reason,
                });
            }
        }
        if frames.is_empty() {
            return Err(FrameError::NoFrames {
                path: path.to_owned(),
                reason: "the first frame is incomplete".to_owned(),
            });
        }
        frames.shrink_to_fit();
        Ok(Self::of(path, file, Arc::new(frames), options.clock, notes))
    }

    fn of(path: &Path, file: File, frames: Arc<Vec<FrameHead>>, clock: Clock, notes: Vec<ReadNote>) -> Self {
        let decoded = molly::Frame {
            step: 0,
            time: 0.0,
            boxvec: [0.0; 9],
            precision: 0.0,
            positions: Vec::new(),
        };
        Self {
            path: path.to_owned(),
            reader: XTCReader::new(file),
            frames,
            clock,
            decoded,
            packed: Vec::new(),
            notes,
        }
    }

    fn time(&self, head: &FrameHead) -> Option<f64> {
        match self.clock {
            Clock::File => Some(f64::from(head.time)),
            Clock::Timestep(timestep) => Some(f64::from(head.step) * timestep),
            Clock::FrameInterval(_) => None,
        }
    }
}

/// How the index of a file ended.
enum IndexEnd {
    Whole,
    Incomplete,
    Damaged(String),
}

/// Reads the heads of all whole frames, skipping over what is packed between them.
fn index(file: &mut File, frames: &mut Vec<FrameHead>) -> io::Result<IndexEnd> {
    let length = file.metadata()?.len();
    let mut offset = 0;
    while offset < length {
        if offset + HEAD_BYTES as u64 > length {
            return Ok(IndexEnd::Incomplete);
        }
        file.seek(SeekFrom::Start(offset))?;
        let mut head = [0; HEAD_BYTES];
        file.read_exact(&mut head)?;
        let word = |place: usize| -> [u8; 4] { std::array::from_fn(|byte| head[4 * place + byte]) };
        let magic = i32::from_be_bytes(word(0));
        if !MAGIC.contains(&magic) {
            return Ok(IndexEnd::Damaged(format!(
                "a frame must start with 1995 or 2023, found {magic}"
            )));
        }
        let atoms = u64::from(u32::from_be_bytes(word(1)));
        let again = u64::from(u32::from_be_bytes(word(13)));
        let packed = offset + HEAD_BYTES as u64;
        let end = if atoms <= UNCOMPRESSED_ATOMS {
            packed + 12 * atoms
        } else {
            let wide = magic == MAGIC[1];
            let start = packed + BOUNDS_BYTES + if wide { 8 } else { 4 };
            if start > length {
                return Ok(IndexEnd::Incomplete);
            }
            file.seek(SeekFrom::Start(packed + BOUNDS_BYTES))?;
            let bytes = read_length(file, wide)?;
            if atoms / ATOMS_PER_BYTE > bytes {
                return Ok(IndexEnd::Damaged(format!(
                    "{atoms} atoms cannot be packed in {bytes} bytes"
                )));
            }
            // XDR pads to whole words.
            start.saturating_add(bytes.next_multiple_of(4))
        };
        if atoms != again {
            return Ok(IndexEnd::Damaged(format!(
                "the head says {atoms} atoms, then {again}"
            )));
        }
        if end > length {
            return Ok(IndexEnd::Incomplete);
        }
        frames.push(FrameHead {
            offset,
            atoms,
            step: i32::from_be_bytes(word(2)),
            time: f32::from_be_bytes(word(3)),
        });
        offset = end;
    }
    Ok(IndexEnd::Whole)
}

/// Length in bytes of the compressed part.
fn read_length(file: &mut File, wide: bool) -> io::Result<u64> {
    if wide {
        let mut bytes = [0; 8];
        file.read_exact(&mut bytes)?;
        return Ok(u64::from_be_bytes(bytes));
    }
    let mut bytes = [0; 4];
    file.read_exact(&mut bytes)?;
    Ok(u64::from(u32::from_be_bytes(bytes)))
}

impl FrameSource for XtcSource {
    fn path(&self) -> &Path {
        &self.path
    }

    fn len(&self) -> usize {
        self.frames.len()
    }

    fn read(&mut self, index: usize, frame: &mut Frame) -> Result<(), FrameError> {
        let (head, expected) = (self.frames[index], self.frames[0].atoms);
        if head.atoms != expected {
            return Err(FrameError::AtomCountChanged {
                path: self.path.clone(),
                frame: index,
                found: head.atoms as usize,
                expected: expected as usize,
            });
        }
        let decoded = self.reader.file.seek(SeekFrom::Start(head.offset)).and_then(|_| {
            self.reader
                .read_frame_with_scratch(&mut self.decoded, &mut self.packed, &AtomSelection::All)
        });
        decoded.map_err(|error| FrameError::BadFrame {
            path: self.path.clone(),
            frame: index,
            reason: error.to_string(),
        })?;
        let angstrom = |x: f32| f64::from(x) * NANOMETRE;
        let vectors = self.decoded.boxvec_cols_2d().map(|vector| vector.map(angstrom));
        if vectors == [[0.0; 3]; 3] {
            return Err(FrameError::NoCell {
                path: self.path.clone(),
                frame: index,
            });
        }
        frame.cell = Cell { vectors };
        frame.positions.clear();
        frame
            .positions
            .extend(self.decoded.coords().map(|position| position.map(angstrom)));
        frame.time_ps = self.time(&head);
        Ok(())
    }

    fn another(&self) -> Result<Option<Box<dyn FrameSource>>, FrameError> {
        let file = File::open(&self.path).map_err(|error| unreadable(&self.path, &error))?;
        Ok(Some(Box::new(Self::of(
            &self.path,
            file,
            Arc::clone(&self.frames),
            self.clock,
            Vec::new(),
        ))))
    }

    fn with_first_frame(&mut self, work: FirstFrameWork) -> Result<SheetAtoms, FrameError> {
        let mut first = Frame::empty();
        self.read(0, &mut first)?;
        chemfiles_thread::on_chemfiles_thread(move |_| {
            let mut frame = chemfiles::Frame::new();
            frame.resize(first.positions.len());
            frame.positions_mut().copy_from_slice(&first.positions);
            work(frame)
        })?
    }

    fn times(&mut self) -> Result<TimeTable, FrameError> {
        let times: Option<Vec<f64>> = self.frames.iter().map(|head| self.time(head)).collect();
        Ok(times.map_or_else(
            || TimeTable::Absent("its times are not used".to_owned()),
            TimeTable::of_times,
        ))
    }

    fn notes(&self) -> &[ReadNote] {
        &self.notes
    }
}
