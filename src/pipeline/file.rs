//! The pipeline file as written: every value with its place, nothing defaulted, no path looked up.

use std::ops::Range;

use toml::de::{DeTable, Error};

use super::diagnostics::{Diagnostic, Diagnostics};
use super::gate::{GateLimit, read_gate};
use super::keys;
use super::table_reader::{TableReader, Written};
use crate::fits::PlateModel;
use crate::frames::{CellAxis, EngineUnits};
use crate::sheet::Positions;

/// A pipeline file as written. What is absent, or was reported as wrong, is `None`. Quantities are in the program's units.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PipelineFile {
    /// `[pipeline]` name.
    pub name: Option<Written<String>>,
    /// The sheets, in the order of the file.
    pub sheets: Vec<SheetEntry>,
    /// `[stage.project]` positions.
    pub positions: Option<Written<Positions>>,
    /// `[stage.spectrum]` q_max, in 1/A.
    pub q_max: Option<Written<f64>>,
    /// `[stage.spectrum]` block_frames.
    pub block_frames: Option<Written<usize>>,
    /// `[stage.fit]` plate.
    pub plate: Option<Written<PlateModel>>,
    /// `[stage.fit]` window, in 1/A.
    pub window: Option<Written<[f64; 2]>>,
    /// `[stage.fit]` wanted_error, relative.
    pub wanted_error: Option<Written<f64>>,
    /// `[gate]`.
    pub gate: Vec<GateLimit>,
}

/// `[[sheet]]` as written.
#[derive(Clone, Debug, PartialEq)]
pub struct SheetEntry {
    /// The bytes of the header.
    pub span: Range<usize>,
    /// name.
    pub name: Option<Written<String>>,
    /// select.
    pub select: Option<Written<String>>,
    /// normal.
    pub normal: Option<Written<CellAxis>>,
    /// The runs, in the order of the file.
    pub runs: Vec<RunEntry>,
}

/// `[[sheet.run]]` as written.
#[derive(Clone, Debug, PartialEq)]
pub struct RunEntry {
    /// The bytes of the header.
    pub span: Range<usize>,
    /// name.
    pub name: Option<Written<String>>,
    /// trajectory, a path or glob an entry.
    pub trajectory: Option<Vec<Written<String>>>,
    /// topology.
    pub topology: Option<Written<String>>,
    /// species.
    pub species: Option<Vec<Written<String>>>,
    /// thermo.
    pub thermo: Option<Written<String>>,
    /// temperature, in K.
    pub temperature: Option<Written<f64>>,
    /// frame_interval, in ps.
    pub frame_interval: Option<Written<f64>>,
    /// timestep, in ps.
    pub timestep: Option<Written<f64>>,
    /// engine_units.
    pub engine_units: Option<Written<EngineUnits>>,
    /// tension, in eV/A^2.
    pub tension: Option<Written<f64>>,
    /// from, in ps.
    pub from: Option<Written<f64>>,
    /// to, in ps.
    pub to: Option<Written<f64>>,
    /// stride.
    pub stride: Option<Written<usize>>,
    /// replica_of.
    pub replica_of: Option<Written<String>>,
}

impl PipelineFile {
    /// Reads the text of a pipeline file and adds every problem of syntax, keys, types and units to `problems`.
    #[must_use]
    pub fn parse(source: &str, problems: &mut Diagnostics) -> Self {
        let (document, errors) = DeTable::parse_recoverable(source);
        if !errors.is_empty() {
            // After a slip of syntax the rest of the document is a guess, so nothing else is said about it.
            report_syntax(source, &errors, problems);
            return Self::default();
        }
        let root = document.get_ref();
        let mut file = Self::default();
        let mut reader = TableReader::new(root, 0..0, &keys::FILE, problems);
        if let Some((table, span)) = reader.table("pipeline") {
            file.name = TableReader::new(table, span, &keys::PIPELINE, reader.problems).text("name");
        }
        file.sheets = reader
            .tables("sheet")
            .into_iter()
            .map(|(table, span)| read_sheet(table, span, reader.problems))
            .collect();
        if let Some((table, span)) = reader.table("stage") {
            file.read_stages(table, span, reader.problems);
        }
        if let Some((table, _)) = reader.table("gate") {
            file.gate = read_gate(table, reader.problems);
        }
        file
    }

