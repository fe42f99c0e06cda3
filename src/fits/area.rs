//! Area per atom, areal density and tension of each run.

use super::run_condition::run_condition;
use super::series_verdict::judge;
use super::{Fit, FitOptions, Fitted, FittedValue, PlateModel, Quantity, Verdict};
use crate::estimates::{RunEstimates, SheetEstimates, Tension};
use crate::units::{KG_PER_M2_PER_GRAM_PER_MOL_A2, N_PER_M_PER_EV_PER_A2};

/// Mean projected area per atom, mass per area, and the mean tension they belong to.
pub struct AreaFit;

impl Fit for AreaFit {
    fn name(&self) -> &'static str {
        "area"
    }

    fn fit(&self, sheet: &SheetEstimates, options: &FitOptions) -> Fitted {
        let mut quantities = Vec::new();
        for run in &sheet.runs {
            quantities.push(area_per_atom(run));
            quantities.extend(areal_density(run));
            // A harmonic plate fits the tension to the heights: that one stands then.
            if options.plate != PlateModel::Harmonic {
                quantities.push(tension(run));
            }
        }
        Fitted {
            quantities,
            ..Fitted::default()
        }
    }
}

fn area_per_atom(run: &RunEstimates) -> Quantity {
    let atoms = run.atoms as f64;
    from_area(run, "area_per_atom", "A^2", run.area.value / atoms)
}

/// Mass over mean area: a mean of 1/A would differ by the square of the area's relative fluctuation, under 1e-5.
fn areal_density(run: &RunEstimates) -> Option<Quantity> {
    let density = run.mass? / run.area.value * KG_PER_M2_PER_GRAM_PER_MOL_A2;
    Some(from_area(run, "areal_density", "kg/m^2", density))
}

/// A quantity with the relative error of the mean area.
fn from_area(run: &RunEstimates, name: &'static str, unit: &'static str, value: f64) -> Quantity {
    let judgement = judge(run, &run.area);
    let error = value * run.area.error / run.area.value;
    Quantity {
        name,
        unit,
        condition: run_condition(run, None),
        value: (judgement.verdict != Verdict::Unusable).then(|| FittedValue::symmetric(value, error)),
        method: if run.cell_is_fixed() {
            "held-cell"
        } else {
            "mean-projected-area"
        }
        .into(),
        verdict: judgement.verdict,
        note: judgement.note,
    }
}

/// The tension that the run's other values belong to. Nothing measured stands behind an assumed one, so it is weak, and in a
/// fixed cell, where the stress may be anything, it has no value.
fn tension(run: &RunEstimates) -> Quantity {
    let value = FittedValue::symmetric(
        run.tension.value() * N_PER_M_PER_EV_PER_A2,
        run.tension.error() * N_PER_M_PER_EV_PER_A2,
    );
    let (method, value, verdict, note) = match run.tension {
        Tension::Stated(_) => ("stated", Some(value), Verdict::Good, ""),
        Tension::Measured { .. } => ("thermo-mean", Some(value), Verdict::Good, ""),
        Tension::Assumed if run.cell_is_fixed() => (
            "assumed",
            None,
            Verdict::Unusable,
            "the cell was held and neither a tension nor a thermo series is given",
        ),
        Tension::Assumed => (
            "assumed",
            Some(value),
            Verdict::Weak,
            "neither a tension nor a thermo series is given: taken as zero, since the cell breathes",
        ),
    };
    Quantity {
        name: "tension",
        unit: "N/m",
        condition: run_condition(run, None),
        value,
        method: method.into(),
        verdict,
        note: note.into(),
    }
}
