//! The `planish` binary: parse, call, exit status.

use std::process::ExitCode;

fn main() -> ExitCode {
    planish::cli::dispatch(std::env::args_os()).into()
}
