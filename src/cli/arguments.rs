//! What can be said on the command line.

use std::num::NonZeroUsize;
use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};

use super::MintArguments;

/// The command line as parsed.
#[derive(Clone, Debug, Parser)]
#[command(
    name = "planish",
    version,
    about = "Turns atomistic trajectories of thin sheets into the parameters of a continuum plate",
    after_help = "Exit status: 0 done; 1 done, but a gate in the pipeline was not met; 2 the input or the usage is \
                  wrong; 3 the machine failed (disk full, no permission)."
)]
pub struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// The commands.
#[derive(Clone, Debug, Subcommand)]
pub enum Command {
    /// The whole job: read, project, measure, fit, and write the output folder
    Run(RunArguments),
    /// Parse and validate a pipeline, open every input, print the resolved plan and its cost; measure nothing
    Check(CheckArguments),
    /// Write synthetic trajectories whose true parameters are known
    Mint(Box<MintArguments>),
}

/// Arguments of `planish run`.
#[derive(Clone, Debug, Args)]
pub struct RunArguments {
    /// The pipeline file (TOML)
    #[arg(value_name = "PIPELINE")]
    pub pipeline: PathBuf,
    /// Options that commands share.
    #[command(flatten)]
    pub shared: SharedOptions,
}

/// Arguments of `planish check`.
#[derive(Clone, Debug, Args)]
pub struct CheckArguments {
    /// The pipeline file (TOML)
    #[arg(value_name = "PIPELINE")]
    pub pipeline: PathBuf,
    /// Print the plan as JSON
    #[arg(long)]
    pub json: bool,
}

/// Options that commands share.
#[derive(Clone, Debug, Args)]
pub struct SharedOptions {
    /// Folder for the results [default: NAME.out beside the pipeline file, NAME being the pipeline's name]
    #[arg(long, value_name = "DIR")]
    pub out: Option<PathBuf>,
    /// Number of threads [default: all cores]; the results do not depend on it
    #[arg(long, value_name = "N", value_parser = thread_count)]
    pub threads: Option<NonZeroUsize>,
    /// Show warnings and errors only
    #[arg(long, short, conflicts_with = "verbose")]
    pub quiet: bool,
    /// Show notes too
    #[arg(long, short)]
    pub verbose: bool,
}

impl SharedOptions {
    /// Threads to use: the stated number, else one a core.
    #[must_use]
    pub fn thread_count(&self) -> usize {
        self.threads
            .or_else(|| std::thread::available_parallelism().ok())
            .map_or(1, NonZeroUsize::get)
    }
}

pub(super) fn thread_count(text: &str) -> Result<NonZeroUsize, String> {
    text.parse()
        .map_err(|_| "expected a whole number, 1 or more".to_owned())
}
