//! The command line: one file per command, exit status in one place.

mod arguments;
mod check;
mod dispatch;
mod exit_status;
mod mint;
mod mint_progress;
mod progress_bar;
mod run;
mod terminal;

pub use arguments::{Arguments, CheckArguments, Command, RunArguments, SharedOptions};
pub use dispatch::dispatch;
pub use exit_status::ExitStatus;
pub use mint::{Lattice, Law, MintArguments};
pub use progress_bar::{PlainLines, ProgressBar, Quiet};
pub use run::{Failure, finish};
pub use terminal::Terminal;
