//! Progress of `planish mint` on stderr: a bar on a terminal, otherwise a plain line at most every 30 s, or nothing.

use std::io::Write;
use std::sync::{Mutex, PoisonError};
use std::time::Instant;

use indicatif::{HumanDuration, ProgressBar, ProgressDrawTarget, ProgressStyle};

use crate::mint::Progress;

use super::progress_bar::LINE_EVERY;
use super::terminal::{Message, tell};

/// The watcher of a set being made.
pub(super) struct MintProgress {
    bar: ProgressBar,
    /// Where plain lines are wanted: when the last one was.
    last_line: Option<Mutex<Instant>>,
    verbose: bool,
}

impl MintProgress {
    pub fn new(quiet: bool, verbose: bool, interactive: bool) -> Self {
        let target = if interactive && !quiet {
            ProgressDrawTarget::stderr()
        } else {
            ProgressDrawTarget::hidden()
        };
        let bar = ProgressBar::with_draw_target(None, target);
        let template = "sampling {wide_bar} {pos}/{len} trajectories, {eta} left";
        if let Ok(style) = ProgressStyle::with_template(template) {
            bar.set_style(style);
        }
        Self {
            bar,
            last_line: (!interactive && !quiet).then(|| Mutex::new(Instant::now())),
            verbose,
        }
    }
}

impl Progress for MintProgress {
    fn work_planned(&self, trajectories: usize) {
        self.bar.set_length(trajectories as u64);
    }

    fn work_done(&self, trajectories: usize) {
        self.bar.inc(trajectories as u64);
        let Some(last_line) = &self.last_line else {
            return;
        };
        let mut last_line = last_line.lock().unwrap_or_else(PoisonError::into_inner);
        if last_line.elapsed() >= LINE_EVERY {
            *last_line = Instant::now();
            let _ = writeln!(
                anstream::stderr().lock(),
                "sampling: {} of {} trajectories, {} left",
                self.bar.position(),
                self.bar.length().unwrap_or(0),
                HumanDuration(self.bar.eta())
            );
        }
    }

    fn finished(&self) {
        self.bar.finish_and_clear();
    }

    fn note(&self, message: &str) {
        if self.verbose {
            self.bar.suspend(|| tell(Message::Note, message));
        }
    }
}
