//! Values, errors and covariance read from a joint fit.

use nalgebra::DVector;

use super::joint_likelihood::{JointFit, JointModel};
use super::mode_verdict::Judgement;
use super::plate_covariance::PlateCovariance;
use super::plate_run::{judged, without_value};
use super::{Condition, Covariance, Fitted, FittedValue, Quantity, Verdict};
use crate::estimates::Tension;
use crate::theory::plate::{crossover_tension, thermal_length};
use crate::units::N_PER_M_PER_EV_PER_A2;

/// Name and unit.
type Name = (&'static str, &'static str);

const RIGIDITY: Name = ("bending_rigidity_bare", "eV");
const RIGIDITY_SLOPE: Name = ("bending_rigidity_bare_slope", "eV/K");
const YOUNGS: Name = ("youngs_modulus_bare", "N/m");
const YOUNGS_SLOPE: Name = ("youngs_modulus_bare_slope", "N/m/K");
const LATTICE_TERM: Name = ("lattice_term", "A^2");
const POISSON: Name = ("poisson_ratio_bare", "1");

/// What every joint fit is asked for.
pub(super) const NAMES: [Name; 4] = [RIGIDITY, YOUNGS, LATTICE_TERM, POISSON];

/// With a larger relative error Y lies within two errors of none.
const LARGEST_YOUNGS_ERROR: f64 = 0.5;

/// One value with its gradient by the parameters of the fit.
struct Reading {
    name: Name,
    value: f64,
    gradient: DVector<f64>,
    /// Whether its logarithm is the nearer to normal.
    positive: bool,
}

/// Everything a joint fit says.
pub(super) fn quantities(
    model: &JointModel<'_>,
    fit: &JointFit,
    covariance: &PlateCovariance,
    judgement: &Judgement,
    method: &str,
) -> Fitted {
    let readings = readings(model, fit);
    let error = |reading: &Reading| covariance.variance(&reading.gradient, 0.0).sqrt();
    let youngs_is_told = readings
        .iter()
        .filter(|reading| reading.name == YOUNGS)
        .all(|reading| reading.value > 0.0 && error(reading) <= LARGEST_YOUNGS_ERROR * reading.value);
    let of_name = |name: Name| {
        let mut judgement = judgement.clone();
        if !youngs_is_told && [YOUNGS, YOUNGS_SLOPE, POISSON].contains(&name) {
            judgement.at_most(
                Verdict::Unusable,
                "heights and cells together leave Y within two errors of none",
            );
        }
        judgement
    };
    let condition = Condition {
        tension: common_tension(model),
        ..Condition::default()
    };
    let mut quantities: Vec<Quantity> = readings
        .iter()
        .map(|reading| {
            let value = if reading.positive && reading.value > 0.0 {
                FittedValue::positive(reading.value, error(reading))
            } else {
                FittedValue::symmetric(reading.value, error(reading))
            };
            judged(
                reading.name,
                condition.clone(),
                value,
                method.to_owned(),
                &of_name(reading.name),
            )
        })
        .collect();
    if model.held_poisson.is_some() {
        let note = "no cell with both axes free: nothing tells Poisson's ratio";
        quantities.push(without_value(POISSON, condition.clone(), method, note));
    }
    if youngs_is_told {
        quantities.extend(scales(model, fit, covariance, judgement, method, &condition));
    }
    let gradients: Vec<DVector<f64>> = readings.iter().map(|reading| reading.gradient.clone()).collect();
    let covariances = youngs_is_told.then(|| Covariance {
        run: None,
        names: readings.iter().map(|reading| reading.name.0.to_owned()).collect(),
        matrix: covariance.of_quantities(&gradients),
    });
    Fitted {
        quantities,
        covariances: covariances.into_iter().collect(),
        ..Fitted::default()
    }
}

