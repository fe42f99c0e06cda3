//! The box SCSA as a model of mode powers, fitted in one window.

use super::lack_of_fit;
use super::plate_likelihood::{LikelihoodFit, Limits, ModelPoint, PowerModel, maximise};
use super::plate_run::PlateRun;
use super::window::WindowFit;
use crate::theory::plate::{SCSA_ETA, rigidity_of_power};
use crate::theory::{BoxModes, BoxScsa, BoxSolution, PlateParameter, PlateState};
use nalgebra::{DMatrix, DVector};

/// The parameters of a fit, in their order: ln kappa, b in A^2, ln Y.
pub const PARAMETERS: [PlateParameter; 3] = [
    PlateParameter::LnKappa,
    PlateParameter::LatticeTerm,
    PlateParameter::LnYoungs,
];

/// Limits of (q_th/q)^2 at the smallest q, bare: below the first, ripples stiffen that wave by less than a thousandth, above
/// the second every wave of any box in reach is dominated by them. Heights tell nothing of Y beyond.
const COUPLING_LIMITS: [f64; 2] = [1e-3, 1e3];

/// Fits within this distance in ln Y of a limit count as having run into it.
const AT_LIMIT: f64 = 0.7;

/// One run's modes with the equations that predict them.
pub struct RippleModel<'a> {
    run: &'a PlateRun<'a>,
    solver: BoxScsa,
    /// Index among the solver's modes of each mode of the spectrum.
    place: Vec<Option<usize>>,
    /// Index among the solver's modes of the run's smallest wave vector.
    smallest: usize,
}

/// The fit in one window.
#[derive(Clone, Debug, PartialEq)]
pub struct RippleFit {
    /// Parameters as in [`PARAMETERS`].
    pub likelihood: LikelihoodFit,
    /// The solution at the maximum, on all modes of the zone.
    pub solution: BoxSolution,
    /// Renormalised kappa at the run's smallest q, in eV.
    pub kappa_smallest: f64,
    /// Which limit Y ran into.
    pub youngs_limit: Option<YoungsLimit>,
    probability: Option<f64>,
    last: f64,
}

/// Why heights alone do not give Y.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum YoungsLimit {
    /// Ripples leave no trace.
    Vanishes,
    /// Any larger Y does as well.
    Unbounded,
}

impl<'a> RippleModel<'a> {
    /// All zone modes of the run take part in the sums, whatever the window.
    #[must_use]
    pub fn new(run: &'a PlateRun<'a>) -> Self {
        let spectrum = &run.run.spectrum;
        let mut modes = BoxModes {
            cell: spectrum.cell,
            integers: Vec::new(),
            weights: Vec::new(),
        };
        let mut place = Vec::with_capacity(spectrum.modes.len());
        for mode in &spectrum.modes {
            let inside = mode.zone_weight > 0.0;
            place.push(inside.then_some(modes.integers.len()));
            if inside {
                modes.integers.push(mode.integers);
                modes.weights.push(mode.zone_weight);
            }
        }
        let solver = BoxScsa::new(&modes);
        let lengths = solver.lengths();
        let smallest = (0..lengths.len()).fold(
            0,
            |best, mode| if lengths[mode] < lengths[best] { mode } else { best },
        );
        Self {
            run,
            solver,
            place,
            smallest,
        }
    }

    /// The equations.
    #[must_use]
    pub fn solver(&self) -> &BoxScsa {
        &self.solver
    }

    /// Index among the solver's modes of the run's smallest wave vector.
    #[must_use]
    pub fn smallest(&self) -> usize {
        self.smallest
    }

    /// Index among the solver's modes of the spectrum's mode `index`.
    #[must_use]
    pub fn place(&self, index: usize) -> Option<usize> {
        self.place[index]
    }

    /// Places among the solver's modes of the first `count` fitted modes.
    #[must_use]
    pub fn places(&self, count: usize) -> Vec<usize> {
        self.run.modes[..count]
            .iter()
            .filter_map(|&index| self.place[index])
            .collect()
    }