    fn read_stages(&mut self, stages: &DeTable<'_>, span: Range<usize>, problems: &mut Diagnostics) {
        let mut stages = TableReader::new(stages, span, &keys::STAGE, problems);
        if let Some((table, span)) = stages.table("project") {
            let mut project = TableReader::new(table, span, &keys::PROJECT, stages.problems);
            self.positions = project.choice("positions", |word| match word {
                "reference" => Some(Positions::Reference),
                "instantaneous" => Some(Positions::Instantaneous),
                _ => None,
            });
        }
        if let Some((table, span)) = stages.table("spectrum") {
            let mut spectrum = TableReader::new(table, span, &keys::SPECTRUM, stages.problems);
            self.q_max = spectrum.quantity("q_max");
            self.block_frames = spectrum.count("block_frames");
        }
        if let Some((table, span)) = stages.table("area") {
            TableReader::new(table, span, &keys::AREA, stages.problems);
        }
        if let Some((table, span)) = stages.table("strain") {
            TableReader::new(table, span, &keys::STRAIN, stages.problems);
        }
        if let Some((table, span)) = stages.table("fit") {
            let mut fit = TableReader::new(table, span, &keys::FIT, stages.problems);
            self.plate = fit.choice("plate", |word| match word {
                "rippled" => Some(PlateModel::Rippled),
                "harmonic" => Some(PlateModel::Harmonic),
                _ => None,
            });
            self.window = fit.range("window");
            self.wanted_error = fit.quantity("wanted_error");
        }
    }
}

fn read_sheet(table: &DeTable<'_>, span: Range<usize>, problems: &mut Diagnostics) -> SheetEntry {
    let mut sheet = TableReader::new(table, span.clone(), &keys::SHEET, problems);
    SheetEntry {
        name: sheet.text("name"),
        select: sheet.text("select"),
        normal: sheet.choice("normal", |word| match word {
            "a" => Some(CellAxis::A),
            "b" => Some(CellAxis::B),
            "c" => Some(CellAxis::C),
            _ => None,
        }),
        runs: sheet
            .tables("run")
            .into_iter()
            .map(|(table, span)| read_run(table, span, sheet.problems))
            .collect(),
        span,
    }
}

fn read_run(table: &DeTable<'_>, span: Range<usize>, problems: &mut Diagnostics) -> RunEntry {
    let mut run = TableReader::new(table, span.clone(), &keys::RUN, problems);
    RunEntry {
        name: run.text("name"),
        trajectory: run.texts("trajectory"),
        topology: run.text("topology"),
        species: run.texts("species"),
        thermo: run.text("thermo"),
        temperature: run.quantity("temperature"),
        frame_interval: run.quantity("frame_interval"),
        timestep: run.quantity("timestep"),
        engine_units: run.choice("engine_units", |word| match word {
            "metal" => Some(EngineUnits::Metal),
            "real" => Some(EngineUnits::Real),
            "electron" => Some(EngineUnits::Electron),
            "si" => Some(EngineUnits::Si),
            "gromacs" => Some(EngineUnits::Gromacs),
            _ => None,
        }),
        tension: run.quantity("tension"),
        from: run.quantity("from"),
        to: run.quantity("to"),
        stride: run.count("stride"),
        replica_of: run.text("replica_of"),
        span,
    }
}

/// One problem a line: the parser's first on it is the one that explains the others.
fn report_syntax(source: &str, errors: &[Error], problems: &mut Diagnostics) {
    let mut last_line = None;
    for error in errors {
        let span = error.span().unwrap_or(0..0);
        let (line, _) = problems.line_and_column(span.start);
        if last_line == Some(line) {
            continue;
        }
        last_line = Some(line);
        let text = source.lines().nth(line - 1).unwrap_or_default();
        problems.push(
            Diagnostic::error(format!("this is not TOML: {}", error.message()))
                .at(span, "")
                .help(syntax_help(text, error.message())),
        );
    }
}

fn syntax_help(line: &str, message: &str) -> String {
    if message.contains("duplicate key") {
        return "give each key once; further sheets and runs begin with [[sheet]] and [[sheet.run]]"
            .to_owned();
    }
    match line.split_once('=') {
        Some((key, value)) if !value.contains(['"', '\'']) && !value.trim().is_empty() => {
            let value = value.split('#').next().unwrap_or_default().trim();
            format!(
                "texts and quantities stand in quotes: {} = \"{value}\"",
                key.trim()
            )
        }
        _ => "lines are [table], [[table]] or key = value, with texts in quotes".to_owned(),
    }
}
