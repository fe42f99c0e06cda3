//! The box of a rippled plate at one temperature.

use super::hybrid_monte_carlo::{difference, held_strain, mean_ripple_strain};
use super::plate_request::PlatePlan;
use super::{CellHold, HybridMonteCarlo, Voigt};
use crate::theory::{BoxModes, BoxScsa, PlaneCell, PlateState, ScsaError};

/// The flat sheet and its mean box at one temperature.
///
/// Ripples shorten the box. Wave vectors are those of the mean box, so that whoever measures the trajectory, and takes
/// wave vectors from its mean cell, sees the plate that was sampled. The mean box is the one that the self-consistent screening
/// approximation expects, right to about 1e-4 of its length.
#[derive(Clone, Debug)]
pub(super) struct PlateBox {
    pub state: PlateState,
    pub poisson: f64,
    pub flat: PlaneCell,
    /// The modes in the mean box.
    pub modes: BoxModes,
    pub hold: CellHold,
}

impl PlateBox {
    /// # Errors
    /// Where the box SCSA has no solution.
    pub fn new(plan: &PlatePlan, temperature: f64) -> Result<Self, ScsaError> {
        /// Wave vectors of the mean box move its strain by some per cent of itself: two rounds leave 1e-5.
        const ROUNDS: usize = 2;
        let request = &plan.request;
        let state = request.state(temperature);
        let flat = plan.lattice.cell();
        let held = held_strain(&state, request.poisson);
        let mut modes = plan.modes.clone();
        for _ in 0..ROUNDS {
            let theory = BoxScsa::new(&modes);
            let solution = if request.fixed_cell {
                theory.solve_clamped(&state, [true; 3], request.poisson, None)?
            } else {
                theory.solve(&state)?
            };
            let strain = difference(held, mean_ripple_strain(&modes, &solution.power));
            modes.cell = stretched(&flat, strain);
        }
        Ok(Self {
            state,
            poisson: request.poisson,
            flat,
            modes,
            hold: if request.fixed_cell {
                CellHold::FixedAtTension
            } else {
                CellHold::Free
            },
        })
    }

    /// A chain in equilibrium in this box.
    pub fn chain(&self, hold: CellHold, seed: u64) -> Result<HybridMonteCarlo, ScsaError> {
        HybridMonteCarlo::equilibrated(&self.modes, self.state, self.poisson, hold, seed)
    }
}

/// A cell under a strain e in Voigt order: its vectors' scalar products become a.(1 + 2 e).b.
pub(super) fn stretched(flat: &PlaneCell, strain: Voigt) -> PlaneCell {
    let product = |u: [f64; 2], v: [f64; 2]| {
        (1.0 + 2.0 * strain[0]) * u[0] * v[0]
            + (1.0 + 2.0 * strain[1]) * u[1] * v[1]
            + strain[2] * (u[0] * v[1] + u[1] * v[0])
    };
    PlaneCell::from_metric(
        product(flat.a, flat.a),
        product(flat.a, flat.b),
        product(flat.b, flat.b),
    )
}
