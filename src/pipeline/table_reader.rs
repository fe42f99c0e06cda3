//! Reads the values of one TOML table as its declared keys say, and collects every problem on the way.

use std::ops::Range;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::diagnostics::{Diagnostic, Diagnostics};
use super::keys::{Bound, Key, Kind, Presence, TableKeys};
use super::wording::{example, expected, nearest, type_noun, where_it_belongs, with_unit};
use crate::units::Dimension;

/// A value and the bytes of the file it stands in.
#[derive(Clone, Debug, PartialEq)]
pub struct Written<T> {
    /// The value.
    pub value: T,
    /// Its bytes in the file.
    pub span: Range<usize>,
}

/// One table of the file. Making it reports the keys that are not declared.
pub(super) struct TableReader<'t, 'p> {
    table: &'t DeTable<'t>,
    /// The bytes to point at where something is missing: the table's header.
    span: Range<usize>,
    declared: &'static TableKeys,
    /// Declared keys that a misspelt one stands for: not reported as missing too.
    meant: Vec<&'static str>,
    pub(super) problems: &'p mut Diagnostics,
}

impl<'t, 'p> TableReader<'t, 'p> {
    pub(super) fn new(
        table: &'t DeTable<'t>,
        span: Range<usize>,
        declared: &'static TableKeys,
        problems: &'p mut Diagnostics,
    ) -> Self {
        let mut meant = Vec::new();
        for (key, _) in table {
            let name: &str = key.get_ref();
            if declared.find(name).is_some() {
                continue;
            }
            let known: Vec<&'static str> = declared.keys.iter().map(|key| key.name).collect();
            let nearest = nearest(name, &known);
            meant.extend(nearest);
            problems.push(
                Diagnostic::error(format!("unknown key `{name}` in {}", declared.header))
                    .at(
                        key.span(),
                        nearest.map_or(String::new(), |known| format!("did you mean `{known}`?")),
                    )
                    .help(where_it_belongs(name, declared)),
            );
        }
        Self {
            table,
            span,
            declared,
            meant,
            problems,
        }
    }

    /// The value of a declared key; `None`, and reported, where it is required and missing.
    pub(super) fn value(&mut self, name: &str) -> Option<(&'static Key, &'t Spanned<DeValue<'t>>)> {
        let key = self.declared.find(name).expect("only declared keys are read");
        let value = self.table.get(name);
        if value.is_none() && key.presence == Presence::Required && !self.meant.contains(&key.name) {
            let missing =
                match key.kind {
                    Kind::Table(below) | Kind::Tables(below) => {
                        Diagnostic::error(format!("{} has no {}", self.declared.header, below.header))
                            .help(format!("add {}: {}", below.header, below.doc.to_lowercase()))
                    }
                    _ => Diagnostic::error(format!("{} has no `{name}`", self.declared.header))
                        .help(format!("add {} ({})", example(key), key.doc)),
                };
            self.problems.push(if self.span.is_empty() {
                missing
            } else {
                missing.at(self.span.clone(), format!("`{name}` is required"))
            });
        }
        value.map(|value| (key, value))
    }

    /// A text that is not empty, and for names one that can be a folder's.
    pub(super) fn text(&mut self, name: &str) -> Option<Written<String>> {
        let (key, value) = self.value(name)?;
        self.text_of(key, value)
    }

    /// A list of texts; a single text counts as a list of one only where the key takes both.
    pub(super) fn texts(&mut self, name: &str) -> Option<Vec<Written<String>>> {
        let (key, value) = self.value(name)?;
        match value.get_ref() {
            DeValue::Array(items) if items.is_empty() => {
                self.problems.push(
                    Diagnostic::error(format!("`{name}` is an empty list"))
                        .at(value.span(), expected(key))
                        .help(format!("write {}", example(key))),
                );
                None
            }
            // A list with one wrong entry is still read on, for the problems of the others.
            DeValue::Array(items) => Some(items.iter().filter_map(|item| self.text_of(key, item)).collect()),
            DeValue::String(_) if matches!(key.kind, Kind::Paths) => Some(vec![self.text_of(key, value)?]),
            _ => self.wrong_type(key, value),
        }
    }

