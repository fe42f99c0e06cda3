//! One parameter as it stands in the file.

use serde::{Deserialize, Serialize};

use crate::fits::{FittedValue, Quantity, Verdict};
use crate::units::N_PER_M_PER_EV_PER_A2;

use super::round_for_writing;

/// One `[[sheet.parameter]]`: a number with its unit, error, conditions and method. The order of the fields is the order
/// of the keys; an absent one has no key.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[allow(non_snake_case)] // The unit in a key is spelled as the unit is: K, N, A.
pub struct Parameter {
    /// One of [`super::PARAMETER_NAMES`].
    pub name: String,
    /// Name of the run; absent where the parameter belongs to several.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub run: Option<String>,
    /// Temperature in K; absent where the parameter belongs to no one temperature.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub temperature_K: Option<f64>,
    /// Mean tension held, in N/m, where the pipeline states one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub tension_N_per_m: Option<f64>,
    /// Length scale in A; absent where the parameter is not scale dependent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub length_A: Option<f64>,
    /// The value, in `unit`; absent where the verdict is unusable.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub value: Option<f64>,
    /// One standard error, in `unit`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub error: Option<f64>,
    /// Central 95 % interval, in `unit`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub interval95: Option<[f64; 2]>,
    /// Unit of the value.
    pub unit: String,
    /// How it was obtained.
    pub method: String,
    /// How far to trust it.
    pub verdict: Verdict,
    /// Why, when the verdict is not good.
    #[serde(default)]
    pub note: String,
}

impl Parameter {
    /// The record of a fitted quantity, its conditions turned into the written units.
    ///
    /// An unusable quantity keeps no number. One whose number is not finite becomes unusable, and the note says so: a
    /// file never holds `nan` or `inf`.
    #[must_use]
    pub fn from_quantity(quantity: &Quantity) -> Self {
        let mut verdict = quantity.verdict;
        let mut note = quantity.note.clone();
        let mut number = quantity.value.filter(|_| verdict != Verdict::Unusable);
        if number.is_some_and(|number| !is_finite(&number)) {
            number = None;
            verdict = Verdict::Unusable;
            if !note.is_empty() {
                note.push_str("; ");
            }
            note.push_str("the data leave the value or its error unbounded");
        }
        if number.is_none() {
            verdict = Verdict::Unusable;
        }
        let condition = &quantity.condition;
        Self {
            name: quantity.name.to_owned(),
            run: condition.run.clone(),
            temperature_K: condition.temperature,
            tension_N_per_m: condition.tension.map(|tension| tension * N_PER_M_PER_EV_PER_A2),
            length_A: condition.length,
            value: number.map(|number| number.value),
            error: number.map(|number| number.error),
            interval95: number.map(|number| number.interval95),
            unit: quantity.unit.to_owned(),
            method: quantity.method.clone(),
            verdict,
            note,
        }
    }

    /// The record with every number rounded as files hold it.
    #[must_use]
    pub fn rounded(&self) -> Self {
        Self {
            temperature_K: self.temperature_K.map(round_for_writing),
            tension_N_per_m: self.tension_N_per_m.map(round_for_writing),
            length_A: self.length_A.map(round_for_writing),
            value: self.value.map(round_for_writing),
            error: self.error.map(round_for_writing),
            interval95: self.interval95.map(|interval| interval.map(round_for_writing)),
            ..self.clone()
        }
    }

    /// What is wrong with a record that was read: `None` where nothing is.
    #[must_use]
    pub fn fault(&self) -> Option<String> {
        let finite = |number: f64| number.is_finite();
        let conditions = [self.temperature_K, self.tension_N_per_m, self.length_A];
        if !conditions.into_iter().flatten().all(finite) {
            return Some(
                "found a condition that is not a finite number; leave the key out instead".to_owned(),
            );
        }
        match (self.value, self.error, self.interval95) {
            (None, None, None) if self.verdict == Verdict::Unusable => None,
            (None, None, None) => Some(format!(
                "found verdict {:?} without a value; give `value`, `error` and `interval95`, or set the verdict to \
                 \"unusable\"",
                self.verdict
            )),
            (Some(_), Some(_), Some(_)) if self.verdict == Verdict::Unusable => Some(
                "found a value under the verdict \"unusable\"; leave the value out or change the verdict"
                    .to_owned(),
            ),
            (Some(value), Some(error), Some([low, high])) => {
                if ![value, error, low, high].into_iter().all(finite) {
                    Some("found a number that is not finite in `value`, `error` or `interval95`".to_owned())
                } else if error < 0.0 {
                    Some(format!(
                        "found error = {error}; a standard error is zero or positive"
                    ))
                } else if low > high {
                    Some(format!(
                        "found interval95 = [{low}, {high}]; expected the lower end first"
                    ))
                } else {
                    None
                }
            }
            _ => Some(
                "found only some of `value`, `error` and `interval95`; give all three or none".to_owned(),
            ),
        }
    }
}

fn is_finite(number: &FittedValue) -> bool {
    let [low, high] = number.interval95;
    [number.value, number.error, low, high]
        .into_iter()
        .all(f64::is_finite)
}
