//! `planish check`: what the plan of a pipeline shows, and that every problem is told at once.

use std::fmt::Write;
use std::process::{Command, Output};

use tempfile::TempDir;

fn check(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_planish"))
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .arg("check")
        .args(arguments)
        .output()
        .expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("UTF-8")
}

/// 21 x 12 rectangular cells of four atoms are 504 primitive cells, so 251.5 independent waves and those that the zone's
/// edge shares; the smallest is 2 pi over the longer side.
#[test]
fn the_demo_is_described_from_its_files() {
    let output = check(&["pipelines/drumhead.toml", "--json"]);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let plan: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
    let runs = plan["runs"].as_array().expect("runs");
    assert_eq!(runs.len(), 10);
    for run in runs {
        assert_eq!(run["frames"], 301);
        assert_eq!(run["atoms"], 1008);
        assert_eq!(run["planes"], 1);
        assert_eq!(run["primitive_cells"], 504);
        assert_eq!(run["blocks"], 19);
        assert!((run["frame_interval_ps"].as_f64().expect("a number") - 0.4).abs() < 1e-6);
        let smallest = run["smallest_q"].as_f64().expect("a number");
        assert!(
            (smallest - std::f64::consts::TAU / 52.4).abs() < 0.002,
            "{smallest}"
        );
    }
    assert!(plan["problems"].as_array().expect("problems").is_empty());
}

#[test]
fn the_table_names_every_run_and_nothing_is_measured() {
    let output = check(&["pipelines/fixed-cell.toml"]);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let table = text(&output.stdout);
    for word in [
        "hbn-a/free",
        "hbn-a/fixed",
        "601",
        "non-uniform FFT",
        "fixed-cell.out",
    ] {
        assert!(table.contains(word), "no {word} in\n{table}");
    }
}

/// Two runs with wrong inputs: both are told, with the good one's row still printed.
#[test]
fn every_problem_of_the_inputs_is_told() {
    let folder = TempDir::new().expect("a temporary folder");
    let demo = concat!(env!("CARGO_MANIFEST_DIR"), "/demo-trajectories");
    std::fs::write(folder.path().join("empty.xyz"), "").expect("written");
    std::fs::write(folder.path().join("words.xtc"), "this is no trajectory").expect("written");
    let pipeline = folder.path().join("job.toml");
    let runs = [
        format!("{demo}/hbn-a-300K.xtc"),
        "empty.xyz".into(),
        "words.xtc".into(),
    ];
    let mut toml = "[pipeline]\nname = \"job\"\n[[sheet]]\nname = \"s\"\n".to_owned();
    for (index, run) in runs.iter().enumerate() {
        let _ = write!(
            toml,
            "[[sheet.run]]\nname = \"r{index}\"\ntrajectory = \"{run}\"\ntemperature = \"300 K\"\n"
        );
    }
    std::fs::write(&pipeline, toml).expect("written");
    let output = check(&[pipeline.to_str().expect("a plain path")]);
    let (table, errors) = (text(&output.stdout), text(&output.stderr));
    assert_eq!(output.status.code(), Some(2), "{errors}");
    assert!(table.contains("s/r0"), "{table}");
    for place in ["run s/r1", "empty.xyz", "run s/r2", "words.xtc"] {
        assert!(errors.contains(place), "no {place} in\n{errors}");
    }
    assert!(!folder.path().join("job.out").exists(), "check writes nothing");
}

#[test]
fn problems_of_the_file_come_with_their_place() {
    let folder = TempDir::new().expect("a temporary folder");
    let pipeline = folder.path().join("job.toml");
    std::fs::write(
        &pipeline,
        "[pipeline]\nname = \"job\"\n[[sheet]]\nname = \"s\"\nnormall = \"c\"\n[[sheet.run]]\ntrajectory = \"none.xtc\"\ntemperature = 300\n",
    )
    .expect("written");
    let output = check(&[pipeline.to_str().expect("a plain path")]);
    let errors = text(&output.stderr);
    assert_eq!(output.status.code(), Some(2));
    for word in ["job.toml:5:1", "normal", "none.xtc", "job.toml:8"] {
        assert!(errors.contains(word), "no {word} in\n{errors}");
    }
}
