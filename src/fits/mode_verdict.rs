//! How far a value read from modes can be trusted.

use super::Verdict;
use super::window::LEAST_MODES;
use crate::estimates::ModeEstimate;

/// Effective samples of the slowest mode that a good value needs.
const GOOD_SAMPLES: f64 = 20.0;

/// With fewer effective samples of the slowest mode there is no value.
const LEAST_SAMPLES: f64 = 5.0;

/// With fewer frames there is no value.
const LEAST_FRAMES: usize = 20;

/// Split R-hat below which halves agree (Gelman et al., Bayesian Data Analysis, 3rd ed., section 11.5).
const GOOD_R_HAT: f64 = 1.1;

/// Modes this much longer than the smallest |q| are as slow.
const EQUALLY_SLOW: f64 = 0.01;

/// A verdict and why.
#[derive(Clone, Debug, PartialEq)]
pub struct Judgement {
    /// The verdict.
    pub verdict: Verdict,
    /// One sentence a reason; empty where good without remarks.
    pub reasons: Vec<String>,
}

impl Judgement {
    /// Makes the verdict no better than `verdict`, for a reason.
    pub fn at_most(&mut self, verdict: Verdict, reason: impl Into<String>) {
        self.verdict = self.verdict.max(verdict);
        self.reasons.push(reason.into());
    }

    /// Adds a remark that leaves the verdict.
    pub fn remark(&mut self, remark: impl Into<String>) {
        self.reasons.push(remark.into());
    }

    /// The reasons as one text.
    #[must_use]
    pub fn note(&self) -> String {
        self.reasons.join("; ")
    }
}

/// The slowest mode of a window: that of smallest |q|; of several within 1 % the one with fewest effective samples.
#[must_use]
pub fn slowest<'a>(window: &[&'a ModeEstimate]) -> Option<&'a ModeEstimate> {
    let least = window
        .iter()
        .map(|mode| mode.length)
        .fold(f64::INFINITY, f64::min);
    let slow = window
        .iter()
        .filter(|mode| mode.length <= least * (1.0 + EQUALLY_SLOW));
    slow.min_by(|one, other| one.effective_samples.total_cmp(&other.effective_samples))
        .copied()
}

/// Why a run with `frames` frames after its cut gives no value, where it has too few.
#[must_use]
pub fn too_few_frames(frames: usize) -> Option<String> {
    (frames < LEAST_FRAMES)
        .then(|| format!("{frames} frames after the equilibration cut, at least {LEAST_FRAMES} are needed"))
}

/// Judges a value read from the modes `window` of a run with `frames` frames after its cut.
///
/// Good: at least 20 effective samples of the slowest mode, its split R-hat below 1.1, six modes. Unusable, without a value:
/// fewer than 5 effective samples or 20 frames. Weak between them.
#[must_use]
pub fn judge(window: &[&ModeEstimate], frames: usize) -> Judgement {
    let mut judgement = Judgement {
        verdict: Verdict::Good,
        reasons: Vec::new(),
    };
    let Some(slowest) = slowest(window) else {
        judgement.at_most(Verdict::Unusable, "no mode in the window");
        return judgement;
    };
    if let Some(reason) = too_few_frames(frames) {
        judgement.at_most(Verdict::Unusable, reason);
    }
    let samples = slowest.effective_samples;
    if samples < GOOD_SAMPLES {
        let verdict = if samples < LEAST_SAMPLES {
            Verdict::Unusable
        } else {
            Verdict::Weak
        };
        let reason = format!(
            "{samples:.1} effective samples of the slowest mode (q = {:.3} /A), {GOOD_SAMPLES} make it good: run {:.1} times as long",
            slowest.length,
            GOOD_SAMPLES / samples
        );
        judgement.at_most(verdict, reason);
    }
    match slowest.split_r_hat {
        Some(r_hat) if r_hat < GOOD_R_HAT => {}
        Some(r_hat) => judgement.at_most(
            Verdict::Weak,
            format!(
                "the run's halves differ in the slowest mode (split R-hat {r_hat:.2}, below {GOOD_R_HAT} is good): run at least twice as long"
            ),
        ),
        None => judgement.at_most(Verdict::Weak, "the slowest mode has no series to split in halves: run longer"),
    }
    if window.len() < LEAST_MODES {
        let reason = format!(
            "{} modes in the window, {LEAST_MODES} make it good: widen it or simulate a larger sheet",
            window.len()
        );
        judgement.at_most(Verdict::Weak, reason);
    }
    judgement
}

/// A run that is to be longer by less than this is long enough: the error's own error is larger.
const LEAST_GROWTH: f64 = 1.1;

/// A remark where the relative error of a value is clearly above the wanted one: how much longer the run must be.
#[must_use]
pub fn advice(relative_error: f64, wanted_error: f64) -> Option<String> {
    let longer = (relative_error / wanted_error).powi(2);
    (longer >= LEAST_GROWTH).then(|| {
        format!(
            "error {:.1} %, wanted {:.1} %: run {:.1} times as long",
            100.0 * relative_error,
            100.0 * wanted_error,
            longer
        )
    })
}
