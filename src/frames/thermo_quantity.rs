//! The quantities of thermo series, the units they come in, and rows of numbers on the way to series.

use std::path::Path;

use super::engine_units::{
    ATM_EV_PER_A3, BAR_EV_PER_A3, BOHR_A, HARTREE_EV, JOULE_EV, KCAL_PER_MOL_EV, KJ_PER_MOL_EV,
    PASCAL_EV_PER_A3,
};
use super::thermo::ThermoSeries;
use super::{EngineUnits, FrameError};

/// A quantity of a thermo series.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Quantity {
    Step,
    Time,
    Temperature,
    Potential,
    Total,
    /// Length of the cell along x, y or z.
    Cell(usize),
    /// Pressure component xx, yy, zz, xy, xz or yz.
    Pressure(usize),
}

/// A unit by the name it has in files, as a multiple of the program's.
pub(super) type NamedUnit = (&'static str, f64);

const TIME_UNITS: &[NamedUnit] = &[("ps", 1.0), ("fs", 1e-3), ("ns", 1e3), ("us", 1e6), ("s", 1e12)];

const TEMPERATURE_UNITS: &[NamedUnit] = &[("K", 1.0)];

const ENERGY_UNITS: &[NamedUnit] = &[
    ("eV", 1.0),
    ("meV", 1e-3),
    ("kJ/mol", KJ_PER_MOL_EV),
    ("kJ_per_mol", KJ_PER_MOL_EV),
    ("kcal/mol", KCAL_PER_MOL_EV),
    ("kcal_per_mol", KCAL_PER_MOL_EV),
    ("hartree", HARTREE_EV),
    ("Ha", HARTREE_EV),
    ("Ry", 0.5 * HARTREE_EV),
    ("J", JOULE_EV),
];

const LENGTH_UNITS: &[NamedUnit] = &[
    ("A", 1.0),
    ("angstrom", 1.0),
    ("Angstrom", 1.0),
    ("nm", 10.0),
    ("bohr", BOHR_A),
    ("m", 1e10),
];

const PRESSURE_UNITS: &[NamedUnit] = &[
    ("bar", BAR_EV_PER_A3),
    ("kbar", 1e3 * BAR_EV_PER_A3),
    ("atm", ATM_EV_PER_A3),
    ("Pa", PASCAL_EV_PER_A3),
    ("MPa", 1e6 * PASCAL_EV_PER_A3),
    ("GPa", 1e9 * PASCAL_EV_PER_A3),
    ("eV/A^3", 1.0),
    ("eV_per_A3", 1.0),
];

impl Quantity {
    /// All of them.
    pub const ALL: [Self; 14] = [
        Self::Step,
        Self::Time,
        Self::Temperature,
        Self::Potential,
        Self::Total,
        Self::Cell(0),
        Self::Cell(1),
        Self::Cell(2),
        Self::Pressure(0),
        Self::Pressure(1),
        Self::Pressure(2),
        Self::Pressure(3),
        Self::Pressure(4),
        Self::Pressure(5),
    ];

    /// The units it may be written in.
    pub fn units(self) -> &'static [NamedUnit] {
        match self {
            Self::Step => &[],
            Self::Time => TIME_UNITS,
            Self::Temperature => TEMPERATURE_UNITS,
            Self::Potential | Self::Total => ENERGY_UNITS,
            Self::Cell(_) => LENGTH_UNITS,
            Self::Pressure(_) => PRESSURE_UNITS,
        }
    }

    /// One of the units of `engine` in the program's.
    pub fn engine_unit(self, engine: EngineUnits) -> f64 {
        match self {
            Self::Step | Self::Temperature => 1.0,
            Self::Time => engine.time_ps(),
            Self::Potential | Self::Total => engine.energy_ev(),
            Self::Cell(_) => engine.length_a(),
            Self::Pressure(_) => engine.pressure_ev_per_a3(),
        }
    }

    /// The unit of a name, as a multiple of the program's.
    pub fn unit(self, name: &str) -> Option<f64> {
        self.units()
            .iter()
            .find(|(known, _)| *known == name)
            .map(|(_, factor)| *factor)
    }
}

/// The names of units, for messages.
pub(super) fn unit_names(units: &[NamedUnit]) -> String {
    units.iter().map(|(name, _)| *name).collect::<Vec<_>>().join(", ")
}

/// A column of a table: what it holds, and its unit as a multiple of the program's. `None` for one that is not used.
pub(super) type Column = Option<(Quantity, f64)>;

/// The columns of a table and their numbers so far.
pub(super) struct Table<'a> {
    path: &'a Path,
    columns: Vec<Column>,
    values: Vec<Vec<f64>>,
    ignored: Vec<String>,
}

impl<'a> Table<'a> {
    /// A table with these columns, each with its name in the file. Of two columns with the same quantity the first is
    /// used.
    pub fn new(path: &'a Path, columns: Vec<(String, Column)>) -> Self {
        let mut table = Table {
            path,
            columns: Vec::new(),
            values: Vec::new(),
            ignored: Vec::new(),
        };
        for (name, column) in columns {
            let taken = |quantity| {
                table
                    .columns
                    .iter()
                    .flatten()
                    .any(|&(other, _)| other == quantity)
            };
            let column = column.filter(|&(quantity, _)| !taken(quantity));
            if column.is_none() {
                table.ignored.push(name);
            }
            table.columns.push(column);
            table.values.push(Vec::new());
        }
        table
    }

    /// Adds a row; `line` is its number in the file, from 1.
    ///
    /// # Errors
    /// Where the row has another number of columns, or a used one is not a finite number.
    pub fn push<'w>(&mut self, line: usize, words: impl Iterator<Item = &'w str>) -> Result<(), FrameError> {
        let words: Vec<&str> = words.collect();
        if words.len() != self.columns.len() {
            return Err(bad_line(
                self.path,
                line,
                format!(
                    "{} values, but {} columns were named; if the file was cut off there, remove the line",
                    words.len(),
                    self.columns.len()
                ),
            ));
        }
        for (number, word) in words.into_iter().enumerate() {
            if let Some((_, unit)) = self.columns[number] {
                let value: f64 = word.trim().parse().map_err(|_| {
                    bad_line(
                        self.path,
                        line,
                        format!("column {}: \"{word}\" is not a number", number + 1),
                    )
                })?;
                if !value.is_finite() {
                    let reason = format!(
                        "column {}: {value}, a finite number was expected: end the series before it",
                        number + 1
                    );
                    return Err(bad_line(self.path, line, reason));
                }
                self.values[number].push(value * unit);
            }
        }
        Ok(())
    }

    /// Drops the rows from `row` on, where a later part of the run repeats them.
    pub fn truncate(&mut self, row: usize) {
        for values in &mut self.values {
            values.truncate(row);
        }
    }

    /// The numbers of a quantity so far.
    pub fn values(&self, quantity: Quantity) -> Option<&[f64]> {
        let place = self
            .columns
            .iter()
            .position(|column| column.is_some_and(|(other, _)| other == quantity))?;
        Some(&self.values[place])
    }

    /// The finished series.
    pub fn finish(self) -> ThermoSeries {
        let mut series = ThermoSeries {
            ignored: self.ignored,
            ..ThermoSeries::default()
        };
        for (column, values) in self.columns.into_iter().zip(self.values) {
            if let Some((quantity, _)) = column {
                series.set(quantity, values);
            }
        }
        series
    }
}

/// The error of a line.
pub(super) fn bad_line(path: &Path, line: usize, reason: String) -> FrameError {
    FrameError::BadThermoLine {
        path: path.to_owned(),
        line,
        reason,
    }
}
