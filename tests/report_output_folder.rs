//! Files of the output folder appear whole or not at all.

use std::fs;
use std::path::Path;

use planish::report::OutputFolder;

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .expect("a readable folder")
        .map(|entry| {
            entry
                .expect("an entry")
                .file_name()
                .to_string_lossy()
                .into_owned()
        })
        .collect();
    names.sort();
    names
}

#[test]
fn a_file_is_written_whole_and_replaced_whole() {
    let place = tempfile::tempdir().expect("a temporary folder");
    let path = place.path().join("deep/down/results");
    let folder = OutputFolder::prepare(&path).expect("a writable folder");
    assert_eq!(
        names(&path),
        Vec::<String>::new(),
        "the trial leaves nothing behind"
    );
    folder.write("area.csv", "first").expect("written");
    folder.write("area.csv", "second, longer").expect("replaced");
    folder.write("figures/kappa-a.svg", "<svg/>").expect("written");
    assert_eq!(
        fs::read_to_string(path.join("area.csv")).expect("readable"),
        "second, longer"
    );
    assert_eq!(names(&path), ["area.csv", "figures"]);
    assert_eq!(names(&path.join("figures")), ["kappa-a.svg"]);
}

#[test]
fn a_failed_write_leaves_the_old_and_nothing_else() {
    let place = tempfile::tempdir().expect("a temporary folder");
    let folder = OutputFolder::prepare(place.path()).expect("a writable folder");
    // A folder that is not empty stands where the file should go: the last step, the rename, fails.
    fs::create_dir(place.path().join("runs.csv")).expect("a folder");
    fs::write(place.path().join("runs.csv/old"), "old").expect("a file");
    let error = folder
        .write("runs.csv", "new")
        .expect_err("a folder cannot be replaced by a file");
    let message = error.to_string();
    assert!(
        message.contains("runs.csv") && message.contains("rename"),
        "{message}"
    );
    assert_eq!(names(place.path()), ["runs.csv"], "no part is left behind");
    assert_eq!(
        fs::read_to_string(place.path().join("runs.csv/old")).expect("kept"),
        "old"
    );
}

#[test]
fn a_folder_that_cannot_be_is_refused_before_the_work() {
    let place = tempfile::tempdir().expect("a temporary folder");
    let file = place.path().join("file");
    fs::write(&file, "not a folder").expect("a file");
    let error = OutputFolder::prepare(&file.join("results")).expect_err("a file is no folder");
    assert!(error.to_string().contains("--out"), "it says what to do: {error}");
    let error = OutputFolder::prepare(&file).expect_err("a file is no folder");
    assert_eq!(error.path, file);
    assert_eq!(fs::read_to_string(&file).expect("kept"), "not a folder");
}

#[cfg(target_os = "linux")]
#[test]
fn a_folder_without_permission_is_refused_unless_the_system_lets_everything_through() {
    use std::os::unix::fs::PermissionsExt;
    let place = tempfile::tempdir().expect("a temporary folder");
    let closed = place.path().join("closed");
    fs::create_dir(&closed).expect("a folder");
    fs::set_permissions(&closed, fs::Permissions::from_mode(0o555)).expect("permissions");
    // The superuser may write anywhere: then there is nothing to refuse.
    let superuser = fs::write(closed.join("probe"), "").is_ok();
    let prepared = OutputFolder::prepare(&closed);
    assert_eq!(prepared.is_ok(), superuser);
    if let Err(error) = prepared {
        assert!(error.to_string().contains("may write"), "{error}");
    }
}
