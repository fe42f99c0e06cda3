//! report.html: one self-contained page, without scripts, figures inlined.

use maud::{DOCTYPE, Markup, PreEscaped, html};

use crate::fits::Verdict;
use crate::parameters::{Parameter, Provenance, Sheet, look_up};

use super::runs_table::verdict_word;
use super::{Figure, RunSummary, concise};

/// What the page shows.
#[derive(Clone, Debug)]
pub struct PageContent<'a> {
    /// Name of the pipeline.
    pub title: &'a str,
    /// Where the numbers came from.
    pub provenance: &'a Provenance,
    /// The sheets, in the order of the pipeline.
    pub sheets: Vec<PageSheet<'a>>,
    /// Warnings of the run, in the order they came up.
    pub warnings: &'a [String],
}

/// One sheet of the page.
#[derive(Clone, Debug)]
pub struct PageSheet<'a> {
    /// Its parameters, in written units.
    pub sheet: &'a Sheet,
    /// What became of its runs.
    pub runs: Vec<&'a RunSummary>,
    /// Its figures, each with a caption.
    pub figures: Vec<(&'a Figure, &'a str)>,
}

/// The page's style sheet.
const CSS: &str = include_str!("page.css");

/// The page as HTML text.
#[must_use]
pub fn page(content: &PageContent<'_>) -> String {
    let markup = html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta name="viewport" content="width=device-width, initial-scale=1";
                title { (content.title) " - planish" }
                style { (PreEscaped(CSS)) }
            }
            body {
                header {
                    h1 { (content.title) }
                    p { "Parameters of a continuum plate, from atomistic trajectories. " (content.provenance.program) "." }
                }
                main {
                    (contents(content))
                    (warnings(content.warnings))
                    @for (at, sheet) in content.sheets.iter().enumerate() { (sheet_section(at, sheet)) }
                    (provenance(content.provenance))
                }
            }
        }
    };
    let mut text = markup.into_string();
    text.push('\n');
    text
}

fn contents(content: &PageContent<'_>) -> Markup {
    html! {
        @if content.sheets.len() > 1 {
            nav {
                @for (at, sheet) in content.sheets.iter().enumerate() {
                    a href=(format!("#sheet-{at}")) { (sheet.sheet.name) }
                }
            }
        }
    }
}

fn warnings(warnings: &[String]) -> Markup {
    html! {
        @if !warnings.is_empty() {
            section.warnings {
                h2 { "Warnings" }
                ul { @for warning in warnings { li { (warning) } } }
            }
        }
    }
}

fn sheet_section(at: usize, content: &PageSheet<'_>) -> Markup {
    html! {
        section id=(format!("sheet-{at}")) {
            h2 { "Sheet " (content.sheet.name) }
            @for (figure, caption) in &content.figures {
                figure {
                    (PreEscaped(&figure.svg))
                    figcaption { (caption) }
                }
            }
            h3 { "Parameters" }
            (parameter_table(content.sheet))
            h3 { "Runs" }
            (run_table(&content.runs))
        }
    }
}

fn parameter_table(sheet: &Sheet) -> Markup {
    html! {
        div.wide {
            table {
                thead {
                    tr {
                        th { "parameter" } th { "run" } th.number { "T, K" } th.number { "L, \u{c5}" }
                        th.number { "value" } th { "unit" } th.number { "95 % interval" } th { "verdict" }
                        th { "method and note" }
                    }
                }
                tbody { @for parameter in &sheet.parameter { (parameter_row(parameter)) } }
            }
        }
    }
}

fn parameter_row(parameter: &Parameter) -> Markup {
    let number = |number: Option<f64>, decimals: usize| number.map(|number| format!("{number:.decimals$}"));
    let meaning =
        look_up(&parameter.name).map(|row| format!("{}. Not to be trusted: {}.", row.meaning, row.caution));
    html! {
        tr {
            td title=[meaning] { code { (parameter.name) } }
            td { (parameter.run.as_deref().unwrap_or("")) }
            td.number { @if let Some(temperature) = parameter.temperature_K { (temperature) } }
            td.number { @if let Some(length) = number(parameter.length_A, 1) { (length) } }
            td.number {
                @if let (Some(value), Some(error)) = (parameter.value, parameter.error) { (concise(value, error)) }
            }
            td { @if parameter.unit != "1" { (unit_text(&parameter.unit)) } }
            td.number { @if let Some([low, high]) = parameter.interval95 { (interval(low, high)) } }
            td { (verdict_mark(parameter.verdict)) }
            td.note { (parameter.method) @if !parameter.note.is_empty() { ": " (parameter.note) } }
        }
    }
}

fn run_table(runs: &[&RunSummary]) -> Markup {
    let rounded = |number: Option<f64>| number.map(|number| format!("{number:.1}"));
    html! {
        div.wide {
            table {
                thead {
                    tr {
                        th { "run" } th.number { "T, K" } th.number { "frames" } th.number { "cut" }
                        th.number { "slowest relaxation, ps" } th.number { "effective samples" } th { "verdict" }
                        th { "note" }
                    }
                }
                tbody {
                    @for run in runs {
                        tr {
                            td { (run.run) }
                            td.number { (run.temperature_K) }
                            td.number { (run.frames) }
                            td.number { @if let Some(cut) = run.frames_cut { (cut) } }
                            td.number { @if let Some(time) = rounded(run.slowest_relaxation_ps) { (time) } }
                            td.number { @if let Some(samples) = rounded(run.effective_samples) { (samples) } }
                            td { (verdict_mark(run.verdict)) }
                            td.note { (run.note) }
                        }
                    }
                }
            }
        }
    }
}

fn provenance(provenance: &Provenance) -> Markup {
    html! {
        section {
            h2 { "Provenance" }
            p { (provenance.program) ", pipeline " code { (provenance.pipeline) } ", BLAKE3 " code { (provenance.pipeline_blake3) } }
            details {
                summary { (provenance.input.len()) " input files" }
                div.wide {
                    table {
                        thead { tr { th { "file" } th { "BLAKE3" } } }
                        tbody {
                            @for input in &provenance.input {
                                tr { td { (input.path) } td { code { (input.blake3) } } }
                            }
                        }
                    }
                }
            }
        }
    }
}

/// The verdict as a word with a mark, readable without colours.
fn verdict_mark(verdict: Verdict) -> Markup {
    let mark = match verdict {
        Verdict::Good => "\u{2713}",
        Verdict::Weak => "\u{25d0}",
        Verdict::Unusable => "\u{2717}",
    };
    let word = verdict_word(verdict);
    html! { span class=(word) { (mark) "\u{a0}" (word) } }
}

/// Both ends with the digits that their distance deserves.
fn interval(low: f64, high: f64) -> String {
    let width = high - low;
    let larger = low.abs().max(high.abs());
    if larger == 0.0 || width <= 0.0 {
        return format!("{low} to {high}");
    }
    // Two digits of a quarter of the width, which is about one standard error.
    let decimals = (1.0 - (0.25 * width).log10().floor()).max(0.0) as usize;
    if (1e-3..1e5).contains(&larger) {
        format!("{low:.decimals$} to {high:.decimals$}")
    } else {
        format!("{low:.2e} to {high:.2e}")
    }
}

/// Units with the signs that print has and plain files lack.
fn unit_text(unit: &str) -> String {
    unit.replace("^2", "\u{b2}").replace('A', "\u{c5}")
}