    /// Fits the first `count` modes, from `near` where there is one.
    #[must_use]
    pub fn fit_first(&self, count: usize, near: Option<&RippleFit>) -> Option<RippleFit> {
        if count <= PARAMETERS.len() {
            return None;
        }
        let (guess, limits) = self.start();
        let start = near.map_or(guess, |near| near.likelihood.parameters.clone());
        let samples = &self.run.samples[..count];
        let mut model = Window {
            model: self,
            places: self.places(count),
            last: near.map(|near| near.solution.clone()),
        };
        let likelihood = maximise(&mut model, samples, &start, &[None, None, limits])?;
        let state = self.state(&likelihood.parameters);
        let solution = match &model.last {
            Some(last) => self.solver.solve_near(&state, last).ok()?,
            None => self.solver.solve(&state).ok()?,
        };
        let [lower, upper] = limits?;
        let ln_youngs = likelihood.parameters[2];
        let youngs_limit = if ln_youngs < lower + AT_LIMIT {
            Some(YoungsLimit::Vanishes)
        } else {
            (ln_youngs > upper - AT_LIMIT).then_some(YoungsLimit::Unbounded)
        };
        Some(RippleFit {
            probability: lack_of_fit::probability(&likelihood, samples),
            kappa_smallest: solution.kappa[self.smallest],
            last: samples[count - 1].length,
            youngs_limit,
            likelihood,
            solution,
        })
    }

    fn state(&self, parameters: &[f64]) -> PlateState {
        PlateState {
            kappa: parameters[0].exp(),
            youngs: parameters[2].exp(),
            lattice_term: parameters[1],
            tension: self.run.run.tension.value(),
            temperature: self.run.run.temperature,
        }
    }

    /// Start values, and the limits of ln Y: kappa from the shorter half of the waves, Y from how much stiffer the longest
    /// waves are, by the closed form of the crossover.
    fn start(&self) -> (Vec<f64>, Limits) {
        /// b of one-plane hexagonal sheets, in A^2.
        const LATTICE_TERM: f64 = 0.25;
        let run = self.run.run;
        let apparent = |sample: &super::plate_likelihood::ModeSample| {
            let (q, tension) = (sample.length, run.tension.value());
            let kappa = rigidity_of_power(
                run.spectrum.cell.area(),
                sample.power,
                tension,
                run.temperature,
                q,
            );
            kappa / (1.0 - LATTICE_TERM * q * q).max(0.5)
        };
        let within = |lower: f64, upper: f64| {
            let inside = self
                .run
                .samples
                .iter()
                .filter(|sample| sample.length >= lower && sample.length <= upper);
            // Powers average, their inverses do not.
            let (sum, count) = inside.fold((0.0, 0.0), |(sum, count), sample| {
                (sum + 1.0 / apparent(sample), count + 1.0)
            });
            if sum > 0.0 { count / sum } else { 1.0 }
        };
        let last = self.run.lengths[self.run.lengths.len() - 1].min(1.0);
        let kappa = within(0.5 * last, last);
        let stiffening = within(0.0, 1.5 * self.run.smallest) / kappa;
        let coupling = ((stiffening.max(1.0).powf(2.0 / SCSA_ETA) - 1.0) / 1.5).clamp(0.05, 30.0);
        let unit = PlateState {
            kappa,
            youngs: 1.0,
            lattice_term: 0.0,
            tension: 0.0,
            temperature: run.temperature,
        };
        let youngs_of = |coupling: f64| coupling * (self.run.smallest / unit.thermal_wave_vector()).powi(2);
        let limits = COUPLING_LIMITS.map(|coupling| youngs_of(coupling).ln());
        (
            vec![kappa.ln(), LATTICE_TERM, youngs_of(coupling).ln()],
            Some(limits),
        )
    }
}

impl WindowFit for RippleFit {
    fn probability(&self) -> Option<f64> {
        self.probability
    }

    fn is_in_range(&self) -> bool {
        self.likelihood.parameters[1] * self.last * self.last <= 0.5
    }

    fn value(&self) -> f64 {
        self.kappa_smallest
    }
}

/// The model seen through one window.
struct Window<'a> {
    model: &'a RippleModel<'a>,
    places: Vec<usize>,
    last: Option<BoxSolution>,
}

impl PowerModel for Window<'_> {
    fn evaluate(&mut self, parameters: &[f64]) -> Option<ModelPoint> {
        let solver = &self.model.solver;
        let state = self.model.state(parameters);
        let solution = match &self.last {
            Some(last) => solver.solve_near(&state, last).ok()?,
            None => solver.solve(&state).ok()?,
        };
        let responses = solver.responses(&solution, &PARAMETERS).ok()?;
        let point = ModelPoint {
            ln_power: DVector::from_iterator(
                self.places.len(),
                self.places.iter().map(|&place| solution.power[place].ln()),
            ),
            derivatives: DMatrix::from_fn(self.places.len(), PARAMETERS.len(), |mode, parameter| {
                responses[parameter].ln_power[self.places[mode]]
            }),
        };
        self.last = Some(solution);
        Some(point)
    }
}
