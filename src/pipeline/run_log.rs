//! run.log: dates, paths, threads and timings, which never go into a result.

use std::time::Instant;

use super::job::RunOptions;
use super::plan::Plan;

/// The log of one job.
pub struct RunLog {
    started: Instant,
    lines: Vec<String>,
}

impl RunLog {
    /// Starts the clock.
    #[must_use]
    pub fn start(plan: &Plan, options: &RunOptions) -> Self {
        let lines = vec![
            format!(
                "planish {} started {}",
                env!("CARGO_PKG_VERSION"),
                jiff::Timestamp::now()
            ),
            format!("pipeline {}", plan.file.display()),
            format!("output {}", options.out.display()),
            format!("threads {}", options.threads),
        ];
        Self {
            started: Instant::now(),
            lines,
        }
    }

    /// Notes what has just been done, with the seconds since the start.
    pub fn mark(&mut self, what: &str) {
        self.lines
            .push(format!("{:10.3} s  {what}", self.started.elapsed().as_secs_f64()));
    }

    /// The text of the log.
    #[must_use]
    pub fn text(&self) -> String {
        let mut text = self.lines.join("\n");
        text.push('\n');
        text
    }
}
