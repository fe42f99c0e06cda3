//! From the file as written to the plan: defaults, names, files, and what one value asks of another.

use std::path::{Path, PathBuf};

use super::diagnostics::{Diagnostic, Diagnostics};
use super::file::{PipelineFile, RunEntry, SheetEntry};
use super::inputs::{find_file, find_files};
use super::keys::{DEFAULT_BLOCK_FRAMES, DEFAULT_WANTED_ERROR};
use super::plan::{Plan, ProjectOptions, RunPlan, SheetPlan, SpectrumOptions};
use super::replicas::check_replicas;
use super::table_reader::Written;
use crate::fits::FitOptions;
use crate::frames::{CellAxis, Clock, RunInput};
use crate::measurements::LAGS;

/// Resolves the file named `path`; `problems` holds what reading it has found.
pub(super) fn resolve(
    file: PipelineFile,
    path: &Path,
    mut problems: Diagnostics,
) -> Result<Plan, Diagnostics> {
    let folder = path.parent().unwrap_or(Path::new(""));
    check_sheet_names(&file.sheets, &mut problems);
    check_stages(&file, &mut problems);
    // A run with a problem of its own is left out here; the problem is reported, so no plan comes of it.
    let sheets: Vec<SheetPlan> = file
        .sheets
        .iter()
        .map(|sheet| resolve_sheet(sheet, folder, &mut problems))
        .collect();
    warn_of_shared_files(&file.sheets, &sheets, &mut problems);
    let Some(name) = file.name.filter(|_| !problems.has_errors()) else {
        return Err(problems);
    };
    Ok(Plan {
        name: name.value,
        file: path.to_owned(),
        sheets,
        project: ProjectOptions {
            positions: value(file.positions).unwrap_or_default(),
        },
        spectrum: SpectrumOptions {
            q_max: value(file.q_max),
            block_frames: value(file.block_frames).unwrap_or(DEFAULT_BLOCK_FRAMES),
        },
        fit: FitOptions {
            plate: value(file.plate).unwrap_or_default(),
            window: value(file.window),
            wanted_error: value(file.wanted_error).unwrap_or(DEFAULT_WANTED_ERROR),
        },
        gate: file.gate,
        warnings: problems,
    })
}

fn value<T>(written: Option<Written<T>>) -> Option<T> {
    written.map(|written| written.value)
}

fn copied<T: Copy>(written: Option<&Written<T>>) -> Option<T> {
    written.map(|written| written.value)
}

fn check_sheet_names(sheets: &[SheetEntry], problems: &mut Diagnostics) {
    let names: Vec<&Written<String>> = sheets.iter().filter_map(|sheet| sheet.name.as_ref()).collect();
    for (index, name) in names.iter().enumerate() {
        if let Some(earlier) = names[..index].iter().find(|earlier| earlier.value == name.value) {
            problems.push(
                Diagnostic::error(format!("two sheets are named `{}`", name.value))
                    .at(name.span.clone(), "expected another name")
                    .related(earlier.span.clone(), "first here")
                    .help("a sheet is one material under one potential: rename one, or put its runs under the other"),
            );
        }
    }
}

fn check_stages(file: &PipelineFile, problems: &mut Diagnostics) {
    if let (Some(window), Some(q_max)) = (&file.window, &file.q_max)
        && window.value[1] > q_max.value
    {
        problems.push(
            Diagnostic::error("`window` reaches beyond `q_max`")
                .at(window.span.clone(), "expected an end of at most q_max")
                .related(q_max.span.clone(), "waves are measured up to here")
                .help("lower the window's end or raise q_max"),
        );
    }
    let longest_lag = LAGS[LAGS.len() - 1];
    if let Some(frames) = &file.block_frames
        && frames.value <= longest_lag
    {
        problems.push(
            Diagnostic::warning(format!(
                "blocks of {} frames hold no pair of frames {longest_lag} apart",
                frames.value
            ))
            .at(frames.span.clone(), format!("better {} or more", 2 * longest_lag))
            .help("relaxation times of the short waves come from such pairs"),
        );
    }
}

fn resolve_sheet(sheet: &SheetEntry, folder: &Path, problems: &mut Diagnostics) -> SheetPlan {
    let runs: Vec<(&RunEntry, RunPlan)> = sheet
        .runs
        .iter()
        .filter_map(|run| Some((run, resolve_run(sheet, run, folder, problems)?)))
        .collect();
    for (index, (entry, run)) in runs.iter().enumerate() {
        if let Some((earlier, _)) = runs[..index].iter().find(|(_, earlier)| earlier.name == run.name) {
            problems.push(
                Diagnostic::error(format!("two runs of this sheet are named `{}`", run.name))
                    .at(name_span(entry), "expected another name")
                    .related(name_span(earlier), "first here")
                    .help("name each run: a run without a name has that of its first file"),
            );
        }
    }
    check_replicas(sheet, &runs, problems);
    SheetPlan {
        name: sheet.name.clone().map(|name| name.value).unwrap_or_default(),
        runs: runs.into_iter().map(|(_, run)| run).collect(),
    }
}