/// The tension that every run states alike.
fn common_tension(model: &JointModel<'_>) -> Option<f64> {
    let stated = |tension: Tension| match tension {
        Tension::Stated(value) => Some(value),
        Tension::Measured { .. } | Tension::Assumed => None,
    };
    let first = stated(model.runs.first()?.plate.run.tension)?;
    let same = |run: &super::joint_run::JointRun<'_>| stated(run.plate.run.tension) == Some(first);
    model.runs.iter().all(same).then_some(first)
}

/// The parameters in their written units. kappa(T) = K (1 + s t) with t = T/T_m - 1 is K (1 - s) at 0 K, with slope K s/T_m.
fn readings(model: &JointModel<'_>, fit: &JointFit) -> Vec<Reading> {
    let parameters = &fit.parameters;
    let gradient = |entries: &[(usize, f64)]| {
        let mut gradient = DVector::zeros(model.size());
        for &(place, value) in entries {
            gradient[place] = value;
        }
        gradient
    };
    let mut readings = Vec::new();
    let bases = [
        (RIGIDITY, RIGIDITY_SLOPE, 0, 1.0),
        (YOUNGS, YOUNGS_SLOPE, 2, N_PER_M_PER_EV_PER_A2),
    ];
    for (index, (name, slope_name, place, unit)) in bases.into_iter().enumerate() {
        let mean = parameters[place].exp() * unit;
        match model.slope_places() {
            None => readings.push(Reading {
                name,
                value: mean,
                gradient: gradient(&[(place, mean)]),
                positive: true,
            }),
            Some(places) => {
                let (slope_place, slope) = (places[index], parameters[places[index]]);
                let rise = mean / model.mean_temperature;
                readings.push(Reading {
                    name,
                    value: mean * (1.0 - slope),
                    gradient: gradient(&[(place, mean * (1.0 - slope)), (slope_place, -mean)]),
                    positive: true,
                });
                readings.push(Reading {
                    name: slope_name,
                    value: rise * slope,
                    gradient: gradient(&[(place, rise * slope), (slope_place, rise)]),
                    positive: false,
                });
            }
        }
    }
    readings.push(Reading {
        name: LATTICE_TERM,
        value: parameters[1],
        gradient: gradient(&[(1, 1.0)]),
        positive: false,
    });
    if let Some(place) = model.poisson() {
        readings.push(Reading {
            name: POISSON,
            value: parameters[place],
            gradient: gradient(&[(place, 1.0)]),
            positive: false,
        });
    }
    readings
}

/// Thermal length and crossover tension at each temperature of the runs.
fn scales(
    model: &JointModel<'_>,
    fit: &JointFit,
    covariance: &PlateCovariance,
    judgement: &Judgement,
    method: &str,
    condition: &Condition,
) -> Vec<Quantity> {
    let mut temperatures: Vec<f64> = model.runs.iter().map(|run| run.plate.run.temperature).collect();
    temperatures.sort_by(f64::total_cmp);
    temperatures.dedup();
    let mut quantities = Vec::new();
    for temperature in temperatures {
        let Some((bare, chain)) = model.bare(&fit.parameters, temperature) else {
            continue;
        };
        let (kappa, youngs) = (bare[0].exp(), bare[2].exp());
        let tension = crossover_tension(kappa, youngs, temperature) * N_PER_M_PER_EV_PER_A2;
        // Exponents of kappa and Y.
        let scales = [
            (
                ("thermal_length", "A"),
                thermal_length(kappa, youngs, temperature),
                1.0,
                -0.5,
            ),
            (("crossover_tension", "N/m"), tension, -1.0, 1.0),
        ];
        for (name, value, of_kappa, of_youngs) in scales {
            let gradient = (chain.row(0) * of_kappa + chain.row(2) * of_youngs).transpose();
            let error = value * covariance.variance(&gradient, 0.0).sqrt();
            let condition = Condition {
                temperature: Some(temperature),
                ..condition.clone()
            };
            let value = FittedValue::positive(value, error);
            quantities.push(judged(name, condition, value, method.to_owned(), judgement));
        }
    }
    quantities
}
