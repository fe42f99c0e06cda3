//! `planish mint` as a script sees it: what it writes, that it is what was asked for, that a seed gives the same bytes, and
//! that bad requests are refused with nothing left behind.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use planish::parameters::{ParameterFile, Sheet};
use tempfile::TempDir;

fn mint(folder: &Path, words: &[&str]) -> Output {
    Command::new(assert_cmd::cargo::cargo_bin!("planish"))
        .current_dir(folder)
        .arg("mint")
        .args(words)
        .env("NO_COLOR", "1")
        .output()
        .expect("the program starts")
}

fn minted(folder: &Path, words: &[&str]) -> String {
    let output = mint(folder, words);
    let messages = String::from_utf8_lossy(&output.stderr).into_owned();
    assert_eq!(output.status.code(), Some(0), "{words:?}: {messages}");
    messages
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .expect("a folder")
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

const SMALL: [&str; 8] = [
    "--length",
    "20 angstrom",
    "--frames",
    "24",
    "--spacing",
    "2",
    "--name",
    "small",
];

#[test]
fn a_set_is_whole_and_the_same_bytes_whatever_the_threads() {
    let folder = TempDir::new().expect("a folder");
    let set = |out: &str, others: &[&str]| -> PathBuf {
        minted(folder.path(), &[&SMALL[..], &["--out", out], others].concat());
        folder.path().join(out)
    };
    let one = set("one", &["--threads", "1"]);
    let two = set("two", &["--threads", "2"]);
    let other = set("other", &["--seed", "2"]);
    assert_eq!(names(&one), ["300K.trr", "sheet.xyz", "small.toml", "truth.toml"]);
    for name in names(&one) {
        let bytes = |set: &Path| fs::read(set.join(&name)).expect("a file");
        assert_eq!(bytes(&one), bytes(&two), "{name}");
        if name == "300K.trr" || name == "truth.toml" {
            assert_ne!(bytes(&one), bytes(&other), "{name} follows the seed");
        }
    }
    assert_eq!(
        names(folder.path()),
        ["one", "other", "two"],
        "nothing else is left"
    );
}

#[test]
fn bad_requests_are_refused_and_leave_nothing() {
    let folder = TempDir::new().expect("a folder");
    fs::create_dir(folder.path().join("taken")).expect("a folder");
    for (words, reason) in [
        (&["--kappa=-1 eV"][..], "bending rigidity is -1 eV"),
        (&["--youngs", "0 N/m"], "Young's modulus is 0"),
        (&["--poisson", "1.2"], "the stiffness is unstable"),
        (&["--poisson=-1"], "the stiffness is unstable"),
        (&["--temperature", "0 K"], "temperature is 0 K"),
        (
            &["--temperature", "300 K", "--temperature", "300 K"],
            "given twice",
        ),
        (&["--length", "6 angstrom"], "too small for the lattice"),
        (
            &["--cut", "1.6 1/angstrom"],
            "out of the lattice's first Brillouin zone",
        ),
        (&["--cut", "0.15 1/angstrom"], "expected at least 6"),
        (&["--tension=-3 N/m"], "buckles the plate"),
        (&["--frames", "0"], "0 frames"),
        (&["--name", "a/b"], "names files"),
        (&["--format", "nonsense"], "nonsense"),
        (&["--kappa", "1.1"], "unit"),
        (&["--out", "taken"], "taken exists"),
    ] {
        let output = mint(folder.path(), words);
        let messages = String::from_utf8_lossy(&output.stderr).into_owned();
        assert_eq!(output.status.code(), Some(2), "{words:?}: {messages}");
        assert!(messages.contains(reason), "{words:?}: {messages}");
        assert_eq!(names(folder.path()), ["taken"], "{words:?}");
    }
    assert_eq!(names(&folder.path().join("taken")), [""; 0]);
}

fn sheet(path: &Path) -> Sheet {
    let mut file = ParameterFile::read(path).unwrap_or_else(|error| panic!("{error}"));
    assert_eq!(file.sheet.len(), 1);
    file.sheet.remove(0)
}

fn measured(folder: &Path, pipeline: &str) -> Sheet {
    let output = Command::new(assert_cmd::cargo::cargo_bin!("planish"))
        .current_dir(folder)
        .args(["run", pipeline, "--quiet"])
        .output()
        .expect("the program starts");
    let messages = String::from_utf8_lossy(&output.stderr).into_owned();
    assert_eq!(output.status.code(), Some(0), "{messages}");
    assert!(!messages.contains("warning"), "{messages}");
    sheet(&folder.join(pipeline.replace(".toml", ".out/parameters.toml")))
}

/// Value and error of a parameter.
fn number(sheet: &Sheet, name: &str, run: Option<&str>) -> (f64, f64) {
    let found = sheet
        .find(name, run)
        .unwrap_or_else(|| panic!("no {name} of {run:?}"));
    let value = found
        .value
        .unwrap_or_else(|| panic!("{name} has no value: {}", found.note));
    (value, found.error.unwrap_or(f64::INFINITY))
}

/// The whole way: minted atoms, read and measured with default settings, give the plate that was minted.
#[test]
fn a_measured_set_gives_its_truth() {
    let folder = TempDir::new().expect("a folder");
    let words = [
        "--frames",
        "400",
        "--length",
        "45 angstrom",
        "--out",
        "set",
        "--seed",
        "7",
    ];
    minted(folder.path(), &words);
    let set = folder.path().join("set");
    let truth = sheet(&set.join("truth.toml"));
    let found = measured(&set, "plate.toml");
    let run = Some("300K");
    for (name, run) in [
        ("bending_rigidity_bare", None),
        ("bending_rigidity", run),
        ("area_per_atom", run),
        ("excess_area", run),
        ("rms_slope", run),
        ("stiffness_11", run),
        ("stiffness_22", run),
        ("stiffness_12", run),
        ("stiffness_66", run),
        ("youngs_modulus", run),
        ("bulk_modulus", run),
        ("poisson_ratio", run),
    ] {
        let (expected, own_error) = number(&truth, name, run);
        // One run alone: the bare plate belongs to it.
        let at = if found.find(name, run).is_some() {
            run
        } else {
            Some("300K")
        };
        let (value, error) = number(&found, name, at);
        assert!(
            (value - expected).abs() < 3.0 * error.hypot(own_error),
            "{name}: {value} +- {error}, truth {expected} +- {own_error}"
        );
    }
}

/// Every lattice, a fixed cell, a cut and a tension: the pipeline reads it and finds the planes and the atoms' number.
#[test]
fn other_sheets_are_read_too() {
    let folder = TempDir::new().expect("a folder");
    for (name, words) in [
        ("square", &["--lattice", "square"][..]),
        (
            "rectangular",
            &["--lattice", "rectangular", "--tension", "0.1 N/m"],
        ),
        (
            "three",
            &["--lattice", "three-plane", "--lattice-constant", "3.16 angstrom"],
        ),
        (
            "fixed",
            &["--fixed-cell", "--cut", "1.0 1/angstrom", "--format", "xtc"],
        ),
    ] {
        let common = [
            "--name",
            name,
            "--frames",
            "40",
            "--length",
            "24 angstrom",
            "--spacing",
            "2",
        ];
        minted(folder.path(), &[&common[..], words].concat());
        let set = folder.path().join(format!("{name}-set"));
        let truth = sheet(&set.join("truth.toml"));
        let found = measured(&set, &format!("{name}.toml"));
        let run = Some("300K");
        let (expected, own_error) = number(&truth, "area_per_atom", run);
        let (value, error) = number(&found, "area_per_atom", run);
        assert!(
            (value - expected).abs() < 4.0 * error.hypot(own_error) + 1e-4 * expected,
            "{name}: {value} +- {error}, truth {expected} +- {own_error}"
        );
        assert_eq!(truth.find("stiffness_11", run).is_none(), name == "fixed");
    }
}
