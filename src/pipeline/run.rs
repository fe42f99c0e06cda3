//! THE pipeline: read, project, measure, estimate, fit, write; read it from top to bottom.

use super::estimate::{RunAccount, RunFault, estimate_sheet};
use super::gate_check::gate_missed;
use super::job::{FinishedSheet, RunOptions, RunOutcome};
use super::plan::{Plan, SheetPlan};
use super::progress::Progress;
use super::results::{provenance, write_results};
use super::run_error::RunError;
use super::run_log::RunLog;
use super::run_records::{missing_values, run_summaries};
use super::stored_run::stored_or_measured;
use crate::estimates::SheetEstimates;
use crate::fits::{FitOptions, Fitted, registry};
use crate::parameters::{ParameterFile, Sheet};
use crate::report::OutputFolder;

/// Carries out a plan and writes the output folder.
///
/// # Errors
/// Only where the machine fails. A run whose input is wrong is recorded and named in the outcome; the others go on.
pub fn run(plan: &Plan, options: &RunOptions, progress: &dyn Progress) -> Result<RunOutcome, RunError> {
    let mut log = RunLog::start(plan, options);
    let folder = OutputFolder::prepare(&options.out)?;

    let mut sheets = Vec::new();
    for sheet in &plan.sheets {
        let mut records = Vec::new();
        for run in &sheet.runs {
            records.push(stored_or_measured(
                plan,
                sheet,
                run,
                &folder,
                options.threads,
                progress,
            )?);
            log.mark(&format!("measured {}/{}", sheet.name, run.name));
        }
        let (estimates, accounts) = estimate_sheet(sheet, records, plan.folder());
        let fits = fit_sheet(&estimates, &accounts, &plan.fit);
        log.mark(&format!("fitted {}", sheet.name));
        sheets.push(finish_sheet(plan, sheet, estimates, fits, accounts));
    }
    report_accounts(&sheets, progress);

    let parameters = sheets.iter().map(|sheet| sheet.parameters.clone()).collect();
    let file = ParameterFile::new(provenance(plan, &sheets), parameters);
    let outcome = RunOutcome {
        gate_missed: gate_missed(&plan.gate, &file),
        refused: refused(&sheets),
        sheets: file.sheet.clone(),
    };
    write_results(&folder, plan, &file, &sheets, &outcome)?;
    log.mark("wrote the results");
    folder.write("run.log", log.text())?;
    Ok(outcome)
}

/// Every registered fit on one sheet, and an unusable record for each run without estimates.
fn fit_sheet(estimates: &SheetEstimates, accounts: &[RunAccount], options: &FitOptions) -> Vec<Fitted> {
    let mut fits: Vec<Fitted> = registry().iter().map(|fit| fit.fit(estimates, options)).collect();
    fits.push(missing_values(accounts));
    fits
}

fn finish_sheet(
    plan: &Plan,
    sheet: &SheetPlan,
    estimates: SheetEstimates,
    fits: Vec<Fitted>,
    accounts: Vec<RunAccount>,
) -> FinishedSheet {
    let parameters = Sheet::from_fits(&sheet.name, &fits);
    let summaries = run_summaries(plan, &sheet.name, &accounts, &fits);
    FinishedSheet {
        estimates,
        fits,
        accounts,
        parameters,
        summaries,
    }
}

/// Passes on what the runs have to say, once everything is known.
fn report_accounts(sheets: &[FinishedSheet], progress: &dyn Progress) {
    for sheet in sheets {
        for account in &sheet.accounts {
            let place = format!("{}/{}", sheet.estimates.name, account.run);
            account
                .warnings
                .iter()
                .for_each(|warning| progress.warning(&format!("{place}: {warning}")));
            account
                .notes
                .iter()
                .for_each(|note| progress.note(&format!("{place}: {note}")));
            if let Err(RunFault::TooShort(reason)) = &account.outcome {
                progress.warning(&format!("{place}: {reason}"));
            }
        }
    }
}

fn refused(sheets: &[FinishedSheet]) -> Vec<String> {
    let mut refused = Vec::new();
    for sheet in sheets {
        for account in &sheet.accounts {
            if let Err(RunFault::Refused(reason)) = &account.outcome {
                refused.push(format!(
                    "run {}/{} is refused: {reason}",
                    sheet.estimates.name, account.run
                ));
            }
        }
    }
    refused
}
