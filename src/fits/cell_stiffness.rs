//! Stiffness of the sheet from the fluctuations of its cell.

use super::compliance::Compliance;
use super::run_condition::run_condition;
use super::series_verdict::{Judgement, series_verdict};
use super::{Condition, Fit, FitOptions, Fitted, FittedValue, Quantity, Verdict};
use crate::estimates::{RunEstimates, STIFFEST_EV_PER_A2, SheetEstimates, StrainEstimate};
use crate::units::N_PER_M_PER_EV_PER_A2;

/// Stiffness tensor, Young's, bulk and shear modulus and Poisson's ratio from S = (A/kB T) cov(e), C = S^-1 (Parrinello
/// and Rahman, J. Chem. Phys. 76, 2662 (1982)), only of strains that were free to fluctuate.
///
/// With a clamped component the covariance of the free ones is that of the stiffness with that strain held at zero, so
/// its inverse is exactly the free block of C.
pub struct CellStiffnessFit;

const METHOD: &str = "cell-fluctuations";

/// Names of the stiffness components by Voigt pair (1, 2, 6 numbered 0, 1, 2), in the order they are written.
const COMPONENTS: [(&str, usize, usize); 6] = [
    ("stiffness_11", 0, 0),
    ("stiffness_22", 1, 1),
    ("stiffness_12", 0, 1),
    ("stiffness_66", 2, 2),
    ("stiffness_16", 0, 2),
    ("stiffness_26", 1, 2),
];

impl Fit for CellStiffnessFit {
    fn name(&self) -> &'static str {
        "cell_stiffness"
    }

    fn fit(&self, sheet: &SheetEstimates, _options: &FitOptions) -> Fitted {
        Fitted {
            quantities: sheet.runs.iter().flat_map(fit_run).collect(),
            ..Fitted::default()
        }
    }
}

fn fit_run(run: &RunEstimates) -> Vec<Quantity> {
    let strain = &run.strain;
    let condition = run_condition(run, Some(run.area.value.sqrt()));
    let refuse = |note: &str| vec![without_value(condition.clone(), note)];
    if run.cell_is_fixed() {
        return refuse(
            "the cell was held: its strain did not fluctuate, so it says nothing of the stiffness",
        );
    }
    let free: Vec<usize> = if strain.coupled {
        vec![0]
    } else {
        (0..3).filter(|&i| strain.free[i]).collect()
    };
    let judgement = judge(run, &free);
    if judgement.verdict == Verdict::Unusable {
        return refuse(&judgement.note);
    }
    let compliance = Compliance::new(strain, &free, run.temperature);
    let writer = Writer {
        condition: condition.clone(),
        judgement,
        shear_clamped: !strain.free[2],
    };
    if strain.coupled {
        let mut quantities = refuse(
            "the barostat moves both axes together: only the area fluctuates, which gives the bulk modulus alone",
        );
        quantities.extend(writer.modulus("bulk_modulus", compliance.coupled_bulk_modulus()));
        return quantities;
    }
    let Some(stiffness) = compliance.stiffness() else {
        return refuse(
            "the strains' covariance has no stable inverse: too few independent samples; make the run longer",
        );
    };
    let place = |strain: usize| free.iter().position(|&f| f == strain);
    let mut quantities = Vec::new();
    for (name, i, j) in COMPONENTS {
        if let (Some(a), Some(b)) = (place(i), place(j)) {
            let value = if i == j {
                stiffness.diagonal(a)
            } else {
                Some(stiffness.off_diagonal(a, b))
            };
            quantities.extend(writer.modulus(name, value));
        }
    }
    if strain.free[0] && strain.free[1] {
        quantities.extend(writer.modulus("youngs_modulus", compliance.youngs_modulus()));
        quantities.extend(writer.modulus("bulk_modulus", compliance.bulk_modulus()));
        quantities.extend(
            compliance
                .poisson_ratio()
                .map(|ratio| writer.quantity("poisson_ratio", "1", ratio)),
        );
    } else {
        quantities.extend(refuse(
            "one of the two axes was held: Young's modulus needs both free; the free component of the stiffness stands",
        ));
    }
    if let Some(shear) = place(2) {
        quantities.extend(writer.modulus("shear_modulus", stiffness.diagonal(shear)));
    }
    quantities
}

/// Verdict of the slowest product of two free strains, with a warning where the fluctuations are too small to be thermal.
fn judge(run: &RunEstimates, free: &[usize]) -> Judgement {
    let strain = &run.strain;
    let pairs = || free.iter().flat_map(|&i| free.iter().map(move |&j| (i, j)));
    let samples = pairs()
        .map(|(i, j)| strain.effective_samples[i][j])
        .fold(f64::INFINITY, f64::min);
    let r_hat = pairs()
        .filter_map(|(i, j)| strain.split_r_hat[i][j])
        .reduce(f64::max);
    let mut reservations = run.reservations.clone();
    if let Some(modulus) = too_stiff(strain, free, run.temperature) {
        reservations.push(format!(
            "the cell fluctuates as if a modulus were {modulus:.0} N/m, more than any sheet's: a barostat that rescales \
             the cell suppresses its fluctuations; use one that samples constant stress"
        ));
    }
    series_verdict(run.frames, samples, r_hat, &reservations)
}

/// The largest modulus 1/S_ii implied by a free strain, in N/m, where it is beyond any known sheet's.
pub(super) fn too_stiff(strain: &StrainEstimate, free: &[usize], temperature: f64) -> Option<f64> {
    let compliance = Compliance::new(strain, free, temperature);
    let implied = (0..free.len())
        .map(|a| 1.0 / compliance.element(a, a))
        .reduce(f64::max)?;
    (implied > STIFFEST_EV_PER_A2).then_some(implied * N_PER_M_PER_EV_PER_A2)
}

struct Writer {
    condition: Condition,
    judgement: Judgement,
    shear_clamped: bool,
}

impl Writer {
    /// A value in eV/A^2 as a quantity in N/m.
    fn modulus(&self, name: &'static str, value: Option<FittedValue>) -> Option<Quantity> {
        let unit = N_PER_M_PER_EV_PER_A2;
        let value = value.map(|v| FittedValue {
            value: v.value * unit,
            error: v.error * unit,
            interval95: v.interval95.map(|x| x * unit),
        })?;
        Some(self.quantity(name, "N/m", value))
    }

    fn quantity(&self, name: &'static str, unit: &'static str, value: FittedValue) -> Quantity {
        let mut note = self.judgement.note.clone();
        if self.shear_clamped && name == "youngs_modulus" {
            if !note.is_empty() {
                note.push_str("; ");
            }
            note.push_str("the shear of the cell was held: no shear modulus from this run");
        }
        Quantity {
            name,
            unit,
            condition: self.condition.clone(),
            value: Some(value),
            method: METHOD.into(),
            verdict: self.judgement.verdict,
            note,
        }
    }
}

fn without_value(condition: Condition, note: &str) -> Quantity {
    Quantity {
        name: "youngs_modulus",
        unit: "N/m",
        condition,
        value: None,
        method: METHOD.into(),
        verdict: Verdict::Unusable,
        note: note.into(),
    }
}
