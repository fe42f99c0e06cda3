//! Verdicts of values without modes, from their own series.

use std::fmt::Write as _;

use super::Verdict;
use crate::estimates::{Estimate, RunEstimates};

/// Effective samples that a good value needs.
const GOOD_SAMPLES: f64 = 20.0;

/// Effective samples below which there is no number.
const USABLE_SAMPLES: f64 = 5.0;

/// Frames below which there is no number.
const USABLE_FRAMES: usize = 20;

/// Split R-hat that a good value stays below.
const GOOD_R_HAT: f64 = 1.1;

/// A verdict with its reason; the reason is empty when the verdict is good.
#[derive(Clone, Debug, PartialEq)]
pub struct Judgement {
    /// How far the value can be trusted.
    pub verdict: Verdict,
    /// Why, and how much longer a run would be good.
    pub note: String,
}

/// Judges a value by the frames, the effective samples and the split R-hat behind it.
///
/// Good: 20 effective samples or more and R-hat below 1.1 (`None`, a constant or too short series, says nothing against
/// it). Unusable: fewer than 20 frames or 5 effective samples. Between them, or with any reservation: weak.
#[must_use]
pub fn series_verdict(
    frames: usize,
    effective_samples: f64,
    split_r_hat: Option<f64>,
    reservations: &[String],
) -> Judgement {
    if frames < USABLE_FRAMES {
        let note =
            format!("{frames} frames after the equilibration cut; at least {USABLE_FRAMES} are needed");
        return Judgement {
            verdict: Verdict::Unusable,
            note,
        };
    }
    let longer = GOOD_SAMPLES / effective_samples;
    if effective_samples < USABLE_SAMPLES {
        let note = format!(
            "{effective_samples:.1} effective samples, at least {USABLE_SAMPLES} are needed: a run {longer:.1} times as long \
             would be good"
        );
        return Judgement {
            verdict: Verdict::Unusable,
            note,
        };
    }
    let mut note = String::new();
    let mut add = |reason: &str| {
        let separator = if note.is_empty() { "" } else { "; " };
        // Writing to a String cannot fail.
        let _ = write!(note, "{separator}{reason}");
    };
    if effective_samples < GOOD_SAMPLES {
        add(&format!(
            "{effective_samples:.1} effective samples, {GOOD_SAMPLES} are good: a run {longer:.1} times as long"
        ));
    }
    if let Some(r_hat) = split_r_hat.filter(|&r| r >= GOOD_R_HAT) {
        // The halves' means differ by chance as 1/sqrt(n): R-hat^2 - 1 falls as 1/length.
        let times = (r_hat * r_hat - 1.0) / (GOOD_R_HAT * GOOD_R_HAT - 1.0);
        add(&format!(
            "the halves of the run disagree (split R-hat {r_hat:.2}, good is below {GOOD_R_HAT}): if by chance, a run \
             {times:.1} times as long would be good"
        ));
    }
    for reservation in reservations {
        add(reservation);
    }
    let verdict = if note.is_empty() {
        Verdict::Good
    } else {
        Verdict::Weak
    };
    Judgement { verdict, note }
}

/// [`series_verdict`] of a run's estimate.
pub(super) fn judge(run: &RunEstimates, estimate: &Estimate) -> Judgement {
    series_verdict(
        run.frames,
        estimate.effective_samples,
        estimate.split_r_hat,
        &run.reservations,
    )
}
