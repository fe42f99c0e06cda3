//! One run's part in a joint fit: what a bare plate predicts of its heights and of its cell, with derivatives.

use nalgebra::{DMatrix, DVector};

use super::cell_likelihood::{CellPoint, CellSample};
use super::plate_likelihood::ModeSample;
use super::plate_run::PlateRun;
use super::ripple_model::RippleModel;
use crate::theory::{BoxSolution, PlateState};

/// Parameters of a bare plate at one temperature: ln kappa (eV), b (A^2), ln Y (eV/A^2), Poisson's ratio.
pub(super) const BARE: usize = 4;

/// Steps of the central differences by the parameters of the bare plate: the solver's rounding is 1e-11.
const STEPS: [f64; BARE] = [1e-3, 1e-3, 2e-3, 2e-3];

/// Step in tension, in eV/A^2.
const TENSION_STEP: f64 = 1e-5;

/// One run with the equations that predict it.
pub(super) struct JointRun<'a> {
    pub(super) plate: &'a PlateRun<'a>,
    model: RippleModel<'a>,
    places: Vec<usize>,
    /// The cell's fluctuations, where they can be used.
    pub(super) cell: Option<CellSample>,
    clamped: [bool; 3],
}

/// A bare plate's prediction for one run.
#[derive(Clone, Debug)]
pub(super) struct RunPoint {
    pub(super) solution: BoxSolution,
    /// ln of the mean power of each mode.
    pub(super) ln_power: DVector<f64>,
    /// Its derivatives, shape (modes, [`BARE`]).
    pub(super) by_bare: DMatrix<f64>,
    /// The cell.
    pub(super) cell: Option<CellPoint>,
}

impl<'a> JointRun<'a> {
    /// The first `count` modes of a run take part. A cell whose axes move together counts as free in both: the clamp of their
    /// difference is left out.
    pub(super) fn new(plate: &'a PlateRun<'a>, model: RippleModel<'a>, count: usize) -> Self {
        let places = model.places(count);
        let free = plate.run.strain.free;
        Self {
            plate,
            places,
            cell: CellSample::new(plate.run).ok(),
            clamped: free.map(|free| !free),
            model,
        }
    }

    /// The modes that take part.
    pub(super) fn samples(&self) -> &[ModeSample] {
        &self.plate.samples[..self.places.len()]
    }

    /// Whether Poisson's ratio matters to this run at all.
    pub(super) fn feels_poisson_ratio(&self) -> bool {
        self.clamped.contains(&true)
    }

    fn solve(&self, bare: &[f64; BARE], tension: f64, near: Option<&BoxSolution>) -> Option<BoxSolution> {
        let state = PlateState {
            kappa: bare[0].exp(),
            youngs: bare[2].exp(),
            lattice_term: bare[1],
            tension,
            temperature: self.plate.run.temperature,
        };
        let solver = self.model.solver();
        solver.solve_clamped(&state, self.clamped, bare[3], near).ok()
    }

    fn ln_power(&self, solution: &BoxSolution) -> DVector<f64> {
        let of_mode = |&place: &usize| solution.power[place].ln();
        DVector::from_iterator(self.places.len(), self.places.iter().map(of_mode))
    }

    /// Prediction at `bare`, from a solution nearby where there is one; `None` where the equations have none.
    pub(super) fn evaluate(&self, bare: &[f64; BARE], near: Option<&BoxSolution>) -> Option<RunPoint> {
        let tension = self.plate.run.tension.value();
        let solver = self.model.solver();
        let solution = self.solve(bare, tension, near)?;
        let mut by_bare = DMatrix::zeros(self.places.len(), BARE);
        let mut slopes = [[[0.0; 3]; 3]; BARE];
        for (parameter, &step) in STEPS.iter().enumerate() {
            let moved = |sign: f64| {
                let mut bare = *bare;
                bare[parameter] += sign * step;
                let solution = self.solve(&bare, tension, Some(&solution))?;
                let compliance = match &self.cell {
                    Some(_) => solver.box_compliance(&solution, bare[3]).ok()?,
                    None => [[0.0; 3]; 3],
                };
                Some((self.ln_power(&solution), compliance))
            };
            let ((up, stiffer), (down, softer)) = (moved(1.0)?, moved(-1.0)?);
            by_bare.set_column(parameter, &((up - down) / (2.0 * step)));
            slopes[parameter] =
                [0, 1, 2].map(|i| [0, 1, 2].map(|j: usize| (stiffer[i][j] - softer[i][j]) / (2.0 * step)));
        }
        let cell = match &self.cell {
            Some(cell) => {
                let compliance = solver.box_compliance(&solution, bare[3]).ok()?;
                Some(cell.compare(&compliance, &slopes)?)
            }
            None => None,
        };
        Some(RunPoint {
            ln_power: self.ln_power(&solution),
            solution,
            by_bare,
            cell,
        })
    }

    /// Derivatives of ln power by the tension held, per eV/A^2, at a point.
    pub(super) fn by_tension(&self, bare: &[f64; BARE], point: &RunPoint) -> Option<DVector<f64>> {
        let tension = self.plate.run.tension.value();
        let moved =
            |step: f64| Some(self.ln_power(&self.solve(bare, tension + step, Some(&point.solution))?));
        Some((moved(TENSION_STEP)? - moved(-TENSION_STEP)?) / (2.0 * TENSION_STEP))
    }
}
