//! The one door through which frames come: [`FrameSource`].

use std::path::Path;

use super::{Frame, FrameError};

/// A trajectory file of which any whole frame can be read; reading in ascending order is the fast way.
///
/// To add a reader: implement this trait in a file of its own and give it a row in `reader::open`.
pub trait FrameSource: Send {
    /// The file, as the user named it.
    fn path(&self) -> &Path;

    /// How many whole frames the file holds.
    fn len(&self) -> usize;

    /// Whether the file holds no frame.
    fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// Reads frame `index` (from 0) into `frame`, reusing its memory. Positions are those of *all* atoms of the file.
    ///
    /// # Errors
    /// Where the frame cannot be parsed, or has no cell.
    fn read(&mut self, index: usize, frame: &mut Frame) -> Result<(), FrameError>;
}
