//! spectrum.csv: one row per sheet, run and wave-vector bin; and kappa(q) as every table and figure reads it.

use crate::estimates::{RunEstimates, SpectrumRow};
use crate::fits::PlateCurve;
use crate::parameters::written;
use crate::units::BOLTZMANN_EV_PER_K;

use super::SheetReport;
use super::table::csv_text;

/// Columns of spectrum.csv.
const HEADER: [&str; 12] = [
    "sheet",
    "run",
    "temperature_K",
    "q_per_A",
    "modes",
    "height_power_A2",
    "height_power_error_A2",
    "kappa_eV",
    "kappa_error_eV",
    "effective_samples",
    "relaxation_ps",
    "used",
];

/// How far, relative, a row's mean |q| may lie outside the window and still count as its edge: rounding of a mean.
const EDGE: f64 = 1e-9;

/// The bending rigidity read from one row of a spectrum.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct KappaPoint {
    /// Mean |q| of the row, in 1/A.
    pub q: f64,
    /// kappa in eV, held tension taken out; `None` where the row has no power.
    pub kappa: Option<f64>,
    /// One standard error of it, in eV.
    pub error: Option<f64>,
    /// Whether the row lies in the window of the run's fit.
    pub used: bool,
}

/// kappa = kB T/(A w) - sigma/q^2 at each row of a run's spectrum, with w the mean of q^4 <|h_q|^2> over the row's modes,
/// A the area of the mean cell and sigma the mean tension held (the harmonic spectrum solved for kappa; textbook
/// membrane theory). The errors of w and of a measured sigma are independent and add in quadrature.
#[must_use]
pub fn kappa_points(run: &RunEstimates, curve: Option<&PlateCurve>) -> Vec<KappaPoint> {
    let thermal = BOLTZMANN_EV_PER_K * run.temperature / run.spectrum.cell.area();
    run.spectrum
        .rows
        .iter()
        .map(|row| {
            let (kappa, error) = rigidity(row, thermal, run);
            KappaPoint {
                q: row.length,
                kappa,
                error,
                used: curve.is_some_and(|curve| is_inside(row.length, curve.window)),
            }
        })
        .collect()
}

fn rigidity(row: &SpectrumRow, thermal: f64, run: &RunEstimates) -> (Option<f64>, Option<f64>) {
    let w = row.weighted_power;
    if !w.is_finite() || w <= 0.0 {
        return (None, None);
    }
    let q_squared = row.length * row.length;
    let kappa = thermal / w - run.tension.value() / q_squared;
    let from_power = thermal / w * (row.weighted_power_error / w);
    let from_tension = run.tension.error() / q_squared;
    let error = from_power.hypot(from_tension);
    (
        Some(kappa).filter(|kappa| kappa.is_finite()),
        Some(error).filter(|error| error.is_finite()),
    )
}

/// Whether |q| lies in a window, its ends included.
pub(super) fn is_inside(q: f64, [first, last]: [f64; 2]) -> bool {
    q >= first * (1.0 - EDGE) && q <= last * (1.0 + EDGE)
}

/// The text of spectrum.csv.
#[must_use]
pub fn spectrum_csv(sheets: &[SheetReport<'_>]) -> String {
    let rows = sheets.iter().flat_map(|sheet| {
        sheet.estimates.runs.iter().flat_map(|run| {
            let points = kappa_points(run, sheet.plate_curve(&run.name));
            run.spectrum
                .rows
                .iter()
                .zip(points)
                .filter(|(row, _)| sheet.q_max.is_none_or(|limit| row.length <= limit))
                .map(|(row, point)| cells(&sheet.estimates.name, run, row, &point))
        })
    });
    csv_text(&HEADER, rows)
}

fn cells(sheet: &str, run: &RunEstimates, row: &SpectrumRow, point: &KappaPoint) -> Vec<String> {
    vec![
        sheet.to_owned(),
        run.name.clone(),
        written(Some(run.temperature)),
        written(Some(row.length)),
        row.modes.len().to_string(),
        written(Some(row.power)),
        written(Some(row.power_error)),
        written(point.kappa),
        written(point.error),
        written(Some(row.effective_samples)),
        written(row.relaxation_ps),
        point.used.to_string(),
    ]
}
