//! Thermo series from CP2K's .ener file: `# Step Nr. Time[fs] Kin.[a.u.] Temp[K] Pot.[a.u.] Cons Qty[a.u.] UsedTime[s]`.

use std::path::Path;

use super::FrameError;
use super::engine_units::HARTREE_EV;
use super::thermo::ThermoSeries;
use super::thermo_quantity::{Quantity, Table};

/// Whether a line is the header of such a file.
pub(super) fn is_header(line: &str) -> bool {
    line.starts_with('#') && line.contains("Step Nr.") && line.contains("Time[fs]")
}

/// Reads the series. The total energy is absent: the file holds the kinetic energy apart, and the conserved quantity
/// counts in the thermostat and barostat.
pub(super) fn parse(path: &Path, text: &str) -> Result<ThermoSeries, FrameError> {
    let columns = [
        ("Step Nr.", Some((Quantity::Step, 1.0))),
        ("Time[fs]", Some((Quantity::Time, 1e-3))),
        ("Kin.[a.u.]", None),
        ("Temp[K]", Some((Quantity::Temperature, 1.0))),
        ("Pot.[a.u.]", Some((Quantity::Potential, HARTREE_EV))),
        ("Cons Qty[a.u.]", None),
        ("UsedTime[s]", None),
    ];
    let columns = columns.map(|(name, column)| (name.to_owned(), column));
    let mut table = Table::new(path, columns.to_vec());
    for (number, line) in text.lines().enumerate() {
        let line = line.trim();
        if !line.is_empty() && !line.starts_with('#') {
            table.push(number + 1, line.split_whitespace())?;
        }
    }
    Ok(table.finish())
}
