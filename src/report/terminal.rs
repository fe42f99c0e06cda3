//! The summary table that a user sees at the end of a run.

use comfy_table::{
    Attribute, Cell, CellAlignment, Color, ContentArrangement, LineStyle, Table, TableStyle, presets,
};

use crate::fits::Verdict;
use crate::parameters::{Parameter, Sheet};

use super::concise;
use super::runs_table::verdict_word;

/// How the summary is to look.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct SummaryStyle {
    /// Columns of the terminal, where there is one.
    pub width: Option<u16>,
    /// Whether verdicts may be coloured with ANSI codes.
    pub colour: bool,
}

/// The parameters shown run by run: name, heading.
const RUN_COLUMNS: [(&str, &str); 5] = [
    ("bending_rigidity", "kappa(L), eV"),
    ("area_per_atom", "area per atom, A^2"),
    ("youngs_modulus", "Young's, N/m"),
    ("poisson_ratio", "Poisson"),
    ("thermal_expansion", "alpha, 1/K"),
];

/// Lines above, below and under the heading; none between rows.
const LINES: TableStyle = presets::UTF8_HORIZONTAL_ONLY.row_separator(LineStyle::none());

/// The summary of one sheet: a row per run, then what belongs to several runs, then the notes of all that is not good.
#[must_use]
pub fn summary(sheet: &Sheet, style: SummaryStyle) -> String {
    let mut text = format!("Sheet {}\n", sheet.name);
    text.push_str(&run_table(sheet, style).trim_fmt());
    text.push('\n');
    let joint = shared_by_runs(sheet);
    if !joint.is_empty() {
        let mut table = plain_table(style);
        for parameter in joint {
            table.add_row([
                Cell::new(match parameter.temperature_K {
                    Some(temperature) => format!("{} at {temperature} K", parameter.name),
                    None => parameter.name.clone(),
                }),
                verdict_cell(Some(parameter), style),
                Cell::new(unit_text(&parameter.unit)),
            ]);
        }
        text.push_str(&table.trim_fmt());
        text.push('\n');
    }
    for line in notes(sheet) {
        text.push_str(&line);
        text.push('\n');
    }
    text
}

fn run_table(sheet: &Sheet, style: SummaryStyle) -> Table {
    let runs = conditions(sheet);
    // A parameter that no run has gets no column.
    let columns: Vec<(&str, &str)> = RUN_COLUMNS
        .into_iter()
        .filter(|(name, _)| runs.iter().any(|run| run.find(sheet, name).is_some()))
        .collect();
    let mut table = plain_table(style);
    let headings = ["run", "T, K", "L, A"]
        .into_iter()
        .chain(columns.iter().map(|(_, heading)| *heading));
    table.set_header(headings.map(|heading| {
        let cell = Cell::new(heading);
        if style.colour {
            cell.add_attribute(Attribute::Bold)
        } else {
            cell
        }
    }));
    for run in &runs {
        let length = run
            .find(sheet, "bending_rigidity")
            .and_then(|kappa| kappa.length_A);
        let mut row = vec![
            Cell::new(run.name),
            right(run.temperature.map(|temperature| format!("{temperature}"))),
            right(length.map(|length| format!("{length:.1}"))),
        ];
        row.extend(
            columns
                .iter()
                .map(|(name, _)| verdict_cell(run.find(sheet, name), style)),
        );
        table.add_row(row);
    }
    table
}

fn right(text: Option<String>) -> Cell {
    Cell::new(text.unwrap_or_else(dash)).set_alignment(CellAlignment::Right)
}

/// One run as the parameters know it.
struct RunCondition<'a> {
    name: &'a str,
    temperature: Option<f64>,
}

