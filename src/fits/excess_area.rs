//! Area hidden in ripples, and the slope they give the sheet.

use super::run_condition::run_condition;
use super::series_verdict::judge;
use super::{Fit, FitOptions, Fitted, FittedValue, Quantity, Verdict};
use crate::estimates::{Estimate, RunEstimates, SheetEstimates};

/// `excess_area` = (1/2) <|grad h|^2> and `rms_slope` = sqrt(<|grad h|^2>), summed over the modes of the first zone.
pub struct ExcessAreaFit;

impl Fit for ExcessAreaFit {
    fn name(&self) -> &'static str {
        "excess_area"
    }

    fn fit(&self, sheet: &SheetEstimates, _options: &FitOptions) -> Fitted {
        let quantities = sheet.runs.iter().flat_map(|run| {
            let excess = run.excess_area.as_ref();
            excess.into_iter().flat_map(move |excess| both(run, excess))
        });
        Fitted {
            quantities: quantities.collect(),
            ..Fitted::default()
        }
    }
}

fn both(run: &RunEstimates, excess: &Estimate) -> [Quantity; 2] {
    let judgement = judge(run, excess);
    let slope = (2.0 * excess.value).sqrt();
    [
        ("excess_area", excess.value, excess.error),
        // d sqrt(2 x) = dx/sqrt(2 x).
        ("rms_slope", slope, excess.error / slope),
    ]
    .map(|(name, value, error)| {
        let usable = judgement.verdict != Verdict::Unusable && value > 0.0;
        Quantity {
            name,
            unit: "1",
            condition: run_condition(run, Some(run.area.value.sqrt())),
            value: usable.then(|| FittedValue::positive(value, error)),
            method: "height-spectrum-zone-sum".into(),
            verdict: if usable {
                judgement.verdict
            } else {
                Verdict::Unusable
            },
            note: judgement.note.clone(),
        }
    })
}
