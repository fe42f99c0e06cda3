//! The plan as a text that two equal plans share: for hashes, never with an absolute path in it.

use std::path::{Component, Path};

use serde::Serialize;

use super::gate::GateLimit;
use super::plan::{Plan, ProjectOptions, RunPlan, SpectrumOptions};
use crate::fits::PlateModel;
use crate::frames::{CellAxis, Clock, EngineUnits};

/// What decides the blocks of one run, apart from what is in its files.
///
/// The fit, temperature and tension are not in it: changing them measures nothing anew. Nor is the thermo series, of
/// which no block is made.
#[derive(Debug, PartialEq, Serialize)]
pub struct MeasuredForm<'a> {
    /// Trajectory files, an entry of the pipeline file each list, relative to the pipeline file.
    pub trajectory: Vec<Vec<String>>,
    /// How they are read and measured.
    pub settings: MeasuredSettings<'a>,
}

/// How the files of a run are read and measured. Appending files to a run does not change it.
#[derive(Debug, PartialEq, Serialize)]
pub struct MeasuredSettings<'a> {
    topology: Option<String>,
    species: Option<&'a [String]>,
    select: &'a str,
    normal: CellAxis,
    clock: Clock,
    engine_units: Option<EngineUnits>,
    from: Option<f64>,
    to: Option<f64>,
    stride: usize,
    project: ProjectOptions,
    spectrum: SpectrumOptions,
}

#[derive(Serialize)]
struct PlanForm<'a> {
    name: &'a str,
    sheets: Vec<SheetForm<'a>>,
    fit: FitForm,
    gate: &'a [GateLimit],
}

#[derive(Serialize)]
struct SheetForm<'a> {
    name: &'a str,
    runs: Vec<RunForm<'a>>,
}

#[derive(Serialize)]
struct RunForm<'a> {
    name: &'a str,
    measured: MeasuredForm<'a>,
    thermo: Option<String>,
    temperature: f64,
    tension: Option<f64>,
    replica_of: Option<&'a str>,
}

#[derive(Serialize)]
struct FitForm {
    plate: &'static str,
    window: Option<[f64; 2]>,
    wanted_error: f64,
}

impl MeasuredForm<'_> {
    /// As JSON on one line, keys in a fixed order.
    #[must_use]
    pub fn to_text(&self) -> String {
        text(self)
    }
}

impl MeasuredSettings<'_> {
    /// As JSON on one line, keys in a fixed order.
    #[must_use]
    pub fn to_text(&self) -> String {
        text(self)
    }
}

fn text(form: &impl Serialize) -> String {
    serde_json::to_string(form).expect("texts, numbers and lists of them always serialise")
}

impl Plan {
    /// The whole plan as JSON on one line: equal for equal plans, wherever the pipeline and its files lie together.
    #[must_use]
    pub fn canonical(&self) -> String {
        let sheets = self.sheets.iter().map(|sheet| SheetForm {
            name: &sheet.name,
            runs: sheet.runs.iter().map(|run| self.run_form(run)).collect(),
        });
        text(&PlanForm {
            name: &self.name,
            sheets: sheets.collect(),
            fit: FitForm {
                plate: match self.fit.plate {
                    PlateModel::Rippled => "rippled",
                    PlateModel::Harmonic => "harmonic",
                },
                window: self.fit.window,
                wanted_error: self.fit.wanted_error,
            },
            gate: &self.gate,
        })
    }

    /// What decides the blocks of a run of this plan.
    #[must_use]
    pub fn measured_form<'a>(&self, run: &'a RunPlan) -> MeasuredForm<'a> {
        let input = &run.input;
        let relative = |file: &Path| relative_to(self.folder(), file);
        MeasuredForm {
            trajectory: input
                .trajectory
                .iter()
                .map(|files| files.iter().map(|file| relative(file)).collect())
                .collect(),
            settings: MeasuredSettings {
                topology: input.topology.as_deref().map(relative),
                species: input.species.as_deref(),
                select: &input.select,
                normal: input.normal,
                clock: input.clock,
                engine_units: input.engine_units,
                from: input.from,
                to: input.to,
                stride: input.stride,
                project: self.project,
                spectrum: self.spectrum,
            },
        }
    }

    fn run_form<'a>(&self, run: &'a RunPlan) -> RunForm<'a> {
        RunForm {
            name: &run.name,
            measured: self.measured_form(run),
            thermo: run
                .input
                .thermo
                .as_deref()
                .map(|file| relative_to(self.folder(), file)),
            temperature: run.temperature,
            tension: run.tension,
            replica_of: run.replica_of.as_deref(),
        }
    }
}

/// The path from `folder` to `file`, with `/` between components, by their names alone.
pub(super) fn relative_to(folder: &Path, file: &Path) -> String {
    if let Ok(below) = file.strip_prefix(folder)
        && below.is_relative()
    {
        return joined(below.components());
    }
    let absolute = |path: &Path| std::path::absolute(path).unwrap_or_else(|_| path.to_owned());
    let (folder, file) = (absolute(&folder.join(".")), absolute(file));
    let shared = folder
        .components()
        .zip(file.components())
        .take_while(|(a, b)| a == b)
        .count();
    let up = folder.components().skip(shared).map(|_| Component::ParentDir);
    joined(up.chain(file.components().skip(shared)))
}

fn joined<'a>(components: impl Iterator<Item = Component<'a>>) -> String {
    let parts: Vec<String> = components
        .filter(|component| *component != Component::CurDir)
        .map(|component| component.as_os_str().to_string_lossy().into_owned())
        .collect();
    parts.join("/")
}

#[cfg(test)]
mod tests {
    use std::path::Path;

    use super::relative_to;

    #[test]
    fn paths_are_relative_to_the_pipeline() {
        let relative = |folder: &str, file: &str| relative_to(Path::new(folder), Path::new(file));
        assert_eq!(relative("pipelines", "pipelines/../demo/a.xtc"), "../demo/a.xtc");
        assert_eq!(relative("", "demo/a.xtc"), "demo/a.xtc");
        assert_eq!(relative("", "./a.xtc"), "a.xtc");
        assert_eq!(relative("/data/jobs", "/data/jobs/a.xtc"), "a.xtc");
        assert_eq!(relative("/data/jobs", "/data/runs/a.xtc"), "../runs/a.xtc");
    }
}
