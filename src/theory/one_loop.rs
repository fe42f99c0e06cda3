//! Ripples to first order in Y: what the self-consistent theory must reduce to where the coupling is weak.

use std::f64::consts::PI;

use super::{BoxModes, BoxScsa, PlateState, ScsaError};

/// kappa(q) = kappa + 3 kB T Y/(16 pi kappa q^2) in eV of an infinite sheet without tension and lattice term, first order.
/// Follows from int d2k/(2 pi)^2 (qhat x khat)^4/|q + k|^4 = 3/(16 pi q^2)
/// (Nelson and Peliti, J. Phys. France 48, 1085 (1987)).
#[must_use]
pub fn infinite_kappa(state: &PlateState, q: f64) -> f64 {
    state.kappa + 3.0 * state.thermal_energy() * state.youngs / (16.0 * PI * state.kappa * q * q)
}

/// Y(q) = Y [1 - 3 kB T Y/(32 pi kappa^2 q^2)] in eV/A^2 of the same sheet, first order.
#[must_use]
pub fn infinite_youngs(state: &PlateState, q: f64) -> f64 {
    let relative = 3.0 * state.thermal_energy() * state.youngs / (32.0 * PI * (state.kappa * q).powi(2));
    state.youngs * (1.0 - relative)
}

/// kappa(q) (eV) and Y(q) (eV/A^2) to first order on the modes of a box.
#[derive(Clone, Debug, PartialEq)]
pub struct FirstOrder {
    /// kappa(q) of each mode.
    pub kappa: Vec<f64>,
    /// Y(q) of each mode.
    pub youngs: Vec<f64>,
}

/// First order on the modes of a periodic box: the sums of [`super::box_scsa`] with the bare plate's propagator.
///
/// # Errors
/// Where a parameter is out of range or the bare plate buckles under its tension.
pub fn in_box(modes: &BoxModes, state: &PlateState) -> Result<FirstOrder, ScsaError> {
    let [kappa, youngs] = BoxScsa::new(modes).first_order(state)?;
    Ok(FirstOrder { kappa, youngs })
}
