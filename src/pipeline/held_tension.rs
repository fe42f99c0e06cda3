//! The mean tension and temperature of a run: what the pipeline states against what the thermo series says.

use super::measure::MeasuredRun;
use super::plan::RunPlan;
use crate::estimates::{Estimate, Tension, estimate_series};
use crate::frames::{FrameError, ThermoSeries};
use crate::units::N_PER_M_PER_EV_PER_A2;

/// A thermo temperature further than this, relative, from the stated one is worth a warning.
const TEMPERATURE_SLACK: f64 = 0.02;

/// A thermo tension further than this many of its errors from the stated one is worth a warning.
const TENSION_SLACK: f64 = 3.0;

/// Tension for the fits, and what does not fit together.
#[derive(Clone, Debug, PartialEq)]
pub struct HeldTension {
    /// Stated, measured or assumed.
    pub tension: Tension,
    /// Disagreements, each a sentence.
    pub warnings: Vec<String>,
}

/// Settles the tension of a run: stated, else the mean of the thermo series over the part of the run that is used, else
/// zero.
///
/// `first_used` is the time, in ps, at which the equilibration cut ends.
///
/// # Errors
/// Where the thermo file cannot be read.
pub fn settle(
    run: &RunPlan,
    measured: &MeasuredRun,
    first_used: Option<f64>,
) -> Result<HeldTension, FrameError> {
    let stated = run.tension.map(Tension::Stated);
    let Some(path) = &run.input.thermo else {
        return Ok(HeldTension {
            tension: stated.unwrap_or(Tension::Assumed),
            warnings: Vec::new(),
        });
    };
    let thermo = ThermoSeries::read(path, run.input.engine_units)?;
    let used = rows_between(&thermo, first_used, run.input.to);
    let mean = |values: &[f64]| -> Option<Estimate> {
        let part: Vec<f64> = used.iter().filter_map(|&row| values.get(row).copied()).collect();
        estimate_series(&part)
    };
    let mut warnings = Vec::new();
    if let Some(temperature) = thermo.temperature_k.as_deref().and_then(mean)
        && (temperature.value / run.temperature - 1.0).abs() > TEMPERATURE_SLACK
    {
        warnings.push(format!(
            "the thermo series {} has a mean temperature of {:.1} K, the pipeline states {:.1} K; the stated one is used",
            path.display(),
            temperature.value,
            run.temperature
        ));
    }
    let series = thermo.tension(run.input.normal, measured.facts.cell_height);
    let found = series.as_deref().and_then(mean);
    if let (Some(stated), Some(found)) = (run.tension, found)
        && (found.value - stated).abs() > TENSION_SLACK * found.error
    {
        let unit = N_PER_M_PER_EV_PER_A2;
        warnings.push(format!(
            "the thermo series {} has a mean tension of {:.4} +- {:.4} N/m, the pipeline states {:.4} N/m; the stated one \
             is used",
            path.display(),
            found.value * unit,
            found.error * unit,
            stated * unit
        ));
    }
    let from_series = found.map(|found| Tension::Measured {
        value: found.value,
        error: found.error,
    });
    Ok(HeldTension {
        tension: stated.or(from_series).unwrap_or(Tension::Assumed),
        warnings,
    })
}

/// Rows of the series whose times lie in the used part of the run; all of them where the series has no times.
fn rows_between(thermo: &ThermoSeries, from: Option<f64>, to: Option<f64>) -> Vec<usize> {
    let Some(times) = &thermo.time_ps else {
        return (0..thermo.len()).collect();
    };
    let (from, to) = (from.unwrap_or(f64::NEG_INFINITY), to.unwrap_or(f64::INFINITY));
    let inside = times
        .iter()
        .enumerate()
        .filter(|&(_, &time)| time >= from && time <= to);
    inside.map(|(row, _)| row).collect()
}
