//! `planish run`: the whole job.

use crate::pipeline::{self, Plan, Progress, RunOptions, RunOutcome};
use crate::report::summary;

use super::terminal::{Message, tell};
use super::{ExitStatus, PlainLines, ProgressBar, Quiet, RunArguments, SharedOptions, Terminal};

/// Why a job could not be done at all.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Failure {
    /// The pipeline or its inputs are wrong.
    Input(String),
    /// The machine failed.
    Machine(String),
}

/// Runs a pipeline, prints the summary, and says how it went.
pub(super) fn run(arguments: &RunArguments, terminal: Terminal) -> ExitStatus {
    let progress = watcher(&arguments.shared, terminal);
    match run_pipeline(arguments, terminal, progress.as_ref()) {
        Ok(finished) => finish(&finished, terminal, arguments.shared.quiet),
        Err(Failure::Input(message)) => {
            tell(Message::Error, &message);
            ExitStatus::InputWrong
        }
        Err(Failure::Machine(message)) => {
            tell(Message::Error, &message);
            ExitStatus::MachineFailed
        }
    }
}

/// The work of `planish run`: the pipeline file is read and resolved, and the plan is carried out.
fn run_pipeline(
    arguments: &RunArguments,
    terminal: Terminal,
    progress: &dyn Progress,
) -> Result<RunOutcome, Failure> {
    let plan = Plan::load(&arguments.pipeline)
        .map_err(|problems| Failure::Input(problems.render(terminal.messages_in_colour)))?;
    if !plan.warnings.is_empty() {
        progress.warning(plan.warnings.to_string().trim_end());
    }
    let options = RunOptions {
        out: arguments
            .shared
            .out
            .clone()
            .unwrap_or_else(|| plan.default_output()),
        threads: arguments.shared.thread_count(),
    };
    let outcome =
        pipeline::run(&plan, &options, progress).map_err(|error| Failure::Machine(error.to_string()))?;
    progress.note(&format!("results are in {}", options.out.display()));
    Ok(outcome)
}

/// Prints the summary and what went wrong, and gives the status of the whole.
#[must_use]
pub fn finish(finished: &RunOutcome, terminal: Terminal, quiet: bool) -> ExitStatus {
    let mut status = ExitStatus::Done;
    if !quiet {
        let tables: Vec<String> = finished
            .sheets
            .iter()
            .map(|sheet| summary(sheet, terminal.summary))
            .collect();
        if let Err(error) = terminal.print(&tables.join("\n")) {
            tell(
                Message::Error,
                &format!("cannot print the summary: {error}; it is in the output folder"),
            );
            status = ExitStatus::MachineFailed;
        }
    }
    for gate in &finished.gate_missed {
        tell(Message::Error, &format!("gate not met: {gate}"));
        status = status.max(ExitStatus::GateMissed);
    }
    for refused in &finished.refused {
        tell(Message::Error, refused);
        status = status.max(ExitStatus::InputWrong);
    }
    status
}

/// Who watches the job.
fn watcher(options: &SharedOptions, terminal: Terminal) -> Box<dyn Progress> {
    if options.quiet {
        Box::new(Quiet)
    } else if terminal.interactive {
        Box::new(ProgressBar::new(options.verbose))
    } else {
        Box::new(PlainLines::new(options.verbose))
    }
}
