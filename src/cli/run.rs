//! `planish run`: the whole job.

use crate::parameters::Sheet;
use crate::pipeline::Progress;
use crate::report::summary;

use super::terminal::{Message, tell};
use super::{ExitStatus, PlainLines, ProgressBar, Quiet, RunArguments, SharedOptions, Terminal};

/// What a finished job leaves to say.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Finished {
    /// The parameters of each sheet, for the summary.
    pub sheets: Vec<Sheet>,
    /// Runs that were refused for their input, each with its error.
    pub refused: Vec<String>,
    /// Gates of the pipeline that were not met, each with what was found.
    pub gate_missed: Vec<String>,
}

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
    match run_pipeline(arguments, progress.as_ref()) {
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
fn run_pipeline(arguments: &RunArguments, _progress: &dyn Progress) -> Result<Finished, Failure> {
    let path = &arguments.pipeline;
    let _text = std::fs::read_to_string(path).map_err(|error| {
        Failure::Input(format!(
            "cannot read the pipeline file {}: {error}; check the path",
            path.display()
        ))
    })?;
    Err(Failure::Machine(
        "this build holds no pipeline yet: nothing was measured or written".to_owned(),
    ))
}

/// Prints the summary and what went wrong, and gives the status of the whole.
#[must_use]
pub fn finish(finished: &Finished, terminal: Terminal, quiet: bool) -> ExitStatus {
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
