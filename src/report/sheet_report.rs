//! What tables and figures are drawn from: one sheet's estimates beside what the fits made of them.

use crate::estimates::SheetEstimates;
use crate::fits::{AreaCurve, Fitted, PlateCurve};

/// One sheet, measured and fitted.
#[derive(Clone, Copy, Debug)]
pub struct SheetReport<'a> {
    /// The estimates of its runs.
    pub estimates: &'a SheetEstimates,
    /// What each fit says, in the order of the registry.
    pub fits: &'a [Fitted],
    /// Largest |q| that is shown, in 1/A, where the pipeline states one.
    pub q_max: Option<f64>,
}

impl<'a> SheetReport<'a> {
    /// The fitted kappa(q) of a run.
    #[must_use]
    pub fn plate_curve(&self, run: &str) -> Option<&'a PlateCurve> {
        self.fits
            .iter()
            .flat_map(|fitted| &fitted.plate_curves)
            .find(|curve| curve.run == run)
    }

    /// The fitted area against temperature.
    #[must_use]
    pub fn area_curve(&self) -> Option<&'a AreaCurve> {
        self.fits.iter().find_map(|fitted| fitted.area_curve.as_ref())
    }
}