    fn text_of(&mut self, key: &Key, value: &Spanned<DeValue<'_>>) -> Option<Written<String>> {
        let DeValue::String(text) = value.get_ref() else {
            return self.wrong_type(key, value);
        };
        let problem = if text.trim().is_empty() {
            Some("is empty")
        } else if matches!(key.kind, Kind::Name) && !can_be_a_folder(text) {
            Some("cannot be the name of a folder")
        } else {
            None
        };
        if let Some(problem) = problem {
            self.problems.push(
                Diagnostic::error(format!("`{}` {problem}", key.name))
                    .at(value.span(), expected(key))
                    .help(format!("{}: {}", key.name, key.doc)),
            );
            return None;
        }
        Some(written(text.to_string(), value))
    }

    /// A whole number of at least the declared one.
    pub(super) fn count(&mut self, name: &str) -> Option<Written<usize>> {
        let (key, value) = self.value(name)?;
        let Kind::Count(least) = key.kind else {
            unreachable!("{name} is declared as a count")
        };
        let DeValue::Integer(integer) = value.get_ref() else {
            return self.wrong_type(key, value);
        };
        let count = usize::from_str_radix(integer.as_str(), integer.radix()).ok();
        if let Some(count) = count.filter(|count| *count >= least) {
            return Some(written(count, value));
        }
        self.problems.push(
            Diagnostic::error(format!("`{name}` is {integer}"))
                .at(value.span(), expected(key))
                .help(format!("{name}: {}", key.doc)),
        );
        None
    }

    /// One of the declared words, as the caller maps it.
    pub(super) fn choice<T>(
        &mut self,
        name: &str,
        of_word: impl Fn(&str) -> Option<T>,
    ) -> Option<Written<T>> {
        let (key, value) = self.value(name)?;
        let Kind::Choice(words) = key.kind else {
            unreachable!("{name} is declared as a choice")
        };
        let DeValue::String(word) = value.get_ref() else {
            return self.wrong_type(key, value);
        };
        if let Some(choice) = of_word(word) {
            return Some(written(choice, value));
        }
        let help = match nearest(word, words) {
            Some(nearest) => format!("did you mean \"{nearest}\"? {name}: {}", key.doc),
            None => format!("{name}: {}", key.doc),
        };
        self.problems.push(
            Diagnostic::error(format!("`{name}` is \"{word}\""))
                .at(value.span(), expected(key))
                .help(help),
        );
        None
    }

    /// A number with a unit, in the program's units.
    pub(super) fn quantity(&mut self, name: &str) -> Option<Written<f64>> {
        let (key, value) = self.value(name)?;
        let Kind::Quantity(dimension, bound) = key.kind else {
            unreachable!("{name} is declared as a quantity")
        };
        self.quantity_of(name, dimension, bound, value)
    }

    /// Two numbers with units, ascending, in the program's units.
    pub(super) fn range(&mut self, name: &str) -> Option<Written<[f64; 2]>> {
        let (key, value) = self.value(name)?;
        let Kind::Range(dimension, bound) = key.kind else {
            unreachable!("{name} is declared as a range")
        };
        let DeValue::Array(ends) = value.get_ref() else {
            return self.wrong_type(key, value);
        };
        let [first, last] = &ends[..] else {
            self.problems.push(
                Diagnostic::error(format!("`{name}` has {} values", ends.len()))
                    .at(value.span(), expected(key))
                    .help(format!("write {}", example(key))),
            );
            return None;
        };
        let first = self.quantity_of(name, dimension, bound, first);
        let last = self.quantity_of(name, dimension, bound, last);
        let (first, last) = (first?, last?);
        if first.value >= last.value {
            self.problems.push(
                Diagnostic::error(format!("`{name}` ends before it begins"))
                    .at(value.span(), expected(key))
                    .help("write the smaller one first"),
            );
            return None;
        }
        Some(written([first.value, last.value], value))
    }

