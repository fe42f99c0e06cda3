//! Where a frame lies, in words.

use std::fmt;
use std::path::PathBuf;

/// Where a frame of a run lies in its files, for messages: "frame 17 of run.xtc (t = 6.8 ps)".
#[derive(Clone, Debug, PartialEq)]
pub struct FramePlace {
    /// The file.
    pub path: PathBuf,
    /// The frame's number in the file, from 0.
    pub frame_in_file: usize,
    /// Its time in ps, where known.
    pub time_ps: Option<f64>,
}

impl fmt::Display for FramePlace {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}, frame {}", self.path.display(), self.frame_in_file)?;
        match self.time_ps {
            // Times stored in single precision carry digits that mean nothing.
            Some(time) => write!(f, " (t = {} ps)", (time * 1e6).round() / 1e6),
            None => Ok(()),
        }
    }
}
