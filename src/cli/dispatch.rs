//! From the words on the command line to the exit status.

use std::ffi::OsString;
use std::io;

use clap::Parser;

use crate::pipeline::Progress;

use super::run::{Failure, Finished, run};
use super::{Arguments, Command, ExitStatus, RunArguments, Terminal};

/// Parses the words, does what they say, and gives the status. Wrong usage is explained on stderr with status 2; `--help`
/// and `--version` go to stdout with status 0.
#[must_use]
pub fn dispatch(words: impl IntoIterator<Item = OsString>) -> ExitStatus {
    let terminal = Terminal::detect();
    match Arguments::try_parse_from(words) {
        Ok(Arguments {
            command: Command::Run(arguments),
        }) => run(&arguments, terminal, run_pipeline),
        Err(usage) => {
            let printed = usage.print();
            match printed {
                Err(error) if error.kind() != io::ErrorKind::BrokenPipe => ExitStatus::MachineFailed,
                _ if usage.use_stderr() => ExitStatus::InputWrong,
                _ => ExitStatus::Done,
            }
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
