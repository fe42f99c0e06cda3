//! Derivatives of the box SCSA's solution with respect to the bare plate, by implicit differentiation.
//!
//! The equations of [`super::box_scsa`], differentiated at their solution, are linear in the change of ln kappa(q); they are
//! iterated with the same sums, and the same acceleration, as the equations themselves.

use super::box_scsa::{Iterate, SETTINGS};
use super::{BoxScsa, BoxSolution, PlateState, ScsaError};
use crate::numerics::{AndersonSettings, fixed_point};

/// Derivatives are right to this share of the largest direct effect of the change: far closer than any fit needs.
const RELATIVE_TOLERANCE: f64 = 1e-8;

/// A parameter of the bare plate by which solutions are differentiated.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PlateParameter {
    /// ln kappa.
    LnKappa,
    /// ln Y.
    LnYoungs,
    /// The lattice term b, in A^2.
    LatticeTerm,
    /// The tension sigma, in eV/A^2.
    Tension,
}

/// Derivatives of a solution with respect to one [`PlateParameter`], per unit of it.
#[derive(Clone, Debug, PartialEq)]
pub struct Response {
    /// Of ln <|h_q|^2> of each mode.
    pub ln_power: Vec<f64>,
    /// Of ln kappa(q) of each mode.
    pub ln_kappa: Vec<f64>,
}

impl BoxScsa {
    /// Derivatives at a solution, from the equations differentiated implicitly.
    ///
    /// # Errors
    /// [`ScsaError::NotConverged`] where the linear equations do not settle.
    pub fn responses(
        &self,
        solution: &BoxSolution,
        parameters: &[PlateParameter],
    ) -> Result<Vec<Response>, ScsaError> {
        let state = &solution.state;
        let iterate = self.iterate(state, &solution.kappa)?;
        let respond = |&parameter: &PlateParameter| {
            let change = Change {
                bare: self
                    .lengths
                    .iter()
                    .map(|&q| bare_slope(state, parameter, q))
                    .collect(),
                ln_youngs: if parameter == PlateParameter::LnYoungs {
                    1.0
                } else {
                    0.0
                },
                tension: match parameter {
                    PlateParameter::Tension => vec![1.0; self.lengths.len()],
                    _ => vec![0.0; self.lengths.len()],
                },
            };
            self.response(solution, &iterate, &change)
        };
        parameters.iter().map(respond).collect()
    }

    /// Derivatives at a solution by the stresses of the cell in Voigt order 1, 2, 6, per eV/A^2: the tension of mode p is
    /// that of kB T/G(p) = kappa(p) p^4 + sigma_kl p_k p_l, so that a small stress acts as p_k p_l/p^2.
    pub(super) fn stress_responses(&self, solution: &BoxSolution) -> Result<[Response; 3], ScsaError> {
        let iterate = self.iterate(&solution.state, &solution.kappa)?;
        let strains = self.convolution.strains();
        let respond = |component: usize| {
            let change = Change {
                bare: vec![0.0; self.lengths.len()],
                ln_youngs: 0.0,
                tension: strains
                    .iter()
                    .zip(&self.lengths)
                    .map(|(strain, q)| strain[component] / (q * q))
                    .collect(),
            };
            self.response(solution, &iterate, &change)
        };
        Ok([respond(0)?, respond(1)?, respond(2)?])
    }

    /// Changes of ln power and ln kappa of every mode under a small change of the bare plate.
    fn response(
        &self,
        solution: &BoxSolution,
        iterate: &Iterate,
        change: &Change,
    ) -> Result<Response, ScsaError> {
        let state = &solution.state;
        let ln_power_of = |ln_kappa: &[f64]| -> Vec<f64> {
            let per_mode = |(((&q, kappa), d), tension): (((&f64, &f64), &f64), &f64)| {
                -(kappa * q * q * d + tension) / (kappa * q * q + state.tension)
            };
            self.lengths
                .iter()
                .zip(&solution.kappa)
                .zip(ln_kappa)
                .zip(&change.tension)
                .map(per_mode)
                .collect()
        };
        let start = vec![0.0; self.lengths.len()];
        let settings = AndersonSettings {
            tolerance: RELATIVE_TOLERANCE * change.size(solution),
            ..SETTINGS
        };
        let found = fixed_point(start, &settings, |ln_kappa| -> Result<Vec<f64>, ScsaError> {
            let change_of_g: Vec<f64> = ln_power_of(ln_kappa)
                .iter()
                .zip(&solution.power)
                .map(|(d, power)| d * power * self.area)
                .collect();
            let moments = self.convolution.moments(&change_of_g);
            // (q x p)^4 G(p) G(q - p) is symmetric in p and q - p: both factors change it alike.
            let screening = self.screening(state, &moments, &iterate.propagator);
            let youngs: Vec<f64> = iterate
                .youngs
                .iter()
                .zip(screening)
                .map(|(y, pi)| y * y * (change.ln_youngs / state.youngs - 2.0 * pi))
                .collect();
            let youngs_over_q4 = self.convolution.field(&self.over_q4(&youngs));
            let sums = self.convolution.pair_sum(&[
                (&moments, &iterate.youngs_over_q4),
                (&iterate.moments, &youngs_over_q4),
            ]);
            let per_mode = |((sum, bare), kappa): ((&f64, &f64), &f64)| (bare + sum / self.area) / kappa;
            Ok(self
                .over_q4(&sums)
                .iter()
                .zip(&change.bare)
                .zip(&solution.kappa)
                .map(per_mode)
                .collect())
        })?;
        if !found.converged(&settings) {
            return Err(ScsaError::NotConverged {
                evaluations: found.evaluations,
                residual: found.residual,
            });
        }
        Ok(Response {
            ln_power: ln_power_of(&found.point),
            ln_kappa: found.point,
        })
    }
}

/// Derivative of kappa0(q) by a parameter of the plate.
fn bare_slope(state: &PlateState, parameter: PlateParameter, q: f64) -> f64 {
    /// Step of b (A^2): kappa0(q) is linear in b away from its floor, so the difference is exact.
    const STEP: f64 = 1e-4;
    let moved = |step: f64| {
        let lattice_term = state.lattice_term + step;
        PlateState {
            lattice_term,
            ..*state
        }
        .bare_kappa(q)
    };
    match parameter {
        PlateParameter::LnKappa => state.bare_kappa(q),
        PlateParameter::LatticeTerm => (moved(STEP) - moved(-STEP)) / (2.0 * STEP),
        PlateParameter::LnYoungs | PlateParameter::Tension => 0.0,
    }
}

/// A small change of the bare plate.
struct Change {
    /// Of kappa0(q) on every mode, in eV.
    bare: Vec<f64>,
    /// Of ln Y.
    ln_youngs: f64,
    /// Of the tension that each mode feels, in eV/A^2.
    tension: Vec<f64>,
}

impl Change {
    /// Its largest direct effect on ln kappa or ln power: what the tolerance of the response is measured by.
    fn size(&self, solution: &BoxSolution) -> f64 {
        let direct = self
            .bare
            .iter()
            .zip(&solution.kappa)
            .map(|(bare, kappa)| (bare / kappa).abs());
        let softest = solution.kappa.iter().copied().fold(f64::INFINITY, f64::min);
        let tension = self.tension.iter().map(|tension| tension.abs() / softest);
        direct.chain(tension).fold(self.ln_youngs.abs(), f64::max)
    }
}
