//! Thermo series: what an engine wrote beside the trajectory, in the program's units.

use std::path::Path;

use super::error::unreadable;
use super::text_file::TextFile;
use super::thermo_quantity::Quantity;
use super::{CellAxis, EngineUnits, FrameError};
use super::{thermo_cp2k, thermo_csv, thermo_lammps_log, thermo_xvg};

/// The thermo series of a run, one value a written step. A quantity the file does not hold is `None`; those present all
/// have the same length.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ThermoSeries {
    /// Time in ps.
    pub time_ps: Option<Vec<f64>>,
    /// The simulation's step.
    pub step: Option<Vec<f64>>,
    /// Temperature in K.
    pub temperature_k: Option<Vec<f64>>,
    /// Potential energy in eV.
    pub potential_ev: Option<Vec<f64>>,
    /// Potential and kinetic energy in eV.
    pub total_ev: Option<Vec<f64>>,
    /// Lengths of the cell along x, y and z, in A.
    pub cell_a: [Option<Vec<f64>>; 3],
    /// Pressure components xx, yy, zz, xy, xz, yz in eV/A^3, positive when it compresses.
    pub pressure_ev_per_a3: [Option<Vec<f64>>; 6],
    /// Columns of the file that were not used, as it names them.
    pub ignored: Vec<String>,
}

impl ThermoSeries {
    /// Reads a thermo file, plain or compressed. Its kind is told by its content: CSV with units in the column names, a
    /// LAMMPS log, a GROMACS .xvg, or a CP2K .ener file.
    ///
    /// # Errors
    /// Where the file cannot be read or is none of these, a number in it is malformed (with its line), a column has an unknown
    /// unit, or a log comes without `engine_units`.
    pub fn read(path: &Path, engine_units: Option<EngineUnits>) -> Result<Self, FrameError> {
        let metadata = std::fs::metadata(path).map_err(|error| unreadable(path, &error))?;
        if metadata.is_dir() {
            return Err(FrameError::Directory {
                path: path.to_owned(),
                expected: "thermo",
            });
        }
        let text = read_text(path).map_err(|error| unreadable(path, &error))?;
        let unknown = |reason: &str| FrameError::UnknownThermo {
            path: path.to_owned(),
            reason: reason.to_owned(),
        };
        if text.trim().is_empty() {
            return Err(unknown("the file is empty"));
        }
        let series = match kind(&text) {
            Some(Kind::Xvg) => thermo_xvg::parse(path, &text)?,
            Some(Kind::LammpsLog) => thermo_lammps_log::parse(path, &text, engine_units)?,
            Some(Kind::Cp2kEner) => thermo_cp2k::parse(path, &text)?,
            Some(Kind::Csv) => thermo_csv::parse(path, &text)?,
            None => return Err(unknown("no table with named columns was found")),
        };
        if series.is_empty() {
            return Err(unknown("it has a table, but no row of it holds a known quantity"));
        }
        Ok(series)
    }

    /// The number of rows.
    #[must_use]
    pub fn len(&self) -> usize {
        Quantity::ALL
            .iter()
            .find_map(|&quantity| Some(self.get(quantity)?.len()))
            .unwrap_or(0)
    }

    /// Whether there is no row.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.len() == 0
    }

    /// The tension in the plane at each row, in eV/A^2, positive when it stretches: -(p_1 + p_2)/2 times the height of
    /// the cell along the normal, with p_1 and p_2 the pressures along the two other axes.
    ///
    /// The series' own cell length along the normal is used where it holds one, otherwise `cell_height` in A. `None` where
    /// one of the two pressures is missing. The pressures are those of the axes x, y, z, so the normal cell vector must
    /// lie along its own one.
    #[must_use]
    pub fn tension(&self, normal: CellAxis, cell_height: f64) -> Option<Vec<f64>> {
        let (first, second, out) = match normal {
            CellAxis::A => (1, 2, 0),
            CellAxis::B => (0, 2, 1),
            CellAxis::C => (0, 1, 2),
        };
        let first = self.pressure_ev_per_a3[first].as_ref()?;
        let second = self.pressure_ev_per_a3[second].as_ref()?;
        let heights = self.cell_a[out].as_ref();
        let tension = first.iter().zip(second).enumerate().map(|(row, (p1, p2))| {
            let height = heights.map_or(cell_height, |heights| heights[row]);
            -0.5 * (p1 + p2) * height
        });
        Some(tension.collect())
    }

    /// The series of a quantity.
    pub(super) fn get(&self, quantity: Quantity) -> Option<&Vec<f64>> {
        match quantity {
            Quantity::Step => self.step.as_ref(),
            Quantity::Time => self.time_ps.as_ref(),
            Quantity::Temperature => self.temperature_k.as_ref(),
            Quantity::Potential => self.potential_ev.as_ref(),
            Quantity::Total => self.total_ev.as_ref(),
            Quantity::Cell(axis) => self.cell_a[axis].as_ref(),
            Quantity::Pressure(component) => self.pressure_ev_per_a3[component].as_ref(),
        }
    }

    /// Puts a series in its place.
    pub(super) fn set(&mut self, quantity: Quantity, values: Vec<f64>) {
        let place = match quantity {
            Quantity::Step => &mut self.step,
            Quantity::Time => &mut self.time_ps,
            Quantity::Temperature => &mut self.temperature_k,
            Quantity::Potential => &mut self.potential_ev,
            Quantity::Total => &mut self.total_ev,
            Quantity::Cell(axis) => &mut self.cell_a[axis],
            Quantity::Pressure(component) => &mut self.pressure_ev_per_a3[component],
        };
        *place = Some(values);
    }
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Kind {
    Csv,
    LammpsLog,
    Xvg,
    Cp2kEner,
}

/// Tells the kind of a thermo file by its content.
fn kind(text: &str) -> Option<Kind> {
    let mut lines = text.lines().filter(|line| !line.trim().is_empty());
    let first = lines.next()?;
    if text
        .lines()
        .take(200)
        .any(|line| line.starts_with("@ ") || line.starts_with("@TYPE"))
    {
        return Some(Kind::Xvg);
    }
    if thermo_cp2k::is_header(first) {
        return Some(Kind::Cp2kEner);
    }
    if first.starts_with("LAMMPS") || text.lines().any(thermo_lammps_log::is_header) {
        return Some(Kind::LammpsLog);
    }
    let named = |line: &str| line.contains(',') && line.chars().any(char::is_alphabetic);
    text.lines()
        .find(|line| !line.starts_with('#') && !line.trim().is_empty())
        .filter(|line| named(line))?;
    Some(Kind::Csv)
}

fn read_text(path: &Path) -> std::io::Result<String> {
    let mut file = TextFile::open(path)?;
    let mut text = String::new();
    let mut line = Vec::new();
    loop {
        file.read_line(&mut line)?;
        if line.is_empty() {
            return Ok(text);
        }
        text.push_str(&String::from_utf8_lossy(&line));
    }
}
