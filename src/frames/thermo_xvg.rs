//! Thermo series as GROMACS `energy` writes them: an .xvg file, with legends for its columns.
//!
//! Columns are named by `@ sN legend "..."`. Units stand in the label of the y axis, one in brackets for each kind of
//! quantity, as in "(kJ/mol), (K), (bar), (nm)"; without it GROMACS' own hold: ps, kJ/mol, K, bar, nm (GROMACS manual,
//! "Definitions and units").

use std::path::Path;

use super::FrameError;
use super::thermo::ThermoSeries;
use super::thermo_quantity::{Column, Quantity, Table, bad_line};

/// Legends that `gmx energy` gives, with the unit that holds where the label names none.
const LEGENDS: [(&str, Quantity, &str); 18] = [
    ("Temperature", Quantity::Temperature, "K"),
    ("Potential", Quantity::Potential, "kJ/mol"),
    ("Total Energy", Quantity::Total, "kJ/mol"),
    ("Total-Energy", Quantity::Total, "kJ/mol"),
    ("Box-X", Quantity::Cell(0), "nm"),
    ("Box-XX", Quantity::Cell(0), "nm"),
    ("Box-Y", Quantity::Cell(1), "nm"),
    ("Box-YY", Quantity::Cell(1), "nm"),
    ("Box-Z", Quantity::Cell(2), "nm"),
    ("Box-ZZ", Quantity::Cell(2), "nm"),
    ("Pres-XX", Quantity::Pressure(0), "bar"),
    ("Pres-YY", Quantity::Pressure(1), "bar"),
    ("Pres-ZZ", Quantity::Pressure(2), "bar"),
    ("Pres-XY", Quantity::Pressure(3), "bar"),
    ("Pres-YX", Quantity::Pressure(3), "bar"),
    ("Pres-XZ", Quantity::Pressure(4), "bar"),
    ("Pres-YZ", Quantity::Pressure(5), "bar"),
    ("Pres-ZX", Quantity::Pressure(4), "bar"),
];

/// Reads the series.
pub(super) fn parse(path: &Path, text: &str) -> Result<ThermoSeries, FrameError> {
    let mut legends: Vec<(usize, String)> = Vec::new();
    let mut x_label = String::new();
    let mut y_label = String::new();
    let mut table: Option<Table<'_>> = None;
    for (number, line) in text.lines().enumerate() {
        let line = line.trim();
        if line.is_empty() || line.starts_with('#') || line.starts_with('&') {
            continue;
        }
        let Some(directive) = line.strip_prefix('@') else {
            let columns = line.split_whitespace().count();
            let table = table.get_or_insert_with(|| {
                Table::new(path, named_columns(columns, &legends, &x_label, &y_label))
            });
            table.push(number + 1, line.split_whitespace())?;
            continue;
        };
        let words: Vec<&str> = directive.split_whitespace().collect();
        let quoted = directive.split('"').nth(1);
        match (words.as_slice(), quoted) {
            (["xaxis", "label", ..], Some(label)) => label.clone_into(&mut x_label),
            (["yaxis", "label", ..], Some(label)) => label.clone_into(&mut y_label),
            ([set, "legend", ..], Some(legend)) if set.starts_with('s') => {
                // "@ legend box on" and its like have no set.
                if let Ok(set) = set[1..].parse() {
                    legends.push((set, legend.to_owned()));
                }
            }
            ([_, "legend"], None) => {
                return Err(bad_line(
                    path,
                    number + 1,
                    "a legend without its name in quotes".to_owned(),
                ));
            }
            _ => {}
        }
    }
    Ok(table.map(Table::finish).unwrap_or_default())
}

fn named_columns(
    count: usize,
    legends: &[(usize, String)],
    x_label: &str,
    y_label: &str,
) -> Vec<(String, Column)> {
    let time_unit = bracketed(x_label)
        .into_iter()
        .find_map(|unit| Quantity::Time.unit(unit))
        .unwrap_or(1.0);
    let mut columns = vec![("time".to_owned(), Some((Quantity::Time, time_unit)))];
    for set in 0..count.saturating_sub(1) {
        let legend = legends
            .iter()
            .find(|(number, _)| *number == set)
            .map(|(_, legend)| legend.as_str());
        let known = LEGENDS.iter().find(|(name, _, _)| Some(*name) == legend);
        let column = known.and_then(|&(_, quantity, usual)| {
            let stated = bracketed(y_label)
                .into_iter()
                .find_map(|unit| quantity.unit(unit));
            Some((quantity, stated.or_else(|| quantity.unit(usual))?))
        });
        columns.push((
            legend.map_or_else(|| format!("column {}", set + 2), str::to_owned),
            column,
        ));
    }
    columns
}

/// The words in brackets of an axis label.
fn bracketed(label: &str) -> Vec<&str> {
    label
        .split('(')
        .skip(1)
        .filter_map(|part| part.split(')').next())
        .map(str::trim)
        .collect()
}
