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
//! p with the kernel (k x p)^4 and the same moments of G (see `mode_convolution`).

use thiserror::Error;

use super::clamped_cell::ClampedCell;
use super::mode_convolution::{FieldTransform, ModeConvolution, MomentTransforms};
use super::{BoxModes, PlateState};
use crate::numerics::{AndersonSettings, fixed_point};

/// The iteration on ln kappa stops when no mode changes by more than this.
pub(super) const SETTINGS: AndersonSettings = AndersonSettings {
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
    pub(super) area: f64,
    /// |q| of each mode, in 1/A.
    pub(super) lengths: Vec<f64>,
    pub(super) convolution: ModeConvolution,
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

/// Everything the equations need of one iterate.
pub(super) struct Iterate {
    pub(super) moments: MomentTransforms,
    pub(super) propagator: FieldTransform,
    pub(super) youngs: Vec<f64>,
    pub(super) youngs_over_q4: FieldTransform,
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
        self.solve_from(state, self.crossover(state), None)
    }

    /// Solves the equations of a sheet with the bare Poisson ratio `poisson` in a cell of which the strains e1, e2, e6 in
    /// `clamped` are held, at the mean stress that is the tension of `state` (see `clamped_cell`); from a solution nearby where there is
    /// one.
    ///
    /// # Errors
    /// See [`ScsaError`].
    pub fn solve_clamped(
        &self,
        state: &PlateState,
        clamped: [bool; 3],
        poisson: f64,
        near: Option<&BoxSolution>,
    ) -> Result<BoxSolution, ScsaError> {
        if poisson.is_nan() || poisson.abs() >= 1.0 {
            return Err(ScsaError::Parameter {
                name: "1 - nu^2 of the Poisson ratio nu",
                value: 1.0 - poisson * poisson,
            });
        }
        let cell = ClampedCell::new(&self.convolution, self.area, clamped, poisson);
        let start = near.map_or_else(|| self.crossover(state), |near| self.start_near(state, near));
        self.solve_from(state, start, clamped.contains(&true).then_some(&cell))
    }

    /// Solves the equations from the solution of a plate nearby, on the same modes.
    ///
    /// # Errors
    /// See [`ScsaError`].
    pub fn solve_near(&self, state: &PlateState, near: &BoxSolution) -> Result<BoxSolution, ScsaError> {
        self.solve_from(state, self.start_near(state, near), None)
    }

    /// ln kappa(q) of a plate nearby, the change of the bare rigidity taken over.
    fn start_near(&self, state: &PlateState, near: &BoxSolution) -> Vec<f64> {
        self.lengths
            .iter()
            .zip(&near.kappa)
            .map(|(&q, kappa)| (kappa * state.bare_kappa(q) / near.state.bare_kappa(q)).ln())
            .collect()
    }

    /// ln kappa(q) of the closed form, to start from.
    fn crossover(&self, state: &PlateState) -> Vec<f64> {
        self.lengths
            .iter()
            .map(|&q| state.crossover_kappa(q).ln())
            .collect()
    }

    /// Iterates from ln kappa(q) = `start`; the cell is free, or `clamped`.
    fn solve_from(
        &self,
        state: &PlateState,
        start: Vec<f64>,
        clamped: Option<&ClampedCell<'_>>,
    ) -> Result<BoxSolution, ScsaError> {
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
            let kappa = exponential(ln_kappa);
            let mut image = self.iterate(state, &kappa)?.self_energy;
            let propagator = self.propagator(state, &kappa)?;
            let of_cell = clamped.map(|cell| cell.self_energy(state, &propagator));
            for (mode, sigma) in image.iter_mut().enumerate() {
                let of_cell = of_cell.as_ref().map_or(0.0, |of_cell| of_cell[mode]);
                *sigma = (bare[mode] + *sigma + of_cell).ln();
            }
            Ok(image)
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

    /// One evaluation of both equations.
    pub(super) fn iterate(&self, state: &PlateState, kappa: &[f64]) -> Result<Iterate, ScsaError> {
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
    pub(super) fn screening(
        &self,
        state: &PlateState,
        moments: &MomentTransforms,
        propagator: &FieldTransform,
    ) -> Vec<f64> {
        let scale = 0.5 / (state.thermal_energy() * self.area);
        let sums = self.convolution.pair_sum(&[(moments, propagator)]);
        self.over_q4(&sums).iter().map(|sum| sum * scale).collect()
    }

    pub(super) fn over_q4(&self, field: &[f64]) -> Vec<f64> {
        field
            .iter()
            .zip(&self.lengths)
            .map(|(value, q)| value / q.powi(4))
            .collect()
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
