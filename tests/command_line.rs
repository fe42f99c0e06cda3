//! The command line as a script sees it: exit status, and what goes to which stream.

use std::process::{Command, Stdio};

use assert_cmd::assert::OutputAssertExt;
use planish::cli::{ExitStatus, Terminal, finish};
use planish::pipeline::RunOutcome;
use planish::report::SummaryStyle;

fn planish(words: &[&str]) -> Command {
    let mut command = Command::new(assert_cmd::cargo::cargo_bin!("planish"));
    command.args(words).env("NO_COLOR", "1");
    command
}

fn streams(words: &[&str]) -> (Option<i32>, String, String) {
    let output = planish(words).output().expect("the program starts");
    (
        output.status.code(),
        String::from_utf8(output.stdout).expect("UTF-8"),
        String::from_utf8(output.stderr).expect("UTF-8"),
    )
}

#[test]
fn wrong_usage_is_status_2_and_explained_on_stderr() {
    for words in [
        &["run", "--no-such-option", "a.toml"][..],
        &["run"],
        &["no-such-command"],
        &[],
        &["run", "a.toml", "--threads", "0"],
        &["run", "a.toml", "--threads", "many"],
        &["run", "a.toml", "--quiet", "--verbose"],
    ] {
        let (code, stdout, stderr) = streams(words);
        assert_eq!(code, Some(2), "{words:?}");
        assert_eq!(stdout, "", "{words:?}");
        assert!(stderr.contains("--help"), "{words:?}: {stderr}");
    }
}

#[test]
fn help_and_version_are_results_not_errors() {
    let (code, stdout, stderr) = streams(&["--help"]);
    assert_eq!((code, stderr.as_str()), (Some(0), ""));
    assert!(stdout.contains("run") && stdout.contains("Exit status"));
    let (code, stdout, _) = streams(&["--version"]);
    assert_eq!(code, Some(0));
    assert_eq!(stdout, format!("planish {}\n", env!("CARGO_PKG_VERSION")));
    let (_, stdout, _) = streams(&["run", "--help"]);
    for option in ["--out", "--threads", "--quiet", "--verbose"] {
        assert!(stdout.contains(option), "{option}");
    }
}

#[test]
fn a_missing_pipeline_is_status_2_and_named() {
    let (code, stdout, stderr) = streams(&["run", "no/such/pipeline.toml"]);
    assert_eq!(code, Some(2));
    assert_eq!(stdout, "");
    assert!(stderr.contains("no/such/pipeline.toml"), "{stderr}");
    assert!(!stderr.contains('\u{1b}'), "NO_COLOR is honoured");
}

#[test]
fn a_reader_that_has_gone_away_is_no_panic() {
    let mut child = planish(&["--help"])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    // The reading end is closed before, or while, the help is written.
    drop(child.stdout.take());
    child
        .wait_with_output()
        .expect("the program ends")
        .assert()
        .code(0);
}

const PLAIN: Terminal = Terminal {
    summary: SummaryStyle {
        width: None,
        colour: false,
    },
    interactive: false,
    messages_in_colour: false,
};

#[test]
fn the_status_of_a_finished_job_is_its_worst_part() {
    let finished = |refused: &[&str], gates: &[&str]| RunOutcome {
        sheets: vec![],
        refused: refused.iter().map(|text| (*text).to_owned()).collect(),
        gate_missed: gates.iter().map(|text| (*text).to_owned()).collect(),
    };
    let status = |job: &RunOutcome| finish(job, PLAIN, true);
    assert_eq!(status(&finished(&[], &[])), ExitStatus::Done);
    assert_eq!(status(&finished(&[], &["kappa"])), ExitStatus::GateMissed);
    assert_eq!(status(&finished(&["run 300K"], &[])), ExitStatus::InputWrong);
    assert_eq!(
        status(&finished(&["run 300K"], &["kappa"])),
        ExitStatus::InputWrong
    );
}

#[test]
fn statuses_are_the_documented_numbers() {
    let codes = [
        ExitStatus::Done,
        ExitStatus::GateMissed,
        ExitStatus::InputWrong,
        ExitStatus::MachineFailed,
    ]
    .map(ExitStatus::code);
    assert_eq!(codes, [0, 1, 2, 3]);
}
