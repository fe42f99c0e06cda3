//! `[gate]`: limits that the parameters must meet.

use serde::Serialize;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::diagnostics::{Diagnostic, Diagnostics};
use super::keys::{Bound, GATE_LIMIT, Kind};
use super::table_reader::TableReader;
use super::wording::nearest;
use crate::fits::Verdict;
use crate::parameters::{PARAMETER_NAMES, look_up};
use crate::units::Dimension;

/// What every value of one parameter must meet.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct GateLimit {
    /// Name of the parameter.
    pub parameter: String,
    /// Smallest value allowed, in the parameter's unit.
    pub min: Option<f64>,
    /// Largest value allowed, in the parameter's unit.
    pub max: Option<f64>,
    /// Largest standard error allowed.
    pub max_error: Option<ErrorLimit>,
    /// Worst verdict allowed.
    pub verdict: Option<Verdict>,
}

/// The largest standard error a gate allows.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum ErrorLimit {
    /// In the parameter's unit.
    Absolute(f64),
    /// As a share of the value.
    Relative(f64),
}

/// The unit in which a parameter of this name is written; `None` for no known name.
fn unit_of(name: &str) -> Option<&'static str> {
    look_up(name).map(|row| row.unit)
}

/// Every name that a gate may limit.
fn names() -> Vec<&'static str> {
    PARAMETER_NAMES.iter().map(|row| row.name).collect()
}

/// Reads `[gate]`, in the order of the file.
pub(super) fn read_gate(table: &DeTable<'_>, problems: &mut Diagnostics) -> Vec<GateLimit> {
    let mut entries: Vec<_> = table.iter().collect();
    entries.sort_by_key(|(key, _)| key.span().start);
    entries
        .into_iter()
        .filter_map(|(key, value)| read_limit(key, value, problems))
        .collect()
}

fn read_limit(
    key: &Spanned<impl AsRef<str>>,
    value: &Spanned<DeValue<'_>>,
    problems: &mut Diagnostics,
) -> Option<GateLimit> {
    let parameter = key.get_ref().as_ref();
    let Some(unit) = unit_of(parameter) else {
        let known = names();
        let nearest = nearest(parameter, &known);
        problems.push(
            Diagnostic::error(format!("`{parameter}` is no parameter"))
                .at(
                    key.span(),
                    nearest.map_or(String::new(), |known| format!("did you mean `{known}`?")),
                )
                .help(match nearest {
                    Some(nearest) => format!("write {nearest} = {{ max_error = \"5 %\" }}, for example"),
                    None => format!("a gate limits one of {}", known.join(", ")),
                }),
        );
        return None;
    };
    let DeValue::Table(table) = value.get_ref() else {
        problems.push(
            Diagnostic::error(format!("the gate of `{parameter}` is no table"))
                .at(
                    value.span(),
                    "expected a table with min, max, max_error or verdict",
                )
                .help(format!(
                    "write {parameter} = {{ max_error = \"5 %\" }}, for example"
                )),
        );
        return None;
    };
    let mut reader = TableReader::new(table, value.span(), &GATE_LIMIT, problems);
    let limit = GateLimit {
        parameter: parameter.to_owned(),
        min: read_value(&mut reader, "min", unit),
        max: read_value(&mut reader, "max", unit),
        max_error: read_error(&mut reader, unit),
        verdict: reader
            .choice("verdict", |word| match word {
                "good" => Some(Verdict::Good),
                "weak" => Some(Verdict::Weak),
                _ => None,
            })
            .map(|verdict| verdict.value),
    };
    if table.is_empty() {
        problems.push(
            Diagnostic::error(format!("the gate of `{parameter}` has no limit"))
                .at(value.span(), "expected min, max, max_error or verdict")
                .help("a gate without a limit is always met: add one, or remove the line"),
        );
    }
    if let (Some(min), Some(max)) = (limit.min, limit.max)
        && min > max
    {
        problems.push(
            Diagnostic::error(format!(
                "the gate of `{parameter}` can never be met: min is above max"
            ))
            .at(value.span(), "expected min below max")
            .help("exchange min and max"),
        );
    }
    Some(limit)
}

/// A limit in the parameter's unit.
fn read_value(reader: &mut TableReader<'_, '_>, name: &str, unit: &str) -> Option<f64> {
    let (key, value) = reader.value(name)?;
    debug_assert!(matches!(key.kind, Kind::Limit), "{name} is declared as a limit");
    let dimension = Dimension::of_unit(unit).expect("every parameter's unit has a dimension");
    let inside = reader.quantity_of(name, dimension, Bound::Any, value)?;
    Some(inside.value / dimension.one(unit))
}

/// A limit of the error: a percentage of the value, or in the parameter's unit.
fn read_error(reader: &mut TableReader<'_, '_>, unit: &str) -> Option<ErrorLimit> {
    let (_, value) = reader.value("max_error")?;
    if let DeValue::String(text) = value.get_ref()
        && text.trim_end().ends_with('%')
    {
        return reader
            .quantity_of("max_error", Dimension::Number, Bound::Positive, value)
            .map(|share| ErrorLimit::Relative(share.value));
    }
    let dimension = Dimension::of_unit(unit).expect("every parameter's unit has a dimension");
    reader
        .quantity_of("max_error", dimension, Bound::Positive, value)
        .map(|error| ErrorLimit::Absolute(error.value / dimension.one(unit)))
}

#[cfg(test)]
mod tests {
    use super::unit_of;
    use crate::parameters::PARAMETER_NAMES;
    use crate::units::Dimension;

    #[test]
    fn every_parameter_has_a_dimension() {
        for row in PARAMETER_NAMES {
            assert_eq!(unit_of(row.name), Some(row.unit));
            assert!(
                Dimension::of_unit(row.unit).is_some(),
                "{} in {}",
                row.name,
                row.unit
            );
        }
    }
}
