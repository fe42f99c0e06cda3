//! Finds the files that a pipeline names: paths relative to it, and globs.

use std::path::{Path, PathBuf};

use super::diagnostics::{Diagnostic, Diagnostics};
use super::table_reader::Written;

/// The files that one entry names, in natural name order; empty, and reported, where there are none.
///
/// A text with glob characters that is the name of a file means that file.
pub(super) fn find_files(folder: &Path, entry: &Written<String>, problems: &mut Diagnostics) -> Vec<PathBuf> {
    let written = Path::new(&entry.value);
    let path = folder.join(written);
    if path.is_file() {
        return vec![path];
    }
    if !entry.value.contains(['*', '?', '[']) {
        problems.push(absent(&path, entry));
        return Vec::new();
    }
    // Only what the user wrote is a pattern; the folder in front of it is not.
    let pattern = if written.is_absolute() || folder.as_os_str().is_empty() {
        entry.value.clone()
    } else {
        format!(
            "{}/{}",
            glob::Pattern::escape(&folder.to_string_lossy()),
            entry.value
        )
    };
    let matches = match glob::glob(&pattern) {
        Ok(matches) => matches,
        Err(error) => {
            problems.push(
                Diagnostic::error(format!("`{}` is no glob: {}", entry.value, error.msg))
                    .at(entry.span.clone(), "expected a path or a glob")
                    .help("in a glob * and ? stand for letters, [ab] for one of them, ** for folders"),
            );
            return Vec::new();
        }
    };
    let mut files = Vec::new();
    for found in matches {
        match found {
            Ok(path) if path.is_file() => files.push(path),
            Ok(_) => {}
            Err(error) => problems.push(
                Diagnostic::error(format!(
                    "cannot look into {}: {}",
                    error.path().display(),
                    error.error()
                ))
                .at(entry.span.clone(), "while looking for these files")
                .help("check the folder's permissions"),
            ),
        }
    }
    if files.is_empty() {
        problems.push(
            Diagnostic::error(format!("no file matches `{}`", entry.value))
                .at(entry.span.clone(), "expected at least one file")
                .help(format!(
                    "looked in {}; paths are relative to the pipeline file",
                    shown(folder)
                )),
        );
    }
    alphanumeric_sort::sort_path_slice(&mut files);
    files
}

/// The one file that an entry names; `None`, and reported, where there is none or several.
pub(super) fn find_file(
    folder: &Path,
    entry: &Written<String>,
    problems: &mut Diagnostics,
) -> Option<PathBuf> {
    let mut files = find_files(folder, entry, problems);
    if files.len() > 1 {
        problems.push(
            Diagnostic::error(format!("`{}` matches {} files", entry.value, files.len()))
                .at(entry.span.clone(), "expected one file")
                .help("name the one that is meant"),
        );
        return None;
    }
    files.pop()
}

fn absent(path: &Path, entry: &Written<String>) -> Diagnostic {
    let place = |message: String| Diagnostic::error(message).at(entry.span.clone(), "expected a file");
    if path.is_dir() {
        return place(format!("`{}` is a folder", entry.value)).help(format!(
            "name the files in it, such as \"{}/*\"",
            entry.value.trim_end_matches('/')
        ));
    }
    if let Err(error) = path.metadata()
        && error.kind() != std::io::ErrorKind::NotFound
    {
        return place(format!("cannot open `{}`: {error}", entry.value))
            .help("check the permissions of the file and its folders");
    }
    let folder = path.parent().unwrap_or(Path::new(""));
    let help = if !folder.as_os_str().is_empty() && !folder.is_dir() {
        format!(
            "there is no folder {}; paths are relative to the pipeline file",
            shown(folder)
        )
    } else {
        match nearest_file(path) {
            Some(name) => format!("did you mean `{name}`?"),
            None => format!(
                "looked in {}; paths are relative to the pipeline file",
                shown(folder)
            ),
        }
    };
    place(format!("there is no file `{}`", entry.value)).help(help)
}

/// The file in the same folder whose name differs in fewest letters, at most a quarter of them.
fn nearest_file(path: &Path) -> Option<String> {
    let wanted = path.file_name()?.to_str()?;
    let folder = match path.parent()? {
        folder if folder.as_os_str().is_empty() => Path::new("."),
        folder => folder,
    };
    folder
        .read_dir()
        .ok()?
        .filter_map(|entry| entry.ok()?.file_name().into_string().ok())
        .map(|name| (strsim::osa_distance(&name, wanted), name))
        .min()
        .filter(|(distance, _)| distance * 4 <= wanted.len())
        .map(|(_, name)| name)
}

fn shown(folder: &Path) -> String {
    if folder.as_os_str().is_empty() {
        "the current folder".to_owned()
    } else {
        folder.display().to_string()
    }
}
