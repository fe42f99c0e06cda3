//! Thermo series as CSV with units in the column names: `time_ps,temperature_K,total_eV,pxx_bar,lx_A`.

use std::path::Path;

use super::FrameError;
use super::thermo::ThermoSeries;
use super::thermo_quantity::{Column, Quantity, Table, bad_line, unit_names};

/// Names of the quantities, without their unit.
const NAMES: [(&str, Quantity); 22] = [
    ("time", Quantity::Time),
    ("temperature", Quantity::Temperature),
    ("temp", Quantity::Temperature),
    ("potential", Quantity::Potential),
    ("potential_energy", Quantity::Potential),
    ("pe", Quantity::Potential),
    ("total", Quantity::Total),
    ("total_energy", Quantity::Total),
    ("etotal", Quantity::Total),
    ("lx", Quantity::Cell(0)),
    ("ly", Quantity::Cell(1)),
    ("lz", Quantity::Cell(2)),
    ("pxx", Quantity::Pressure(0)),
    ("pyy", Quantity::Pressure(1)),
    ("pzz", Quantity::Pressure(2)),
    ("pxy", Quantity::Pressure(3)),
    ("pyx", Quantity::Pressure(3)),
    ("pxz", Quantity::Pressure(4)),
    ("pzx", Quantity::Pressure(4)),
    ("pyz", Quantity::Pressure(5)),
    ("pzy", Quantity::Pressure(5)),
    ("energy_total", Quantity::Total),
];

/// Reads the series. Lines that start with `#` are comments.
pub(super) fn parse(path: &Path, text: &str) -> Result<ThermoSeries, FrameError> {
    let mut rows = csv::ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .comment(Some(b'#'))
        .trim(csv::Trim::All)
        .from_reader(text.as_bytes());
    let mut table: Option<Table<'_>> = None;
    let mut row = csv::StringRecord::new();
    loop {
        let more = rows.read_record(&mut row).map_err(|error| {
            let line = error.position().map_or(0, csv::Position::line);
            bad_line(path, line as usize, error.to_string())
        })?;
        if !more {
            break;
        }
        let line = row.position().map_or(0, |place| line_of(text, place));
        match &mut table {
            None => table = Some(header(path, line, &row)?),
            Some(table) => table.push(line, row.iter())?,
        }
    }
    Ok(table.map(Table::finish).unwrap_or_default())
}

/// The line of a row, from 1. The parser gives the place where the row before it ended, before blank lines and comments.
fn line_of(text: &str, place: &csv::Position) -> usize {
    let rest = text.get(place.byte() as usize..).unwrap_or("");
    let skipped = rest
        .lines()
        .take_while(|line| line.trim().is_empty() || line.starts_with('#'))
        .count();
    place.line() as usize + skipped
}

fn header<'a>(path: &'a Path, line: usize, names: &csv::StringRecord) -> Result<Table<'a>, FrameError> {
    let mut columns = Vec::with_capacity(names.len());
    for name in names {
        columns.push((
            name.to_owned(),
            column(name).map_err(|reason| bad_line(path, line, reason))?,
        ));
    }
    Ok(Table::new(path, columns))
}

/// What a column of this name holds. The longest known name before a `_` is the quantity, the rest the unit.
fn column(name: &str) -> Result<Column, String> {
    let lower = name.to_lowercase();
    if lower == "step" {
        return Ok(Some((Quantity::Step, 1.0)));
    }
    let known = NAMES
        .iter()
        .filter(|(known, _)| {
            lower
                .strip_prefix(known)
                .is_some_and(|rest| rest.is_empty() || rest.starts_with('_'))
        })
        .max_by_key(|(known, _)| known.len());
    let Some(&(known, quantity)) = known else {
        return Ok(None);
    };
    let unit = name[known.len()..].trim_start_matches('_');
    let factor = quantity.unit(unit).ok_or_else(|| {
        let found = if unit.is_empty() {
            "has no unit".to_owned()
        } else {
            format!("has the unit \"{unit}\"")
        };
        let taken = unit_names(quantity.units());
        let example = quantity.units().first().map_or("", |(name, _)| name);
        format!("column \"{name}\" {found}; the name must end in one of {taken}, as in \"{known}_{example}\"")
    })?;
    Ok(Some((quantity, factor)))
}
