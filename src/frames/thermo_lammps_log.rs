//! Thermo series from the log of the LAMMPS engine: the tables that begin with `Step`.
//!
//! Column names are those of `thermo_style` in the LAMMPS manual. One log may hold several runs, each with its table;
//! tables that repeat steps of those before them (a restart, or an energy minimisation counted from zero) replace them.

use std::path::Path;

use super::thermo::ThermoSeries;
use super::thermo_quantity::{Column, Quantity, Table, bad_line};
use super::{EngineUnits, FrameError};

/// Names of the columns.
const NAMES: [(&str, Quantity); 20] = [
    ("Step", Quantity::Step),
    ("Time", Quantity::Time),
    ("Temp", Quantity::Temperature),
    ("PotEng", Quantity::Potential),
    ("pe", Quantity::Potential),
    ("TotEng", Quantity::Total),
    ("etotal", Quantity::Total),
    ("Lx", Quantity::Cell(0)),
    ("Ly", Quantity::Cell(1)),
    ("Lz", Quantity::Cell(2)),
    ("Cella", Quantity::Cell(0)),
    ("Cellb", Quantity::Cell(1)),
    ("Cellc", Quantity::Cell(2)),
    ("Pxx", Quantity::Pressure(0)),
    ("Pyy", Quantity::Pressure(1)),
    ("Pzz", Quantity::Pressure(2)),
    ("Pxy", Quantity::Pressure(3)),
    ("Pxz", Quantity::Pressure(4)),
    ("Pyz", Quantity::Pressure(5)),
    ("Temperature", Quantity::Temperature),
];

/// Whether a line is the header of a table.
pub(super) fn is_header(line: &str) -> bool {
    let mut words = line.split_whitespace();
    words.next() == Some("Step") && words.next().is_some_and(|word| word.parse::<f64>().is_err())
}

/// Reads the series of the last set of columns that the log uses.
///
/// Energies are taken as the engine's total: `thermo_modify norm yes`, which divides them by the number of atoms, cannot be
/// told from the log.
pub(super) fn parse(
    path: &Path,
    text: &str,
    engine_units: Option<EngineUnits>,
) -> Result<ThermoSeries, FrameError> {
    let units = engine_units.ok_or_else(|| FrameError::Units {
        path: path.to_owned(),
        reason: format!(
            "a log does not say what its numbers are in; set `engine_units` of the run to one of {}",
            EngineUnits::NAMES
        ),
    })?;
    let mut names: Vec<&str> = Vec::new();
    let mut table: Option<Table<'_>> = None;
    let mut inside = false;
    let lines: Vec<&str> = text.lines().collect();
    for (number, line) in lines.iter().enumerate() {
        let line = line.trim();
        if is_header(line) {
            let found: Vec<&str> = line.split_whitespace().collect();
            if found != names {
                // Another thermo_style: what came before was preparation.
                table = Some(Table::new(
                    path,
                    found.iter().map(|name| column(name, units)).collect(),
                ));
                names = found;
            }
            inside = true;
        } else if line.starts_with("Loop time") || line.starts_with("ERROR") {
            inside = false;
        } else if let Some(table) = table.as_mut().filter(|_| inside) {
            let words: Vec<&str> = line.split_whitespace().collect();
            let starts_with_step = words.first().is_some_and(|word| word.parse::<u64>().is_ok());
            if !starts_with_step {
                // Warnings and fix output stand between the rows; what begins with a digit was meant as a row.
                if line.starts_with(|first: char| first.is_ascii_digit()) {
                    let word = words.first().unwrap_or(&"");
                    return Err(bad_line(
                        path,
                        number + 1,
                        format!("the step \"{word}\" is not a whole number"),
                    ));
                }
                continue;
            }
            let last_line = number + 1 == lines.len() && !text.ends_with('\n');
            if last_line && words.len() < names.len() {
                // The engine is still writing, or was killed while it wrote.
                break;
            }
            drop_repeated(table, words[0]);
            table.push(number + 1, words.into_iter())?;
        }
    }
    Ok(table.map(Table::finish).unwrap_or_default())
}

/// Drops the rows that are not before the step of the next one.
fn drop_repeated(table: &mut Table<'_>, step: &str) {
    let (Some(steps), Ok(step)) = (table.values(Quantity::Step), step.parse::<f64>()) else {
        return;
    };
    let kept = steps.partition_point(|&earlier| earlier < step);
    table.truncate(kept);
}

fn column(name: &str, units: EngineUnits) -> (String, Column) {
    let known = NAMES.iter().find(|(known, _)| known.eq_ignore_ascii_case(name));
    (
        name.to_owned(),
        known.map(|&(_, quantity)| (quantity, quantity.engine_unit(units))),
    )
}
