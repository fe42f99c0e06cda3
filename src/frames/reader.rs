//! Which reader takes which trajectory file: one row a reader.

use std::path::Path;

use super::chemfiles_reader::ChemfilesSource;
use super::error::unreadable;
use super::lammps_dump::LammpsDumpSource;
use super::text_file::first_bytes;
use super::xtc::{XtcSource, is_xtc};
use super::{FrameError, FrameSource, ReadOptions};

/// Bytes of (unpacked) text looked at to tell formats by content.
const HEAD_BYTES: usize = 64;

type OpenFn = fn(&Path, &ReadOptions) -> Result<Box<dyn FrameSource>, FrameError>;

/// A reader: whether it takes a file, and how it opens one.
struct Reader {
    /// Extensions of the formats it reads, for messages.
    extensions: fn() -> Vec<String>,
    /// Whether a file is for this reader, by its path and its first (unpacked) bytes.
    takes: fn(&Path, &[u8]) -> bool,
    open: OpenFn,
}

/// The readers, the first that takes a file opens it. Purpose-built readers stand before chemfiles, which takes the rest.
const READERS: [Reader; 3] = [
    // chemfiles' own reader of text dumps takes the bounds of a tilted box for its edges, and writes outside its memory
    // where the ids of the atoms exceed their number.
    Reader {
        extensions: || vec![".lammpstrj".to_owned(), ".dump".to_owned()],
        takes: |_, head| head.starts_with(b"ITEM:"),
        open: |path, options| Ok(Box::new(LammpsDumpSource::open(path, options)?)),
    },
    Reader {
        extensions: || vec![".xtc".to_owned()],
        takes: |_, head| is_xtc(head),
        open: |path, options| Ok(Box::new(XtcSource::open(path, options)?)),
    },
    Reader {
        extensions: || {
            let formats = chemfiles::formats_list();
            let readable = formats.iter().filter(|format| format.read && format.positions);
            readable
                .filter_map(|format| format.extension)
                .map(str::to_owned)
                .collect()
        },
        takes: |path, head| chemfiles_format(path, head).is_ok(),
        open: |path, options| {
            let head = first_bytes(path, HEAD_BYTES).map_err(|error| unreadable(path, &error))?;
            let format = chemfiles_format(path, &head).map_err(|reason| unknown_format(path, reason))?;
            Ok(Box::new(ChemfilesSource::open(path, &format, options)?))
        },
    },
];

/// Opens a trajectory file with the reader of its format.
///
/// # Errors
/// Where the path is missing, unreadable or a directory, the file is empty, its format unknown, or its reader finds no
/// whole frame.
pub fn open(path: &Path, options: &ReadOptions) -> Result<Box<dyn FrameSource>, FrameError> {
    let metadata = std::fs::metadata(path).map_err(|error| unreadable(path, &error))?;
    if metadata.is_dir() {
        return Err(FrameError::Directory {
            path: path.to_owned(),
            expected: "trajectory",
        });
    }
    if metadata.len() == 0 {
        return Err(FrameError::NoFrames {
            path: path.to_owned(),
            reason: "the file is empty".to_owned(),
        });
    }
    let head = first_bytes(path, HEAD_BYTES).map_err(|error| unreadable(path, &error))?;
    for reader in &READERS {
        if (reader.takes)(path, &head) {
            return (reader.open)(path, options);
        }
    }
    let reason = chemfiles_format(path, &head).err().unwrap_or_default();
    Err(unknown_format(path, reason))
}

/// The name of chemfiles' format for a path: by its extension; and LAMMPS data files, which have none that all agree
/// on, by `.data`, `.lmp` or a name that starts with "data.".
pub(super) fn chemfiles_format(path: &Path, head: &[u8]) -> Result<String, String> {
    let name = path
        .to_str()
        .ok_or("its path is not valid UTF-8, which chemfiles cannot open: rename the file")?;
    if head.starts_with(b"ITEM:") {
        return Err("it is a text dump".to_owned());
    }
    let (stem, compression) = [(".gz", " / GZ"), (".bz2", " / BZ2"), (".xz", " / XZ")]
        .into_iter()
        .find_map(|(ending, format)| Some((name.strip_suffix(ending)?, format)))
        .unwrap_or((name, ""));
    let stem = Path::new(stem);
    let data_extension = stem
        .extension()
        .is_some_and(|ending| ending == "data" || ending == "lmp");
    let data_name = stem
        .file_name()
        .and_then(|name| name.to_str())
        .is_some_and(|n| n.starts_with("data."));
    if data_extension || data_name {
        return Ok(format!("LAMMPS Data{compression}"));
    }
    chemfiles::guess_format(path).map_err(|error| error.message)
}

/// The error that lists what could be read.
pub(super) fn unknown_format(path: &Path, reason: String) -> FrameError {
    let mut known: Vec<String> = READERS.iter().flat_map(|reader| (reader.extensions)()).collect();
    known.sort();
    known.dedup();
    FrameError::UnknownFormat {
        path: path.to_owned(),
        reason,
        known: known.join(" "),
    }
}
