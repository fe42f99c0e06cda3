//! Which waves a plate is fitted to: from the smallest wave vector up to an end that the data choose.

/// The window never reaches beyond this |q| (1/A): there a sheet is a lattice, not a plate.
const LAST_END: f64 = 1.0;

/// Ends of the ladder are this factor apart.
const LADDER_STEP: f64 = 1.15;

/// Fewest modes in a window (fewer cannot make a value good).
pub const LEAST_MODES: usize = 6;

/// A window's fit is accepted where a lack of fit as large has at least this probability.
const ACCEPTED_PROBABILITY: f64 = 0.05;

/// What choosing needs to know of the fit in one window.
pub trait WindowFit {
    /// Probability of its lack of fit; `None` where too few modes are left to tell.
    fn probability(&self) -> Option<f64>;
    /// Whether the model holds up to the window's end: b q^2 up to 1/2.
    fn is_in_range(&self) -> bool;
    /// The value whose sensitivity to the window is of interest.
    fn value(&self) -> f64;
}

/// The window and its fit.
#[derive(Clone, Debug, PartialEq)]
pub struct ChosenWindow<F> {
    /// Number of modes used: the longest ones.
    pub modes: usize,
    /// The fit in the window.
    pub fit: F,
    /// Whether its lack of fit was acceptable; always so where the pipeline states the window.
    pub accepted: bool,
    /// Change of the value when the end moves one step of the ladder down, and up, where those fits exist.
    pub moves: [Option<f64>; 2],
}

/// Numbers of modes (of `lengths`, ascending) in the windows of the ladder, largest first. Ends fall by a factor of 1.15 from
/// 1/A, or from the longest |q|, until six modes are left.
#[must_use]
pub fn ladder(lengths: &[f64]) -> Vec<usize> {
    let mut rungs: Vec<usize> = Vec::new();
    let mut end = lengths.last().copied().unwrap_or(0.0).min(LAST_END);
    while inside(lengths, end) >= LEAST_MODES {
        if rungs.last() != Some(&inside(lengths, end)) {
            rungs.push(inside(lengths, end));
        }
        end /= LADDER_STEP;
    }
    rungs
}

/// Chooses the largest window of the ladder that the model describes: `fit_first(n, near)` fits the first n modes, from a fit
/// nearby where there is one. Where no window is accepted, the one of the highest probability is taken.
pub fn choose<F: WindowFit + Clone>(
    lengths: &[f64],
    mut fit_first: impl FnMut(usize, Option<&F>) -> Option<F>,
) -> Option<ChosenWindow<F>> {
    let rungs = ladder(lengths);
    let mut fits: Vec<Option<F>> = Vec::new();
    let mut chosen = None;
    for (rung, &modes) in rungs.iter().enumerate() {
        let near = fits.iter().flatten().next_back();
        fits.push(fit_first(modes, near));
        let accepted =
            |fit: &F| fit.is_in_range() && fit.probability().is_some_and(|p| p >= ACCEPTED_PROBABILITY);
        if fits[rung].as_ref().is_some_and(accepted) {
            chosen = Some(rung);
            break;
        }
    }
    let accepted = chosen.is_some();
    let likeliest = || {
        let probability = |rung: &usize| {
            fits[*rung]
                .as_ref()
                .and_then(WindowFit::probability)
                .unwrap_or(-1.0)
        };
        let usable = (0..fits.len()).filter(|&rung| fits[rung].as_ref().is_some_and(WindowFit::is_in_range));
        usable.max_by(|one, other| probability(one).total_cmp(&probability(other)))
    };
    let rung = chosen.or_else(likeliest)?;
    let fit = fits[rung].clone()?;
    if rung + 1 == fits.len() && rung + 1 < rungs.len() {
        fits.push(fit_first(rungs[rung + 1], Some(&fit)));
    }
    let beyond = if rung == 0 {
        let modes = inside(lengths, LAST_END * LADDER_STEP);
        (modes > rungs[0]).then(|| fit_first(modes, Some(&fit)))
    } else {
        fits.get(rung - 1).cloned()
    };
    let change = |other: Option<&Option<F>>| Some(other?.as_ref()?.value() - fit.value());
    let moves = [change(fits.get(rung + 1)), change(beyond.as_ref())];
    Some(ChosenWindow {
        modes: rungs[rung],
        fit,
        accepted,
        moves,
    })
}

/// The window that the pipeline states, as [`choose`] would return it. `fit_first` fits the first n of `lengths`, which start at
/// the window's lower end.
pub fn stated<F: WindowFit>(
    lengths: &[f64],
    end: f64,
    mut fit_first: impl FnMut(usize, Option<&F>) -> Option<F>,
) -> Option<ChosenWindow<F>> {
    let fit = fit_first(inside(lengths, end), None)?;
    let moves = [1.0 / LADDER_STEP, LADDER_STEP].map(|factor| {
        let modes = inside(lengths, end * factor);
        let other = (modes != inside(lengths, end))
            .then(|| fit_first(modes, Some(&fit)))
            .flatten();
        other.map(|other| other.value() - fit.value())
    });
    Some(ChosenWindow {
        modes: inside(lengths, end),
        fit,
        accepted: true,
        moves,
    })
}

/// How many of `lengths`, ascending, are at most `end`.
fn inside(lengths: &[f64], end: f64) -> usize {
    lengths.partition_point(|&q| q <= end * (1.0 + 1e-9))
}
