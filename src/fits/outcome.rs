//! What a fit leaves: quantities, their covariance, and the curves that figures draw.

use ndarray::Array2;

use super::Quantity;

/// What the pipeline file says about fitting (`[stage.fit]`).
#[derive(Clone, Debug, PartialEq)]
pub struct FitOptions {
    /// The plate model fitted to each run's heights.
    pub plate: PlateModel,
    /// Limits of the fit window in 1/A where the pipeline states them; otherwise the data choose.
    pub window: Option<[f64; 2]>,
    /// Wanted relative standard error, for advice on how much longer a run must be.
    pub wanted_error: f64,
}

/// The plate model fitted to one run's heights.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum PlateModel {
    /// The box SCSA at the held tension, with kappa, b and Y free.
    #[default]
    Rippled,
    /// kappa (1 - b q^2) q^4 + sigma q^2 with kappa, b and sigma free.
    Harmonic,
}

/// Everything one fit says about one sheet.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Fitted {
    /// The numbers, in the order they are written.
    pub quantities: Vec<Quantity>,
    /// Covariance of those fitted jointly.
    pub covariances: Vec<Covariance>,
    /// Fitted kappa(q) of each run.
    pub plate_curves: Vec<PlateCurve>,
    /// Fitted area against temperature.
    pub area_curve: Option<AreaCurve>,
}

/// Covariance of jointly fitted quantities, in their written units.
#[derive(Clone, Debug, PartialEq)]
pub struct Covariance {
    /// The run it belongs to, `None` for a fit over several.
    pub run: Option<String>,
    /// Quantity names.
    pub names: Vec<String>,
    /// Shape (names, names), symmetric.
    pub matrix: Array2<f64>,
}

/// kappa(q) of one run as fitted, for figures and for the `used` column of spectrum.csv.
#[derive(Clone, Debug, PartialEq)]
pub struct PlateCurve {
    /// Name of the run.
    pub run: String,
    /// First and last |q| used, in 1/A, both included.
    pub window: [f64; 2],
    /// |q| in 1/A, ascending.
    pub q: Vec<f64>,
    /// Fitted kappa in eV at each q, held tension out.
    pub kappa: Vec<f64>,
}

/// Area per atom against temperature as fitted, for figures.
#[derive(Clone, Debug, PartialEq)]
pub struct AreaCurve {
    /// Temperatures in K, ascending.
    pub temperature: Vec<f64>,
    /// Area per atom in A^2.
    pub area_per_atom: Vec<f64>,
}
