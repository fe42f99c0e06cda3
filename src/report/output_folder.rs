//! Files that appear whole or not at all.

use std::fs::{self, File};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use tempfile::NamedTempFile;
use thiserror::Error;

/// A file or folder that could not be written.
#[derive(Debug, Error)]
#[error("cannot {action} {path}: {source}; {}", advice(source))]
pub struct WriteError {
    /// The file or folder.
    pub path: PathBuf,
    /// What failed, as a verb: `create`, `write`, `sync`, `rename into place`.
    pub action: &'static str,
    /// What the system said.
    pub source: io::Error,
}

/// What to do about an error of the system.
fn advice(error: &io::Error) -> &'static str {
    match error.kind() {
        io::ErrorKind::PermissionDenied | io::ErrorKind::ReadOnlyFilesystem => {
            "choose a folder you may write to with --out"
        }
        io::ErrorKind::StorageFull | io::ErrorKind::QuotaExceeded => {
            "free some space or choose another disk with --out, then run again"
        }
        io::ErrorKind::NotADirectory | io::ErrorKind::AlreadyExists | io::ErrorKind::IsADirectory => {
            "something else stands in its place: move it away or choose another folder with --out"
        }
        _ => "check the disk, or choose another folder with --out",
    }
}

/// The folder of results.
///
/// A file is written under a passing name in its own folder, synced to the disk and renamed; then the folder is synced.
/// Whoever reads sees the old file or the new one, never a part, whatever stops the program.
#[derive(Clone, Debug)]
pub struct OutputFolder {
    path: PathBuf,
}

impl OutputFolder {
    /// Creates the folder where it is missing and tries to write in it, so that a long job fails at its start.
    ///
    /// # Errors
    /// Where the folder cannot be created or written to.
    pub fn prepare(path: &Path) -> Result<Self, WriteError> {
        let folder = Self {
            path: path.to_owned(),
        };
        create_folder(path)?;
        let mut trial = folder.aside(path)?;
        trial
            .write_all(b"planish\n")
            .and_then(|()| trial.as_file().sync_all())
            .map_err(failed("write to", path))?;
        trial.close().map_err(failed("remove a trial file from", path))?;
        Ok(folder)
    }

    /// The folder itself.
    #[must_use]
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// Writes a file of this folder, `name` relative to it (`figures/area-a.svg`); folders between are created. An
    /// older file of that name is replaced.
    ///
    /// # Errors
    /// Where a step fails; the older file, if any, is then untouched and nothing is left behind.
    pub fn write(&self, name: impl AsRef<Path>, bytes: impl AsRef<[u8]>) -> Result<(), WriteError> {
        let target = self.path.join(name);
        let folder = target.parent().unwrap_or(&self.path);
        create_folder(folder)?;
        let mut aside = self.aside(folder)?;
        aside
            .write_all(bytes.as_ref())
            .map_err(failed("write", &target))?;
        aside.as_file().sync_all().map_err(failed("sync", &target))?;
        allow_others_to_read(aside.as_file()).map_err(failed("set the permissions of", &target))?;
        aside
            .persist(&target)
            .map_err(|error| failed("rename into place", &target)(error.error))?;
        sync_folder(folder)
    }

    /// A new file under a passing name; it vanishes unless it is persisted.
    fn aside(&self, folder: &Path) -> Result<NamedTempFile, WriteError> {
        debug_assert!(
            folder.starts_with(&self.path),
            "files stay inside the output folder"
        );
        tempfile::Builder::new()
            .prefix(".planish-")
            .suffix(".part")
            .tempfile_in(folder)
            .map_err(failed("create a file in", folder))
    }
}

fn failed(action: &'static str, path: &Path) -> impl FnOnce(io::Error) -> WriteError {
    let path = path.to_owned();
    move |source| WriteError { path, action, source }
}

fn create_folder(path: &Path) -> Result<(), WriteError> {
    fs::create_dir_all(path).map_err(failed("create the folder", path))
}

/// Temporary files are private to their maker; results are as readable as other new files usually are.
#[cfg(unix)]
fn allow_others_to_read(file: &File) -> io::Result<()> {
    use std::os::unix::fs::PermissionsExt;
    file.set_permissions(fs::Permissions::from_mode(0o644))
}

#[cfg(not(unix))]
#[allow(clippy::unnecessary_wraps)] // The other platform's version can fail.
fn allow_others_to_read(_file: &File) -> io::Result<()> {
    Ok(())
}

/// Makes the rename itself durable; only Unix lets a folder be synced.
#[cfg(unix)]
fn sync_folder(folder: &Path) -> Result<(), WriteError> {
    File::open(folder)
        .and_then(|opened| opened.sync_all())
        .map_err(failed("sync the folder", folder))
}

#[cfg(not(unix))]
#[allow(clippy::unnecessary_wraps)] // The other platform's version can fail.
fn sync_folder(_folder: &Path) -> Result<(), WriteError> {
    Ok(())
}
