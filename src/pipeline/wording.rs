//! How messages speak of keys and their values, from what is declared of them.

use toml::de::DeValue;

use super::keys::{FILE, Key, Kind, TableKeys};
use crate::units::Dimension;

/// The known name that `name` most likely stands for: at most a third of its letters off, or one the beginning of the other.
pub(super) fn nearest(name: &str, known: &[&'static str]) -> Option<&'static str> {
    let plain = |text: &str| text.to_lowercase().replace(['-', ' '], "_");
    let name = plain(name);
    let distance = |candidate: &str| strsim::osa_distance(&name, &plain(candidate));
    let best = known
        .iter()
        .copied()
        .min_by_key(|candidate| distance(candidate))?;
    let allowed = (best.len().max(name.len()) / 3).max(1);
    if best.len() > 1 && distance(best) <= allowed {
        return Some(best);
    }
    known.iter().copied().find(|candidate| {
        name.len().min(candidate.len()) >= 3 && (candidate.starts_with(&name) || name.starts_with(candidate))
    })
}

/// The table that does know a key unknown here, or else the keys known here.
pub(super) fn where_it_belongs(name: &str, declared: &TableKeys) -> String {
    let elsewhere = FILE
        .with_descendants()
        .into_iter()
        .find(|table| table.header != declared.header && table.find(name).is_some());
    match elsewhere {
        Some(table) => format!("`{name}` belongs in {}", table.header),
        None if declared.keys.is_empty() => format!("{} takes no keys", declared.header),
        None => {
            let names: Vec<&str> = declared.keys.iter().map(|key| key.name).collect();
            format!("{} takes {}", declared.header, names.join(", "))
        }
    }
}

/// What a value is, for "`stride` is a text".
pub(super) fn type_noun(value: &DeValue<'_>) -> String {
    let noun = match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(number) => return format!("the bare number {number}"),
        DeValue::Float(number) => return format!("the bare number {number}"),
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date or time of day",
        DeValue::Array(items) if items.is_empty() => "an empty list",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    };
    noun.to_owned()
}

/// What a quantity must be: "a time with its unit".
pub(super) fn with_unit(dimension: Dimension) -> String {
    match dimension {
        Dimension::Number => "a number or a percentage".to_owned(),
        _ => format!("{} with its unit", dimension.noun()),
    }
}

/// What the key's value must be: "expected a whole number of at least 1".
pub(super) fn expected(key: &Key) -> String {
    let what = match key.kind {
        Kind::Text => "a text in quotes, not empty".to_owned(),
        Kind::Name => "a name in quotes, without / and \\".to_owned(),
        Kind::Texts => "a list of texts in quotes".to_owned(),
        Kind::Path => "one path in quotes".to_owned(),
        Kind::Paths => "a path or glob in quotes, or a list of them".to_owned(),
        Kind::Count(least) => format!("a whole number of at least {least}"),
        Kind::Choice(words) => format!("\"{}\"", words.join("\", \"")),
        Kind::Quantity(dimension, _) => with_unit(dimension),
        Kind::Range(dimension, _) => format!("a list of two: {}, then a larger one", with_unit(dimension)),
        Kind::Limit => "a limit in the parameter's unit".to_owned(),
        Kind::Table(_) | Kind::PerParameter(_) => "a table".to_owned(),
        Kind::Tables(_) => "one or more tables in double brackets".to_owned(),
    };
    match key.kind {
        Kind::Choice(_) => format!("expected one of {what}"),
        _ => format!("expected {what}"),
    }
}

/// How the key could stand in a file.
pub(super) fn example(key: &Key) -> String {
    let value = match key.kind {
        Kind::Text | Kind::Name => "\"...\"".to_owned(),
        Kind::Texts => "[\"B\", \"N\"]".to_owned(),
        Kind::Path => "\"file.csv\"".to_owned(),
        Kind::Paths => "\"run-*.xtc\"".to_owned(),
        Kind::Count(least) => least.max(1).to_string(),
        Kind::Choice(words) => format!("\"{}\"", words[0]),
        Kind::Quantity(dimension, _) => format!("\"{}\"", dimension.example()),
        Kind::Range(..) => "[\"0.1 1/angstrom\", \"0.8 1/angstrom\"]".to_owned(),
        Kind::Limit => "\"1.1 eV\"".to_owned(),
        Kind::PerParameter(_) => {
            return "[gate] with lines such as bending_rigidity = { min = \"1 eV\" }".to_owned();
        }
        Kind::Table(below) => return format!("it as {}", below.header),
        Kind::Tables(below) => return format!("{} above each one", below.header),
    };
    format!("{} = {value}", key.name)
}