    /// A number with a unit of `dimension`, within `bound`; `name` is the key, for messages.
    pub(super) fn quantity_of(
        &mut self,
        name: &str,
        dimension: Dimension,
        bound: Bound,
        value: &Spanned<DeValue<'_>>,
    ) -> Option<Written<f64>> {
        let text = match value.get_ref() {
            DeValue::String(text) => text.to_string(),
            DeValue::Integer(number) => number.to_string(),
            DeValue::Float(number) => number.to_string(),
            other => {
                self.problems.push(
                    Diagnostic::error(format!("`{name}` is {}", type_noun(other)))
                        .at(value.span(), format!("expected {} in quotes", dimension.noun()))
                        .help(format!("write {name} = \"{}\"", dimension.example())),
                );
                return None;
            }
        };
        let quantity = match dimension.parse(&text) {
            Ok(quantity) => quantity,
            Err(error) => {
                self.problems.push(
                    Diagnostic::error(format!("`{name}`: {}", error.problem()))
                        .at(value.span(), format!("expected {}", with_unit(dimension)))
                        .help(error.remedy()),
                );
                return None;
            }
        };
        let wanted = match bound {
            Bound::Positive if quantity <= 0.0 => "above zero",
            Bound::Share if quantity <= 0.0 || quantity >= 1.0 => "above 0 % and below 100 %",
            _ => return Some(written(quantity, value)),
        };
        self.problems.push(
            Diagnostic::error(format!("`{name}` is {text}"))
                .at(value.span(), format!("expected {} {wanted}", dimension.noun()))
                .help(format!("write {name} = \"{}\", for example", dimension.example())),
        );
        None
    }

    /// The table under a key, with its header's bytes.
    pub(super) fn table(&mut self, name: &str) -> Option<(&'t DeTable<'t>, Range<usize>)> {
        let (key, value) = self.value(name)?;
        self.table_of(key, value)
    }

    /// The tables under a key, with their headers' bytes.
    pub(super) fn tables(&mut self, name: &str) -> Vec<(&'t DeTable<'t>, Range<usize>)> {
        let Some((key, value)) = self.value(name) else {
            return Vec::new();
        };
        match value.get_ref() {
            DeValue::Array(items) if !items.is_empty() => {
                items.iter().filter_map(|item| self.table_of(key, item)).collect()
            }
            _ => self.wrong_type(key, value).unwrap_or_default(),
        }
    }

    fn table_of(
        &mut self,
        key: &Key,
        value: &'t Spanned<DeValue<'t>>,
    ) -> Option<(&'t DeTable<'t>, Range<usize>)> {
        match value.get_ref() {
            DeValue::Table(table) => Some((table, value.span())),
            _ => self.wrong_type(key, value),
        }
    }

    /// Reports a value of the wrong type.
    pub(super) fn wrong_type<T>(&mut self, key: &Key, value: &Spanned<DeValue<'_>>) -> Option<T> {
        self.problems.push(
            Diagnostic::error(format!("`{}` is {}", key.name, type_noun(value.get_ref())))
                .at(value.span(), expected(key))
                .help(format!("write {}", example(key))),
        );
        None
    }
}

fn written<T>(value: T, place: &Spanned<DeValue<'_>>) -> Written<T> {
    Written {
        value,
        span: place.span(),
    }
}

/// Whether a text can be one component of a path on every usual system, and one field of a table.
fn can_be_a_folder(text: &str) -> bool {
    text.trim() == text
        && !text.starts_with('.')
        && !text
            .chars()
            .any(|letter| "/\\".contains(letter) || letter.is_control())
}
