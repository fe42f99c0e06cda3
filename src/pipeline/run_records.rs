//! What is written of a run as a whole: its row of runs.csv, and its place in the parameter file when it has no values.

use super::estimate::RunAccount;
use super::plan::Plan;
use crate::estimates::RunEstimates;
use crate::fits::{Condition, Fitted, Quantity, Verdict};
use crate::parameters::look_up;
use crate::report::RunSummary;

/// Values that every run is expected to give; without estimates they stand in the file as unusable, with the reason.
const EXPECTED: [&str; 2] = ["bending_rigidity", "area_per_atom"];

/// Unusable records for runs that have no estimates. A replica's fault is in runs.csv: its values stand under another run.
#[must_use]
pub fn missing_values(accounts: &[RunAccount]) -> Fitted {
    let mut quantities = Vec::new();
    for account in accounts.iter().filter(|account| account.pooled_as == account.run) {
        let replica_stands = accounts
            .iter()
            .any(|other| other.pooled_as == account.run && other.outcome.is_ok());
        if let Err(fault) = &account.outcome
            && !replica_stands
        {
            quantities.extend(
                EXPECTED
                    .iter()
                    .filter_map(|name| look_up(name))
                    .map(|row| Quantity {
                        name: row.name,
                        unit: row.unit,
                        condition: Condition {
                            run: Some(account.run.clone()),
                            temperature: Some(account.temperature),
                            ..Condition::default()
                        },
                        value: None,
                        method: "none".to_owned(),
                        verdict: Verdict::Unusable,
                        note: fault.reason().to_owned(),
                    }),
            );
        }
    }
    Fitted {
        quantities,
        ..Fitted::default()
    }
}

/// The rows of runs.csv of one sheet. A run's verdict is that of its bending rigidity, the value that asks most of it.
#[must_use]
pub fn run_summaries(plan: &Plan, sheet: &str, accounts: &[RunAccount], fits: &[Fitted]) -> Vec<RunSummary> {
    accounts
        .iter()
        .map(|account| summary(plan, sheet, account, fits))
        .collect()
}

fn summary(plan: &Plan, sheet: &str, account: &RunAccount, fits: &[Fitted]) -> RunSummary {
    let mut summary = RunSummary {
        sheet: sheet.to_owned(),
        run: account.run.clone(),
        temperature_K: account.temperature,
        frames: account.frames,
        frames_cut: None,
        block_frames: plan.spectrum.block_frames,
        slowest_relaxation_ps: None,
        effective_samples: None,
        verdict: Verdict::Unusable,
        note: String::new(),
    };
    let mut notes: Vec<&str> = Vec::new();
    match &account.outcome {
        Err(fault) => notes.push(fault.reason()),
        Ok(estimates) => {
            summary.frames_cut = Some(estimates.cut.frames_cut);
            let rigidity = fits.iter().flat_map(|fitted| &fitted.quantities).find(|q| {
                q.name == "bending_rigidity" && q.condition.run.as_deref() == Some(&account.pooled_as)
            });
            if let Some(rigidity) = rigidity {
                summary.verdict = rigidity.verdict;
                notes.push(&rigidity.note);
            }
            fill_slowest_mode(&mut summary, estimates, &account.pooled_as, fits);
        }
    }
    notes.extend(account.warnings.iter().chain(&account.notes).map(String::as_str));
    notes.retain(|note| !note.is_empty());
    summary.note = notes.join("; ");
    summary
}

/// The slowest mode used is the one of smallest q in the fit's window, with the run's own statistics.
fn fill_slowest_mode(summary: &mut RunSummary, estimates: &RunEstimates, pooled_as: &str, fits: &[Fitted]) {
    let window = fits
        .iter()
        .flat_map(|fitted| &fitted.plate_curves)
        .find(|curve| curve.run == pooled_as)
        .map_or([0.0, f64::INFINITY], |curve| curve.window);
    if let Some(mode) = estimates.spectrum.slowest_mode(window) {
        summary.slowest_relaxation_ps = mode.relaxation_ps;
        summary.effective_samples = Some(mode.effective_samples);
    }
}
