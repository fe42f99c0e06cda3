//! The self-consistent screening approximation (SCSA) on the discrete modes of a periodic box.
//!
//! Le Doussal and Radzihovsky, Phys. Rev. Lett. 69, 1209 (1992) and Ann. Phys. 392, 340 (2018), with the integrals over
//! wave vectors replaced by (1/A) times sums over the modes of a box whose cell is free at constant tension, none at q = 0:
//!
//! ```text
//! G(p)     = kB T / (kappa(p) p^4 + sigma p^2) = A <|h_p|^2>
//! kappa(k) = kappa0(k) + (1/A) sum_q Y(q) (khat x qhat)^4 G(k - q)
//! Y(q)     = Y0 / (1 + Y0 Pi(q)),   Pi(q) = 1/(2 kB T A) sum_p (qhat x p)^4 G(p) G(q - p)
//! ```
//!
//! A term counts where both of its modes are in the sum. Since k x q = k x p for p = k - q, both sums are pair sums over
//! p with the kernel (k x p)^4 and the same moments of G (see [`super::mode_convolution`]).

use thiserror::Error;

use super::mode_convolution::{FieldTransform, ModeConvolution, MomentTransforms};
use super::{BoxModes, PlateState};
use crate::numerics::{AndersonSettings, fixed_point};

/// The iteration on ln kappa stops when no mode changes by more than this.
const SETTINGS: AndersonSettings = AndersonSettings {
    depth: 8,
    tolerance: 1e-11,
    evaluations: 300,
};

/// Why the equations have no solution here.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum ScsaError {
    /// A parameter outside its range.
    #[error("{name} is {value}; the plate needs it finite and above zero")]
    Parameter {
        /// What it is.
        name: &'static str,
        /// What it was.
        value: f64,
    },
    /// A mode whose stiffness is not positive: the plate buckles under compression.
    #[error("tension {tension} eV/A^2 buckles the plate at q = {q} 1/A")]
    Buckled {
        /// The tension, in eV/A^2.
        tension: f64,
        /// |q| of the first such mode, in 1/A.
        q: f64,
    },
    /// The iteration did not settle.
    #[error("no self-consistent kappa(q) after {evaluations} steps; the last changed ln kappa by {residual}")]
    NotConverged {
        /// Steps taken.
        evaluations: usize,
        /// Largest change of ln kappa in the last.
        residual: f64,
    },
}

/// Solves the box SCSA once; keep a [`BoxScsa`] where the same modes are solved many times.
///
/// # Errors
/// See [`ScsaError`].
pub fn solve(modes: &BoxModes, state: &PlateState) -> Result<BoxSolution, ScsaError> {
    BoxScsa::new(modes).solve(state)
}

/// The equations on one set of modes, with their transforms planned.
pub struct BoxScsa {
    area: f64,
    /// |q| of each mode, in 1/A.
    lengths: Vec<f64>,
    convolution: ModeConvolution,
}

/// kappa(q) and Y(q) of one plate in one box.
#[derive(Clone, Debug, PartialEq)]
pub struct BoxSolution {
    /// The bare plate.
    pub state: PlateState,
    /// Renormalised kappa(q) of each mode in eV, tension out.
    pub kappa: Vec<f64>,
    /// Screened Young's modulus Y(q) of each mode, in eV/A^2.
    pub youngs: Vec<f64>,
    /// <|h_q|^2> of each mode, in A^2.
    pub power: Vec<f64>,
    /// Evaluations of the equations.
    pub evaluations: usize,
}

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

/// Everything the equations need of one iterate.
struct Iterate {
    moments: MomentTransforms,
    propagator: FieldTransform,
    youngs: Vec<f64>,
    youngs_over_q4: FieldTransform,
    /// Sigma(k) = kappa(k) - kappa0(k).
    self_energy: Vec<f64>,
}

impl BoxScsa {
    /// Plans the sums over `modes`.
    #[must_use]
    pub fn new(modes: &BoxModes) -> Self {
        Self {
            area: modes.cell.area().abs(),
            lengths: modes.wave_vectors().iter().map(|q| q[0].hypot(q[1])).collect(),
            convolution: ModeConvolution::new(modes),
        }
    }

    /// |q| of each mode, in 1/A.
    #[must_use]
    pub fn lengths(&self) -> &[f64] {
        &self.lengths
    }

    /// Solves the equations from the closed-form crossover.
    ///
    /// # Errors
    /// See [`ScsaError`].
    pub fn solve(&self, state: &PlateState) -> Result<BoxSolution, ScsaError> {
        let start = self
            .lengths
            .iter()
            .map(|&q| state.crossover_kappa(q).ln())
            .collect();
        self.solve_from(state, start)
    }

    /// Solves the equations from the solution of a plate nearby, on the same modes.
    ///
    /// # Errors
    /// See [`ScsaError`].
    pub fn solve_near(&self, state: &PlateState, near: &BoxSolution) -> Result<BoxSolution, ScsaError> {
        let start = self
            .lengths
            .iter()
            .zip(&near.kappa)
            .map(|(&q, kappa)| (kappa * state.bare_kappa(q) / near.state.bare_kappa(q)).ln())
            .collect();
        self.solve_from(state, start)
    }

