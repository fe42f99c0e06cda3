//! `planish check`: validate a pipeline, open every input, print what the job would do and cost.

use serde::Serialize;

use super::terminal::{Message, tell};
use super::{CheckArguments, ExitStatus, Terminal};
use crate::pipeline::{Plan, RunSurvey, survey};
use crate::report::survey_table;

/// The resolved plan as `--json` prints it.
#[derive(Serialize)]
struct Checked<'a> {
    pipeline: &'a str,
    output: String,
    block_frames: usize,
    runs: &'a [RunSurvey],
    problems: &'a [String],
}

/// Checks a pipeline. Every problem is told, not the first only; any of them gives status 2.
pub(super) fn check(arguments: &CheckArguments, terminal: Terminal) -> ExitStatus {
    let plan = match Plan::load(&arguments.pipeline) {
        Ok(plan) => plan,
        Err(problems) => {
            tell(Message::Error, &problems.render(terminal.messages_in_colour));
            return ExitStatus::InputWrong;
        }
    };
    if !plan.warnings.is_empty() {
        tell(
            Message::Warning,
            plan.warnings.render(terminal.messages_in_colour).trim_end(),
        );
    }
    let (runs, problems) = survey(&plan);
    let output = plan.default_output().display().to_string();
    let text = if arguments.json {
        let checked = Checked {
            pipeline: &plan.name,
            output,
            block_frames: plan.spectrum.block_frames,
            runs: &runs,
            problems: &problems,
        };
        serde_json::to_string_pretty(&checked)
            .map(|text| text + "\n")
            .unwrap_or_default()
    } else {
        format!(
            "Pipeline {}: {} run(s), blocks of {} frames, results in {output}\n{}",
            plan.name,
            runs.len() + problems.len(),
            plan.spectrum.block_frames,
            survey_table(&survey_rows(&runs), terminal.summary)
        )
    };
    let mut status = ExitStatus::Done;
    if let Err(error) = terminal.print(&text) {
        tell(Message::Error, &format!("cannot print the plan: {error}"));
        status = ExitStatus::MachineFailed;
    }
    for run in &runs {
        for note in &run.notes {
            tell(Message::Note, &format!("{}/{}: {note}", run.sheet, run.run));
        }
    }
    for problem in &problems {
        tell(Message::Error, problem);
        status = status.max(ExitStatus::InputWrong);
    }
    status
}

/// Rows of the table: what a user compares between runs.
fn survey_rows(runs: &[RunSurvey]) -> Vec<Vec<String>> {
    let megabytes = |bytes: usize| format!("{:.1}", bytes as f64 / 1e6);
    runs.iter()
        .map(|run| {
            vec![
                format!("{}/{}", run.sheet, run.run),
                run.frames.to_string(),
                run.atoms.to_string(),
                run.planes.to_string(),
                run.primitive_cells
                    .map_or_else(|| "none".to_owned(), |cells| cells.to_string()),
                run.modes.to_string(),
                format!("{:.4}", run.smallest_q),
                run.transform.to_owned(),
                megabytes(run.record_bytes),
                format!("{:.1}", run.seconds_on_one_thread),
            ]
        })
        .collect()
}
