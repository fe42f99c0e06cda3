//! The one door through which frames come: [`FrameSource`].

use std::path::Path;

use super::time_table::{TimeTable, probe_times};
use super::{Clock, EngineUnits, Frame, FrameError, ReadNote, SheetAtoms};

/// What a reader must be told beyond the path.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct ReadOptions {
    /// Where frame times come from.
    pub clock: Clock,
    /// What bare numbers are in, where the file does not say. A text dump defaults to lengths in A.
    pub engine_units: Option<EngineUnits>,
}

/// Work on the first frame of a file as chemfiles describes it: names, types, masses, residues, positions.
///
/// It runs on the thread that owns chemfiles' handles, so it carries its inputs with it.
pub type FirstFrameWork = Box<dyn FnOnce(chemfiles::Frame) -> Result<SheetAtoms, FrameError> + Send>;

/// A trajectory file of which any whole frame can be read; reading in ascending order is the fast way.
///
/// To add a reader: implement this trait in a file of its own and give it a row in `reader::READERS`.
pub trait FrameSource: Send {
    /// The file, as the user named it.
    fn path(&self) -> &Path;

    /// How many whole frames the file holds.
    fn len(&self) -> usize;

    /// Whether the file holds no frame.
    fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Reads frame `index` (from 0) into `frame`, reusing its memory. Positions are Cartesian, in A, those of *all* atoms
    /// of the file; the cell vectors are a, b, c in the same Cartesian frame. `time_ps` is set as the clock says, `None`
    /// where it needs the number of the frame in the run.
    ///
    /// # Errors
    /// Where the frame cannot be parsed, or has no cell.
    fn read(&mut self, index: usize, frame: &mut Frame) -> Result<(), FrameError>;

    /// Another reader of the same file, for another thread: it shares what was found out when the file was opened, and gives
    /// the same frames. `None` where the file is best read by one reader in order.
    ///
    /// # Errors
    /// Where the file cannot be opened again.
    fn another(&self) -> Result<Option<Box<dyn FrameSource>>, FrameError> {
        Ok(None)
    }

    /// Runs `work` on the first frame with all that the file says of its atoms.
    ///
    /// # Errors
    /// Where the frame cannot be parsed, and whatever `work` finds wrong.
    fn with_first_frame(&mut self, work: FirstFrameWork) -> Result<SheetAtoms, FrameError>;

    /// The times of all frames. Without a cheaper way it reads a few frames spread over the file, and all of them
    /// only where these are not evenly spaced.
    ///
    /// # Errors
    /// Where a frame cannot be read.
    fn times(&mut self) -> Result<TimeTable, FrameError> {
        probe_times(self)
    }

    /// What the user should know of how the file was read.
    fn notes(&self) -> &[ReadNote];
}
