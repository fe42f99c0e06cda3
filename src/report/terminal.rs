//! The summary table that a user sees at the end of a run.

use comfy_table::{Attribute, Cell, CellAlignment, Color, ContentArrangement, Table, presets};

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

/// The summary of one sheet: a row per run, then what belongs to several runs, then the notes of all that is not good.
#[must_use]
pub fn summary(sheet: &Sheet, style: SummaryStyle) -> String {
    let mut text = format!("Sheet {}\n", sheet.name);
    text.push_str(&run_table(sheet, style).trim_fmt());
    text.push('\n');
    let joint: Vec<&Parameter> = sheet.parameter.iter().filter(|one| is_joint(one)).collect();
    if !joint.is_empty() {
        let mut table = plain_table(style);
        for parameter in joint {
            table.add_row([
                Cell::new(&parameter.name),
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
    let mut table = plain_table(style);
    let mut header = vec!["run".to_owned(), "T, K".to_owned(), "L, A".to_owned()];
    header.extend(RUN_COLUMNS.iter().map(|(_, heading)| (*heading).to_owned()));
    table.set_header(header.into_iter().map(|heading| {
        let cell = Cell::new(heading);
        if style.colour {
            cell.add_attribute(Attribute::Bold)
        } else {
            cell
        }
    }));
    for condition in conditions(sheet) {
        let mut row = vec![
            Cell::new(condition.run),
            Cell::new(condition.temperature.map_or_else(dash, |t| format!("{t}")))
                .set_alignment(CellAlignment::Right),
        ];
        let kappa = condition.find(sheet, "bending_rigidity");
        let length = kappa.and_then(|one| one.length_A);
        row.push(
            Cell::new(length.map_or_else(dash, |l| format!("{l:.1}"))).set_alignment(CellAlignment::Right),
        );
        row.extend(
            RUN_COLUMNS
                .iter()
                .map(|(name, _)| verdict_cell(condition.find(sheet, name), style)),
        );
        table.add_row(row);
    }
    table
}

/// One run as the parameters know it.
struct RunCondition<'a> {
    run: &'a str,
    temperature: Option<f64>,
}

impl RunCondition<'_> {
    /// The parameter of this run; for one that belongs to several runs, the one at this run's temperature.
    fn find<'s>(&self, sheet: &'s Sheet, name: &str) -> Option<&'s Parameter> {
        sheet.find(name, Some(self.run)).or_else(|| {
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
            && found.iter().all(|known| known.run != run)
        {
            found.push(RunCondition {
                run,
                temperature: parameter.temperature_K,
            });
        }
    }
    found
}

/// Whether a parameter belongs to several runs and has no column of its own.
fn is_joint(parameter: &Parameter) -> bool {
    parameter.run.is_none() && RUN_COLUMNS.iter().all(|(name, _)| *name != parameter.name)
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

fn plain_table(style: SummaryStyle) -> Table {
    let mut table = Table::new();
    table
        .load_style(presets::UTF8_HORIZONTAL_ONLY)
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
