//! The plan of a job as a table: one row a run.

use comfy_table::{Cell, CellAlignment};

use super::SummaryStyle;
use super::terminal::plain_table;

/// Headings of the table; the first and the eighth column are words, the others numbers.
const HEADINGS: [&str; 10] = [
    "run",
    "frames",
    "atoms",
    "planes",
    "primitive cells",
    "modes",
    "smallest q, 1/A",
    "modes by",
    "records, MB",
    "one thread, s",
];

/// The text of the table. Each row holds a cell for every heading: run, frames, atoms, planes, primitive cells, modes,
/// smallest |q|, transform, megabytes of records, seconds on one thread.
#[must_use]
pub fn survey_table(rows: &[Vec<String>], style: SummaryStyle) -> String {
    let mut table = plain_table(style);
    table.set_header(HEADINGS);
    for row in rows {
        table.add_row(row.iter().enumerate().map(|(column, text)| {
            let words = column == 0 || column == 7;
            Cell::new(text).set_alignment(if words {
                CellAlignment::Left
            } else {
                CellAlignment::Right
            })
        }));
    }
    let mut text = table.trim_fmt();
    text.push('\n');
    text
}