/// The name where there is one, otherwise the files that it is made from.
fn name_span(run: &RunEntry) -> std::ops::Range<usize> {
    let first_file = || run.trajectory.as_ref().and_then(|files| files.first());
    run.name
        .as_ref()
        .or_else(first_file)
        .map_or(run.span.clone(), |written| written.span.clone())
}

fn resolve_run(
    sheet: &SheetEntry,
    run: &RunEntry,
    folder: &Path,
    problems: &mut Diagnostics,
) -> Option<RunPlan> {
    check_times(run, problems);
    let mut trajectory: Vec<Vec<PathBuf>> = Vec::new();
    for entry in run.trajectory.iter().flatten() {
        let files = find_files(folder, entry, problems);
        if let Some(twice) = files
            .iter()
            .find(|file| trajectory.iter().flatten().any(|earlier| earlier == *file))
        {
            problems.push(
                Diagnostic::error(format!("{} stands twice in this run", twice.display()))
                    .at(entry.span.clone(), "expected other files")
                    .help("its frames would count twice: name it once"),
            );
        }
        trajectory.push(files);
    }
    let mut one = |entry: &Option<Written<String>>| {
        entry
            .as_ref()
            .and_then(|entry| find_file(folder, entry, problems))
    };
    let topology = one(&run.topology);
    let thermo = one(&run.thermo);
    let default_name = trajectory.iter().flatten().next().map(|file| stem(file));
    Some(RunPlan {
        name: run
            .name
            .as_ref()
            .map(|name| name.value.clone())
            .or(default_name)?,
        input: RunInput {
            trajectory,
            topology,
            species: run
                .species
                .as_ref()
                .map(|species| species.iter().map(|name| name.value.clone()).collect()),
            select: sheet
                .select
                .as_ref()
                .map_or("all", |select| &select.value)
                .to_owned(),
            normal: copied(sheet.normal.as_ref()).unwrap_or(CellAxis::C),
            clock: match (&run.frame_interval, &run.timestep) {
                (Some(interval), _) => Clock::FrameInterval(interval.value),
                (None, Some(step)) => Clock::Timestep(step.value),
                (None, None) => Clock::File,
            },
            engine_units: copied(run.engine_units.as_ref()),
            from: copied(run.from.as_ref()),
            to: copied(run.to.as_ref()),
            stride: copied(run.stride.as_ref()).unwrap_or(1),
            thermo,
        },
        temperature: copied(run.temperature.as_ref())?,
        tension: copied(run.tension.as_ref()),
        replica_of: run.replica_of.as_ref().map(|name| name.value.clone()),
    })
}

fn check_times(run: &RunEntry, problems: &mut Diagnostics) {
    if let (Some(from), Some(to)) = (&run.from, &run.to)
        && from.value >= to.value
    {
        problems.push(
            Diagnostic::error("the run's part ends before it begins")
                .at(to.span.clone(), "expected a time after `from`")
                .related(from.span.clone(), "the part begins here")
                .help("raise `to` or lower `from`"),
        );
    }
    if let (Some(interval), Some(step)) = (&run.frame_interval, &run.timestep) {
        problems.push(
            Diagnostic::error("both `frame_interval` and `timestep` say where times come from")
                .at(step.span.clone(), "expected only one of them")
                .related(interval.span.clone(), "the other")
                .help("keep frame_interval where the file has neither times nor steps, timestep where it has steps"),
        );
    }
}

/// The same frames under two names would be taken for two independent samples.
fn warn_of_shared_files(entries: &[SheetEntry], sheets: &[SheetPlan], problems: &mut Diagnostics) {
    if problems.has_errors() {
        return;
    }
    for (entry, sheet) in entries.iter().zip(sheets) {
        for (index, run) in sheet.runs.iter().enumerate() {
            let files = || run.input.trajectory.iter().flatten();
            let shares = |other: &&RunPlan| {
                other
                    .input
                    .trajectory
                    .iter()
                    .flatten()
                    .any(|file| files().any(|own| own == file))
            };
            if let Some(other) = sheet.runs[..index].iter().find(shares) {
                problems.push(
                    Diagnostic::warning(format!(
                        "runs `{}` and `{}` share a trajectory file",
                        other.name, run.name
                    ))
                    .at(name_span(&entry.runs[index]), "this run")
                    .help(
                        "they count as independent: check that they use different parts of it (`from`, `to`)",
                    ),
                );
            }
        }
    }
}

/// Endings of compressed files, which stand after the ending of the format.
const COMPRESSED: [&str; 4] = ["gz", "xz", "bz2", "zst"];

/// The file's name without the ending of its format, and of its compression.
fn stem(file: &Path) -> String {
    let compressed = file
        .extension()
        .is_some_and(|ending| COMPRESSED.iter().any(|known| ending.eq_ignore_ascii_case(known)));
    let without = if compressed {
        file.with_extension("")
    } else {
        file.to_owned()
    };
    without
        .file_stem()
        .map_or_else(String::new, |stem| stem.to_string_lossy().into_owned())
}
