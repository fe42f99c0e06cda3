//! The output folder: names of the result files, and what goes into each.

use std::path::Path;

use super::canonical::relative_to;
use super::fingerprint::fingerprint;
use super::job::{FinishedSheet, RunOutcome};
use super::plan::Plan;

use super::run_error::RunError;
use crate::estimates::SheetEstimates;
use crate::parameters::{InputHash, ParameterFile, Provenance, RunFrames};
use crate::report::{
    Figure, OutputFolder, PageContent, PageSheet, RunSummary, SheetReport, area_csv, area_figure, file_stem,
    kappa_figure, page, runs_csv, spectrum_csv,
};

/// The program, the pipeline, the inputs and the frames behind a parameter file.
pub(super) fn provenance(plan: &Plan, sheets: &[FinishedSheet]) -> Provenance {
    let mut input: Vec<InputHash> = Vec::new();
    for run in plan.sheets.iter().flat_map(|sheet| &sheet.runs) {
        let files = run
            .input
            .trajectory
            .iter()
            .flatten()
            .chain(&run.input.topology)
            .chain(&run.input.thermo);
        for file in files {
            let path = relative_to(plan.folder(), file);
            if input.iter().all(|known| known.path != path) {
                // A file that cannot be read has its run refused; here it is named all the same.
                let blake3 = fingerprint(file).unwrap_or_else(|error| format!("unreadable: {error}"));
                input.push(InputHash { path, blake3 });
            }
        }
    }
    let run = sheets.iter().flat_map(|sheet| {
        sheet.accounts.iter().map(|account| RunFrames {
            sheet: sheet.estimates.name.clone(),
            run: account.run.clone(),
            frames: account.frames,
            frames_used: account.outcome.as_ref().map_or(0, |estimates| estimates.frames),
        })
    });
    Provenance {
        program: Provenance::this_program(),
        pipeline: plan.name.clone(),
        pipeline_blake3: blake3::hash(plan.canonical().as_bytes()).to_hex().to_string(),
        input,
        run: run.collect(),
    }
}

/// Writes every result file, the parameter file last: where it is new, the others are.
pub(super) fn write_results(
    folder: &OutputFolder,
    plan: &Plan,
    file: &ParameterFile,
    sheets: &[FinishedSheet],
    outcome: &RunOutcome,
) -> Result<(), RunError> {
    let reports: Vec<SheetReport<'_>> = sheets
        .iter()
        .map(|sheet| SheetReport {
            estimates: &sheet.estimates,
            fits: &sheet.fits,
            q_max: plan.spectrum.q_max,
        })
        .collect();
    let estimates: Vec<&SheetEstimates> = sheets.iter().map(|sheet| &sheet.estimates).collect();
    let summaries: Vec<RunSummary> = sheets.iter().flat_map(|sheet| sheet.summaries.clone()).collect();
    folder.write("spectrum.csv", spectrum_csv(&reports))?;
    folder.write("area.csv", area_csv(&estimates))?;
    folder.write("runs.csv", runs_csv(&summaries))?;

    let figures: Vec<Vec<(Figure, &str)>> = reports.iter().map(figures_of).collect();
    for (report, figures) in reports.iter().zip(&figures) {
        for (figure, name) in figures {
            let stem = file_stem(&report.estimates.name);
            folder.write(
                Path::new("figures").join(format!("{name}-{stem}.svg")),
                &figure.svg,
            )?;
        }
    }
    folder.write("report.html", page_of(plan, file, sheets, &figures, outcome))?;
    folder.write("parameters.json", file.to_json())?;
    folder.write("parameters.toml", file.to_toml())?;
    Ok(())
}

/// The figures of a sheet that its data allow, each with the first part of its file's name.
fn figures_of(report: &SheetReport<'_>) -> Vec<(Figure, &'static str)> {
    let kappa = kappa_figure(report).map(|figure| (figure, "kappa"));
    let area = area_figure(report).map(|figure| (figure, "area"));
    kappa.into_iter().chain(area).collect()
}

fn page_of(
    plan: &Plan,
    file: &ParameterFile,
    sheets: &[FinishedSheet],
    figures: &[Vec<(Figure, &str)>],
    outcome: &RunOutcome,
) -> String {
    let caption = |name: &str| match name {
        "kappa" => {
            "Bending rigidity against wave vector, with the fitted plate; hollow points were not used."
        }
        _ => "Projected area per atom against temperature, with the fitted expansion.",
    };
    let pages = file
        .sheet
        .iter()
        .zip(sheets)
        .zip(figures)
        .map(|((parameters, sheet), figures)| PageSheet {
            sheet: parameters,
            runs: sheet.summaries.iter().collect(),
            figures: figures
                .iter()
                .map(|(figure, name)| (figure, caption(name)))
                .collect(),
        });
    let mut warnings = outcome.refused.clone();
    warnings.extend(
        outcome
            .gate_missed
            .iter()
            .map(|gate| format!("gate not met: {gate}")),
    );
    for sheet in sheets {
        for account in &sheet.accounts {
            let place = format!("{}/{}", sheet.estimates.name, account.run);
            warnings.extend(
                account
                    .warnings
                    .iter()
                    .map(|warning| format!("{place}: {warning}")),
            );
        }
    }
    page(&PageContent {
        title: &plan.name,
        provenance: &file.provenance,
        sheets: pages.collect(),
        warnings: &warnings,
    })
}