    fn solve_from(&self, state: &PlateState, start: Vec<f64>) -> Result<BoxSolution, ScsaError> {
        check(state)?;
        let bare: Vec<f64> = self.lengths.iter().map(|&q| state.bare_kappa(q)).collect();
        let exponential = |ln_kappa: &[f64]| -> Vec<f64> {
            // Ripples only stiffen: an accelerated step below the bare plate is brought back to it.
            ln_kappa
                .iter()
                .zip(&bare)
                .map(|(value, bare)| value.exp().max(*bare))
                .collect()
        };
        let found = fixed_point(start, &SETTINGS, |ln_kappa| {
            let iterate = self.iterate(state, &exponential(ln_kappa))?;
            Ok(iterate
                .self_energy
                .iter()
                .zip(&bare)
                .map(|(sigma, bare)| (bare + sigma).ln())
                .collect())
        })?;
        if !found.converged(&SETTINGS) {
            return Err(ScsaError::NotConverged {
                evaluations: found.evaluations,
                residual: found.residual,
            });
        }
        let kappa = exponential(&found.point);
        let iterate = self.iterate(state, &kappa)?;
        let power = self
            .propagator(state, &kappa)?
            .iter()
            .map(|g| g / self.area)
            .collect();
        Ok(BoxSolution {
            state: *state,
            kappa,
            youngs: iterate.youngs,
            power,
            evaluations: found.evaluations + 1,
        })
    }

    /// First order in Y: the equations evaluated once on the bare plate (kappa(q), Y(q) with G of the bare plate).
    ///
    /// # Errors
    /// Where a parameter is out of range or the bare plate buckles.
    pub(super) fn first_order(&self, state: &PlateState) -> Result<[Vec<f64>; 2], ScsaError> {
        check(state)?;
        let bare: Vec<f64> = self.lengths.iter().map(|&q| state.bare_kappa(q)).collect();
        let propagator = self.propagator(state, &bare)?;
        let moments = self.convolution.moments(&propagator);
        let screening = self.screening(state, &moments, &moments.propagator());
        let youngs = screening
            .iter()
            .map(|pi| state.youngs * (1.0 - state.youngs * pi))
            .collect();
        let unscreened = self.over_q4(&vec![state.youngs; bare.len()]);
        let sums = self
            .convolution
            .pair_sum(&[(&moments, &self.convolution.field(&unscreened))]);
        let kappa = self
            .over_q4(&sums)
            .iter()
            .zip(&bare)
            .map(|(sum, bare)| bare + sum / self.area)
            .collect();
        Ok([kappa, youngs])
    }

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
                tension: if parameter == PlateParameter::Tension {
                    1.0
                } else {
                    0.0
                },
            };
            self.response(solution, &iterate, &change)
        };
        parameters.iter().map(respond).collect()
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
            let per_mode = |((&q, kappa), d): ((&f64, &f64), &f64)| {
                -(kappa * q * q * d + change.tension) / (kappa * q * q + state.tension)
            };
            self.lengths
                .iter()
                .zip(&solution.kappa)
                .zip(ln_kappa)
                .map(per_mode)
                .collect()
        };
        let start = vec![0.0; self.lengths.len()];
        let settings = AndersonSettings {
            tolerance: 1e-10 * change.size(solution),
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

    /// One evaluation of both equations.
    fn iterate(&self, state: &PlateState, kappa: &[f64]) -> Result<Iterate, ScsaError> {
        let moments = self.convolution.moments(&self.propagator(state, kappa)?);
        let propagator = moments.propagator();
        let youngs: Vec<f64> = self
            .screening(state, &moments, &propagator)
            .iter()
            .map(|pi| state.youngs / (1.0 + state.youngs * pi))
            .collect();
        let youngs_over_q4 = self.convolution.field(&self.over_q4(&youngs));
        let sums = self.convolution.pair_sum(&[(&moments, &youngs_over_q4)]);
        let self_energy = self.over_q4(&sums).iter().map(|sum| sum / self.area).collect();
        Ok(Iterate {
            moments,
            propagator,
            youngs,
            youngs_over_q4,
            self_energy,
        })
    }

    /// G(q) in A^4.
    fn propagator(&self, state: &PlateState, kappa: &[f64]) -> Result<Vec<f64>, ScsaError> {
        let per_mode = |(&q, kappa): (&f64, &f64)| {
            let stiffness = (kappa * q * q + state.tension) * q * q;
            if stiffness > 0.0 {
                Ok(state.thermal_energy() / stiffness)
            } else {
                Err(ScsaError::Buckled {
                    tension: state.tension,
                    q,
                })
            }
        };
        self.lengths.iter().zip(kappa).map(per_mode).collect()
    }

    /// Pi(q) in A^2/eV of two propagators.
    fn screening(
        &self,
        state: &PlateState,
        moments: &MomentTransforms,
        propagator: &FieldTransform,
    ) -> Vec<f64> {
        let scale = 0.5 / (state.thermal_energy() * self.area);
        let sums = self.convolution.pair_sum(&[(moments, propagator)]);
        self.over_q4(&sums).iter().map(|sum| sum * scale).collect()
    }

    fn over_q4(&self, field: &[f64]) -> Vec<f64> {
        field
            .iter()
            .zip(&self.lengths)
            .map(|(value, q)| value / q.powi(4))
            .collect()
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
    /// Of the tension, in eV/A^2.
    tension: f64,
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
        direct
            .fold(self.ln_youngs.abs(), f64::max)
            .max(self.tension.abs() / softest)
    }
}

fn check(state: &PlateState) -> Result<(), ScsaError> {
    let positive = [
        ("bending rigidity (eV)", state.kappa),
        ("Young's modulus (eV/A^2)", state.youngs),
        ("temperature (K)", state.temperature),
    ];
    for (name, value) in positive {
        if !(value > 0.0 && value.is_finite()) {
            return Err(ScsaError::Parameter { name, value });
        }
    }
    Ok(())
}