impl RunCondition<'_> {
    /// The parameter of this run; for one that belongs to several runs, the one at this run's temperature.
    fn find<'s>(&self, sheet: &'s Sheet, name: &str) -> Option<&'s Parameter> {
        sheet.find(name, Some(self.name)).or_else(|| {
            sheet.parameter.iter().find(|one| {
                one.name == name
                    && one.run.is_none()
                    && one.temperature_K.is_some()
                    && one.temperature_K == self.temperature
            })
        })
    }
}

/// The runs in the order in which parameters first name them.
fn conditions(sheet: &Sheet) -> Vec<RunCondition<'_>> {
    let mut found: Vec<RunCondition<'_>> = Vec::new();
    for parameter in &sheet.parameter {
        if let Some(run) = parameter.run.as_deref()
            && found.iter().all(|known| known.name != run)
        {
            found.push(RunCondition {
                name: run,
                temperature: parameter.temperature_K,
            });
        }
    }
    found
}

/// The parameters that belong to several runs and stand in no run's row.
fn shared_by_runs(sheet: &Sheet) -> Vec<&Parameter> {
    let runs = conditions(sheet);
    let stands_in_a_row = |one: &Parameter| {
        RUN_COLUMNS.iter().any(|(name, _)| {
            *name == one.name
                && runs.iter().any(|run| {
                    run.find(sheet, name)
                        .is_some_and(|shown| std::ptr::eq(shown, one))
                })
        })
    };
    sheet
        .parameter
        .iter()
        .filter(|one| one.run.is_none() && !stands_in_a_row(one))
        .collect()
}

/// A line for each different note of a parameter that is not good, with the parameters it belongs to.
fn notes(sheet: &Sheet) -> Vec<String> {
    let mut by_note: Vec<(&str, Vec<String>)> = Vec::new();
    for parameter in &sheet.parameter {
        if parameter.verdict == Verdict::Good || parameter.note.is_empty() {
            continue;
        }
        let whose = match &parameter.run {
            Some(run) => format!("{} of {run}", parameter.name),
            None => parameter.name.clone(),
        };
        match by_note.iter_mut().find(|(note, _)| *note == parameter.note) {
            Some((_, owners)) => owners.push(whose),
            None => by_note.push((&parameter.note, vec![whose])),
        }
    }
    by_note
        .into_iter()
        .map(|(note, owners)| {
            let shown = owners.iter().take(3).cloned().collect::<Vec<_>>().join(", ");
            let more = owners.len().saturating_sub(3);
            let and_more = if more == 0 {
                String::new()
            } else {
                format!(" and {more} more")
            };
            format!("  {shown}{and_more}: {note}")
        })
        .collect()
}

pub(super) fn plain_table(style: SummaryStyle) -> Table {
    let mut table = Table::new();
    table
        .load_style(LINES)
        .set_content_arrangement(ContentArrangement::Dynamic);
    if style.colour {
        table.enforce_styling();
    } else {
        table.force_no_tty();
    }
    // Without a terminal nothing needs wrapping, and a log is easier to search unwrapped.
    table.set_width(style.width.unwrap_or(u16::MAX));
    table
}

fn verdict_cell(parameter: Option<&Parameter>, style: SummaryStyle) -> Cell {
    let Some(parameter) = parameter else {
        return Cell::new(dash());
    };
    let word = verdict_word(parameter.verdict);
    let text = match (parameter.value, parameter.error) {
        (Some(value), Some(error)) => format!("{} {word}", concise(value, error)),
        _ => word.to_owned(),
    };
    let cell = Cell::new(text);
    match (style.colour, parameter.verdict) {
        (true, Verdict::Good) => cell.fg(Color::Green),
        (true, Verdict::Weak) => cell.fg(Color::Yellow),
        (true, Verdict::Unusable) => cell.fg(Color::Red),
        (false, _) => cell,
    }
}

/// The unit for people: nothing for a pure number.
fn unit_text(unit: &str) -> &str {
    if unit == "1" { "" } else { unit }
}

fn dash() -> String {
    "-".to_owned()
}
