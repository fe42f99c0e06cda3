//! From the words on the command line to the exit status.

use std::ffi::OsString;
use std::io;

use clap::Parser;

use super::check::check;
use super::mint::mint;
use super::run::run;
use super::{Arguments, Command, ExitStatus, Terminal};

/// Parses the words, does what they say, and gives the status. Wrong usage is explained on stderr with status 2; `--help`
/// and `--version` go to stdout with status 0.
#[must_use]
pub fn dispatch(words: impl IntoIterator<Item = OsString>) -> ExitStatus {
    let terminal = Terminal::detect();
    match Arguments::try_parse_from(words) {
        Ok(Arguments { command }) => match command {
            Command::Run(arguments) => run(&arguments, terminal),
            Command::Check(arguments) => check(&arguments, terminal),
            Command::Mint(arguments) => mint(&arguments, terminal),
        },
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
