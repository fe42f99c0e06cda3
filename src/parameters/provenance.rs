//! Where the numbers of a parameter file came from.

use std::fs::File;
use std::io;
use std::path::{Component, Path, PathBuf};

use serde::{Deserialize, Serialize};

/// `[provenance]`: the program, the pipeline, the inputs and the frames behind a parameter file.
///
/// No dates, no absolute paths, no thread counts: the same inputs give the same bytes.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Provenance {
    /// Name and version of the program, such as `planish 0.1.0`.
    pub program: String,
    /// File name of the pipeline, without its folder.
    pub pipeline: String,
    /// BLAKE3 hash of the pipeline file, in hexadecimal.
    pub pipeline_blake3: String,
    /// Every input file, in the order of the pipeline.
    #[serde(default)]
    pub input: Vec<InputHash>,
    /// The frames behind each run.
    #[serde(default)]
    pub run: Vec<RunFrames>,
}

/// One input file.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct InputHash {
    /// Path relative to the pipeline file's folder, with forward slashes.
    pub path: String,
    /// BLAKE3 hash of its bytes, in hexadecimal.
    pub blake3: String,
}

/// The frames behind one run.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct RunFrames {
    /// Name of the sheet.
    pub sheet: String,
    /// Name of the run.
    pub run: String,
    /// Whole frames read.
    pub frames: usize,
    /// Frames left after the equilibration cut.
    pub frames_used: usize,
}

impl Provenance {
    /// The name and version of this program.
    #[must_use]
    pub fn this_program() -> String {
        format!("{} {}", env!("CARGO_PKG_NAME"), env!("CARGO_PKG_VERSION"))
    }
}

impl InputHash {
    /// Hashes a file and names it relative to the pipeline's folder.
    ///
    /// # Errors
    /// Where the file cannot be read.
    pub fn of(path: &Path, pipeline_folder: &Path) -> io::Result<Self> {
        let mut hasher = blake3::Hasher::new();
        hasher.update_reader(File::open(path)?)?;
        Ok(Self {
            path: relative_path(
                &std::path::absolute(path)?,
                &std::path::absolute(pipeline_folder)?,
            ),
            blake3: hasher.finalize().to_hex().to_string(),
        })
    }
}

/// `path` as seen from `folder`, both absolute, with `..` where needed and forward slashes. By the names alone: links are
/// not followed, so the result does not depend on how a machine mounts its disks.
fn relative_path(path: &Path, folder: &Path) -> String {
    let (path, folder) = (without_dots(path), without_dots(folder));
    let shared = path
        .components()
        .zip(folder.components())
        .take_while(|(a, b)| a == b)
        .count();
    let up = folder.components().skip(shared).map(|_| "..".to_owned());
    let down = path
        .components()
        .skip(shared)
        .map(|part| part.as_os_str().to_string_lossy().into_owned());
    up.chain(down).collect::<Vec<_>>().join("/")
}

/// The path with `.` and `name/..` resolved by the names alone.
fn without_dots(path: &Path) -> PathBuf {
    let mut resolved = PathBuf::new();
    for part in path.components() {
        match part {
            Component::CurDir => {}
            Component::ParentDir => {
                resolved.pop();
            }
            other => resolved.push(other),
        }
    }
    resolved
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn paths_are_seen_from_the_pipeline() {
        let seen = |path: &str| relative_path(Path::new(path), Path::new("/home/me/pipelines"));
        assert_eq!(seen("/home/me/pipelines/../data/a.xtc"), "../data/a.xtc");
        assert_eq!(seen("/home/me/pipelines/./a.xtc"), "a.xtc");
        assert_eq!(seen("/scratch/a.xtc"), "../../../scratch/a.xtc");
    }

    #[test]
    fn the_hash_is_the_published_one() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let file = folder.path().join("a.txt");
        std::fs::write(&file, b"").expect("a small file");
        let hash = InputHash::of(&file, folder.path()).expect("a readable file");
        assert_eq!(hash.path, "a.txt");
        // BLAKE3 of the empty input: the official test vectors of BLAKE3, input_len 0.
        assert_eq!(
            hash.blake3,
            "af1349b9f5f9a1a6a0404dea36dcc9499bcb25c9adc112b7cc9a93cae41f3262"
        );
    }
}
