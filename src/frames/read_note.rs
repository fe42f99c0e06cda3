//! What the user should know of how the files of a run were read.

use std::fmt;
use std::path::PathBuf;

/// A remark on the reading of a run: nothing is wrong enough to refuse it.
#[derive(Clone, Debug, PartialEq)]
pub enum ReadNote {
    /// The file ends within a frame, which was left out.
    IncompleteFrame {
        /// The file.
        path: PathBuf,
        /// The frame left out, from 0.
        frame: usize,
    },
    /// Frames not later than the last one kept were left out: a restart repeats the end of the part before it.
    OverlapDropped {
        /// The file whose frames were left out.
        path: PathBuf,
        /// How many.
        frames: usize,
        /// Time of the first of them, in ps.
        first_ps: f64,
        /// Time of the last of them, in ps.
        last_ps: f64,
    },
    /// The kept frames are not evenly spaced.
    UnevenSpacing {
        /// Smallest spacing in ps.
        smallest_ps: f64,
        /// Largest spacing in ps.
        largest_ps: f64,
        /// The spacing used: the median, in ps.
        used_ps: f64,
        /// The file and frame after the largest spacing.
        after: String,
    },
    /// The frames have no times.
    TimesMissing {
        /// The file.
        path: PathBuf,
        /// Why.
        reason: String,
    },
    /// The files hold no species for some selected atom, which is called "X".
    SpeciesUnknown {
        /// How many atoms.
        atoms: usize,
    },
    /// No mass is known for some selected atom, so none is used.
    MassesUnknown {
        /// The species of the selection.
        species: String,
    },
    /// The atoms of a text dump carry no ids, so their order is taken from the file.
    OrderAssumed {
        /// The file.
        path: PathBuf,
    },
    /// A warning of the library that read the file.
    Reader {
        /// The file.
        path: PathBuf,
        /// The warning.
        message: String,
    },
}

impl fmt::Display for ReadNote {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::IncompleteFrame { path, frame } => {
                write!(
                    f,
                    "{} ends within frame {frame}, which is left out",
                    path.display()
                )
            }
            Self::OverlapDropped {
                path,
                frames,
                first_ps,
                last_ps,
            } => write!(
                f,
                "{}: {frames} frame(s) from {first_ps} ps to {last_ps} ps are not later than the frames before them and are left out (overlap of a restart)",
                path.display()
            ),
            Self::UnevenSpacing {
                smallest_ps,
                largest_ps,
                used_ps,
                after,
            } => write!(
                f,
                "frames are unevenly spaced in time, from {smallest_ps} ps to {largest_ps} ps (before {after}); {used_ps} ps is used"
            ),
            Self::TimesMissing { path, reason } => write!(
                f,
                "{} has no frame times ({reason}): relaxation times are unknown; give `frame_interval`, or `timestep` where the file has steps",
                path.display()
            ),
            Self::SpeciesUnknown { atoms } => write!(
                f,
                "the files hold no species for {atoms} atom(s), which are called \"X\"; give `topology` or `species`"
            ),
            Self::MassesUnknown { species } => write!(
                f,
                "no mass is known for every atom of the species {species}, so the centre is unweighted and the areal density absent; give `topology` with masses, or element names in `species`"
            ),
            Self::OrderAssumed { path } => write!(
                f,
                "{}: atoms carry no id, so the same order in every frame is assumed",
                path.display()
            ),
            Self::Reader { path, message } => write!(f, "{}: {message}", path.display()),
        }
    }
}
