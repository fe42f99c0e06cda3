//! Linear thermal expansion from the area ladder.

use super::series_verdict::judge;
use super::{AreaCurve, Condition, Fit, FitOptions, Fitted, FittedValue, Quantity, Verdict};
use crate::estimates::{RunEstimates, SheetEstimates, Tension};
use crate::numerics::LinearLeastSquares;

/// alpha(T) = (1/2) d ln A/dT of ln A = c0 + c1 T + c2 T ln T, weighted by the areas' errors.
///
/// Ripples give a term T ln T: their area is a sum of kB T/kappa(q) over every decade of q down to the thermal wave vector, which
/// itself grows with T. Two temperatures give one straight line, and one value at their midpoint.
pub struct ThermalExpansionFit;

/// Measured tensions further apart than this many of their errors belong to different ladders.
const SAME_TENSION: f64 = 3.0;

/// Points of the fitted curve.
const CURVE_POINTS: usize = 101;

impl Fit for ThermalExpansionFit {
    fn name(&self) -> &'static str {
        "thermal_expansion"
    }

    fn fit(&self, sheet: &SheetEstimates, _options: &FitOptions) -> Fitted {
        let mut fitted = Fitted::default();
        let mut longest = 0;
        for ladder in ladders(sheet) {
            let Some((quantities, curve)) = climb(&ladder) else {
                continue;
            };
            fitted.quantities.extend(quantities);
            if ladder.len() > longest {
                longest = ladder.len();
                fitted.area_curve = curve;
            }
        }
        fitted
    }
}

/// Runs of equal atom count and tension whose area was free and is usable, in the sheet's order.
fn ladders(sheet: &SheetEstimates) -> Vec<Vec<&RunEstimates>> {
    let mut ladders: Vec<Vec<&RunEstimates>> = Vec::new();
    for run in &sheet.runs {
        let usable = judge(run, &run.area).verdict != Verdict::Unusable;
        if run.cell_is_fixed() || !usable || run.area.error <= 0.0 {
            continue;
        }
        let fits = |ladder: &&mut Vec<&RunEstimates>| {
            ladder[0].atoms == run.atoms && same_tension(ladder[0].tension, run.tension)
        };
        match ladders.iter_mut().find(fits) {
            Some(ladder) => ladder.push(run),
            None => ladders.push(vec![run]),
        }
    }
    ladders
}

fn same_tension(x: Tension, y: Tension) -> bool {
    (x.value() - y.value()).abs() <= SAME_TENSION * x.error().hypot(y.error())
}

/// Basis functions of ln A at t = T/scale: 1, t and (where there are three terms) t ln t, which span the same curves as T ln T.
fn basis(t: f64, terms: usize) -> Vec<f64> {
    [1.0, t, t * t.ln()][..terms].to_vec()
}

/// Derivatives of [`basis`] with respect to t.
fn slope(t: f64, terms: usize) -> Vec<f64> {
    [0.0, 1.0, t.ln() + 1.0][..terms].to_vec()
}

fn climb(ladder: &[&RunEstimates]) -> Option<(Vec<Quantity>, Option<AreaCurve>)> {
    let mut temperatures: Vec<f64> = ladder.iter().map(|r| r.temperature).collect();
    temperatures.sort_by(f64::total_cmp);
    temperatures.dedup();
    let steps = temperatures.len();
    if steps < 2 {
        let note = "one temperature only: thermal expansion needs runs at two or more, four for a good value";
        return Some((
            vec![quantity(
                condition_of(ladder, None),
                None,
                Verdict::Unusable,
                note.into(),
            )],
            None,
        ));
    }
    let terms = if steps == 2 { 2 } else { 3 };
    let scale = temperatures.iter().sum::<f64>() / steps as f64;
    let rows: Vec<Vec<f64>> = ladder
        .iter()
        .map(|r| basis(r.temperature / scale, terms))
        .collect();
    let values: Vec<f64> = ladder.iter().map(|r| r.area.value.ln()).collect();
    let errors: Vec<f64> = ladder.iter().map(|r| r.area.error / r.area.value).collect();
    let solution = LinearLeastSquares::solve(&rows, &values, &errors)?;
    let (verdict, note) = judge_ladder(ladder, steps, solution.chi_square);
    let expansion = |temperature: f64| {
        let half = 0.5 / scale;
        let (value, error) = solution.combination(&slope(temperature / scale, terms));
        FittedValue::symmetric(half * value, half * error)
    };
    let quantities = if steps == 2 {
        let midpoint = 0.5 * (temperatures[0] + temperatures[1]);
        let condition = condition_of(ladder, Some(midpoint));
        vec![quantity(condition, Some(expansion(midpoint)), verdict, note)]
    } else {
        ladder
            .iter()
            .map(|run| {
                let condition = super::run_condition::run_condition(run, None);
                quantity(condition, Some(expansion(run.temperature)), verdict, note.clone())
            })
            .collect()
    };
    let atoms = ladder[0].atoms as f64;
    let (first, last) = (temperatures[0], temperatures[steps - 1]);
    let temperature: Vec<f64> = (0..CURVE_POINTS)
        .map(|i| first + (last - first) * i as f64 / (CURVE_POINTS - 1) as f64)
        .collect();
    let area_per_atom = temperature
        .iter()
        .map(|t| solution.combination(&basis(t / scale, terms)).0.exp() / atoms)
        .collect();
    let curve = AreaCurve {
        temperature,
        area_per_atom,
    };
    Some((quantities, Some(curve)))
}

/// Good with four temperatures and three quarters of the runs good.
fn judge_ladder(ladder: &[&RunEstimates], steps: usize, chi_square: f64) -> (Verdict, String) {
    let good = ladder
        .iter()
        .filter(|r| judge(r, &r.area).verdict == Verdict::Good)
        .count();
    let mut reasons = Vec::new();
    if steps == 2 {
        reasons.push(
            "two temperatures: a straight line between them; four are needed for a good value".to_owned(),
        );
    } else if steps == 3 {
        reasons.push(
            "three temperatures: the curve goes through every point; four are needed for a good value".into(),
        );
    }
    if 4 * good < 3 * ladder.len() {
        reasons.push(format!(
            "the area is good in {good} of {} runs; three quarters are needed: make the others longer",
            ladder.len()
        ));
    }
    let verdict = if reasons.is_empty() {
        Verdict::Good
    } else {
        Verdict::Weak
    };
    let terms = if steps == 2 { 2 } else { 3 };
    if ladder.len() > terms {
        reasons.push(format!(
            "chi-square {chi_square:.1} over {} degrees of freedom",
            ladder.len() - terms
        ));
    }
    (verdict, reasons.join("; "))
}

/// The ladder's condition: named after its run where there is one alone.
fn condition_of(ladder: &[&RunEstimates], temperature: Option<f64>) -> Condition {
    let first = super::run_condition::run_condition(ladder[0], None);
    Condition {
        run: first.run.filter(|_| ladder.len() == 1),
        temperature: temperature.or(first.temperature),
        ..first
    }
}

fn quantity(condition: Condition, value: Option<FittedValue>, verdict: Verdict, note: String) -> Quantity {
    Quantity {
        name: "thermal_expansion",
        unit: "1/K",
        condition,
        value,
        method: "area-ladder".into(),
        verdict,
        note,
    }
}
