//! area.csv: one row per sheet, run and block.

use crate::estimates::SheetEstimates;
use crate::parameters::written;

use super::table::csv_text;

/// Columns of area.csv.
const HEADER: [&str; 7] = [
    "sheet",
    "run",
    "temperature_K",
    "block",
    "time_ps",
    "area_A2",
    "area_error_A2",
];

/// The text of area.csv: all blocks of every run, those of the equilibration cut too.
#[must_use]
pub fn area_csv(sheets: &[&SheetEstimates]) -> String {
    let rows = sheets.iter().flat_map(|sheet| {
        sheet.runs.iter().flat_map(|run| {
            run.area_blocks.iter().map(|block| {
                vec![
                    sheet.name.clone(),
                    run.name.clone(),
                    written(Some(run.temperature)),
                    block.block.to_string(),
                    written(block.time_ps),
                    written(Some(block.area)),
                    written(block.error),
                ]
            })
        })
    });
    csv_text(&HEADER, rows)
}
