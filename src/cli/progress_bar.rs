//! Progress on stderr: a bar on a terminal, otherwise one plain line at most every 30 s, or nothing at all.

use std::io::Write;
use std::sync::{Mutex, PoisonError};
use std::time::{Duration, Instant};

use indicatif::{HumanDuration, ProgressDrawTarget, ProgressStyle};

use crate::pipeline::Progress;

use super::terminal::{Message, tell};

/// Longest silence of a long run without a terminal, and shortest time between two lines.
pub(super) const LINE_EVERY: Duration = Duration::from_secs(30);

/// Frames and atoms since a run started.
#[derive(Debug)]
struct Tally {
    run: String,
    frames: usize,
    frames_wanted: usize,
    atom_frames: u64,
    started: Instant,
    last_line: Instant,
}

impl Tally {
    fn new() -> Self {
        let now = Instant::now();
        Self {
            run: String::new(),
            frames: 0,
            frames_wanted: 0,
            atom_frames: 0,
            started: now,
            last_line: now,
        }
    }

    /// Starts a run; the time since the last line goes on.
    fn start(&mut self, sheet: &str, run: &str, frames: usize) {
        *self = Self {
            run: format!("{sheet}/{run}"),
            frames_wanted: frames,
            last_line: self.last_line,
            ..Self::new()
        };
    }

    fn add(&mut self, frames: usize, atoms: usize) {
        self.frames += frames;
        self.atom_frames += (frames as u64).saturating_mul(atoms as u64);
    }

    /// Frames and atom-frames a second so far.
    fn rates(&self, elapsed: Duration) -> (f64, f64) {
        let seconds = elapsed.as_secs_f64().max(1e-3);
        (self.frames as f64 / seconds, self.atom_frames as f64 / seconds)
    }

    /// The line of a log.
    fn line(&self, elapsed: Duration) -> String {
        let (frames, atom_frames) = self.rates(elapsed);
        let left = self.frames_wanted.saturating_sub(self.frames) as f64 / frames.max(1e-9);
        let line = format!(
            "{}: {} of {} frames, {frames:.0} frames/s, {} atom-frames/s",
            self.run,
            self.frames,
            self.frames_wanted,
            with_prefix(atom_frames)
        );
        if self.frames > 0 && left < 1e9 {
            let left = HumanDuration(Duration::from_secs_f64(left));
            format!("{line}, {left} left")
        } else {
            line
        }
    }
}

/// A rate with the metric prefix that leaves one to three digits before the point.
fn with_prefix(rate: f64) -> String {
    match rate {
        rate if rate >= 1e9 => format!("{:.1} G", rate / 1e9),
        rate if rate >= 1e6 => format!("{:.1} M", rate / 1e6),
        rate if rate >= 1e3 => format!("{:.1} k", rate / 1e3),
        rate => format!("{rate:.0}"),
    }
}

fn locked(tally: &Mutex<Tally>) -> std::sync::MutexGuard<'_, Tally> {
    // A tally is numbers only: it stays usable whatever happened to another thread.
    tally.lock().unwrap_or_else(PoisonError::into_inner)
}

/// A bar with frames a second, atom-frames a second and the time left of the run.
#[derive(Debug)]
pub struct ProgressBar {
    bar: indicatif::ProgressBar,
    tally: Mutex<Tally>,
    verbose: bool,
}

impl ProgressBar {
    /// A bar on stderr; `verbose` shows notes too.
    #[must_use]
    pub fn new(verbose: bool) -> Self {
        let bar = indicatif::ProgressBar::with_draw_target(None, ProgressDrawTarget::stderr());
        let template = "{prefix:20!} {wide_bar} {pos}/{len} frames, {per_sec}, {msg}, {eta} left";
        if let Ok(style) = ProgressStyle::with_template(template) {
            bar.set_style(style.with_key(
                "per_sec",
                |state: &indicatif::ProgressState, writer: &mut dyn std::fmt::Write| {
                    let _ = write!(writer, "{:.0} frames/s", state.per_sec());
                },
            ));
        }
        Self {
            bar,
            tally: Mutex::new(Tally::new()),
            verbose,
        }
    }
}

impl Progress for ProgressBar {
    fn run_started(&self, sheet: &str, run: &str, frames: usize) {
        locked(&self.tally).start(sheet, run, frames);
        self.bar.set_length(frames as u64);
        self.bar.set_prefix(format!("{sheet}/{run}"));
        self.bar.set_message("-");
        self.bar.reset();
    }

    fn frames_done(&self, frames: usize, atoms: usize) {
        let mut tally = locked(&self.tally);
        tally.add(frames, atoms);
        let (_, atom_frames) = tally.rates(tally.started.elapsed());
        drop(tally);
        self.bar
            .set_message(format!("{} atom-frames/s", with_prefix(atom_frames)));
        self.bar.inc(frames as u64);
    }

    fn run_finished(&self) {
        self.bar.finish_and_clear();
    }

    fn warning(&self, message: &str) {
        self.bar.suspend(|| tell(Message::Warning, message));
    }

    fn note(&self, message: &str) {
        if self.verbose {
            self.bar.suspend(|| tell(Message::Note, message));
        }
    }
}

/// Plain lines for logs and batch jobs.
#[derive(Debug)]
pub struct PlainLines {
    tally: Mutex<Tally>,
    verbose: bool,
}

impl PlainLines {
    /// Lines on stderr; `verbose` shows notes too.
    #[must_use]
    pub fn new(verbose: bool) -> Self {
        Self {
            tally: Mutex::new(Tally::new()),
            verbose,
        }
    }
}

impl Progress for PlainLines {
    fn run_started(&self, sheet: &str, run: &str, frames: usize) {
        locked(&self.tally).start(sheet, run, frames);
    }

    fn frames_done(&self, frames: usize, atoms: usize) {
        let mut tally = locked(&self.tally);
        tally.add(frames, atoms);
        if tally.last_line.elapsed() >= LINE_EVERY {
            tally.last_line = Instant::now();
            let line = tally.line(tally.started.elapsed());
            let _ = writeln!(anstream::stderr().lock(), "{line}");
        }
    }

    fn run_finished(&self) {}

    fn warning(&self, message: &str) {
        tell(Message::Warning, message);
    }

    fn note(&self, message: &str) {
        if self.verbose {
            tell(Message::Note, message);
        }
    }
}

/// Warnings only.
#[derive(Clone, Copy, Debug, Default)]
pub struct Quiet;

impl Progress for Quiet {
    fn run_started(&self, _sheet: &str, _run: &str, _frames: usize) {}

    fn frames_done(&self, _frames: usize, _atoms: usize) {}

    fn run_finished(&self) {}

    fn warning(&self, message: &str) {
        tell(Message::Warning, message);
    }

    fn note(&self, _message: &str) {}
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_says_how_far_how_fast_and_how_long() {
        let mut tally = Tally::new();
        tally.start("hbn-a", "300K", 300);
        tally.add(60, 1008);
        tally.add(40, 1008);
        let line = tally.line(Duration::from_secs(10));
        assert_eq!(
            line,
            "hbn-a/300K: 100 of 300 frames, 10 frames/s, 10.1 k atom-frames/s, 20 seconds left"
        );
    }
}
