//! Fits: estimates become [`Quantity`] values, one fit per file.
//!
//! To add a fit: one new file that implements [`Fit`], one `mod` line and one row in [`registry`].

mod area;
mod cell_likelihood;
mod cell_stiffness;
mod compliance;
mod excess_area;
mod harmonic_plate;
mod joint_covariance;
mod joint_likelihood;
mod joint_plate;
mod joint_quality;
mod joint_quantities;
mod joint_run;
mod lack_of_fit;
pub mod mode_verdict;
mod outcome;
pub mod plate_covariance;
pub mod plate_likelihood;
mod plate_run;
mod quantity;
mod ripple_model;
mod rippled_plate;
mod run_condition;
mod series_verdict;
mod thermal_expansion;
mod window;

pub use area::AreaFit;
pub use cell_stiffness::CellStiffnessFit;
pub use excess_area::ExcessAreaFit;
pub use harmonic_plate::HarmonicPlate;
pub use joint_plate::JointPlateFit;
pub use outcome::{AreaCurve, Covariance, FitOptions, Fitted, PlateCurve, PlateModel};
pub use quantity::{Condition, FittedValue, NORMAL_95, Quantity, Verdict};
pub use rippled_plate::RippledPlate;
pub use series_verdict::{Judgement, series_verdict};
pub use thermal_expansion::ThermalExpansionFit;

use crate::estimates::SheetEstimates;

/// A fit over the runs of one sheet.
pub trait Fit: Sync {
    /// Short name, unique in the registry, for messages and documentation.
    fn name(&self) -> &'static str;

    /// Fits one sheet. What the data cannot carry comes back as a quantity without a value, never as an error.
    fn fit(&self, sheet: &SheetEstimates, options: &FitOptions) -> Fitted;
}

/// Every fit, in the order in which their quantities are written.
#[must_use]
pub fn registry() -> Vec<Box<dyn Fit>> {
    vec![
        Box::new(RippledPlate),
        Box::new(HarmonicPlate),
        Box::new(JointPlateFit),
        Box::new(CellStiffnessFit),
        Box::new(AreaFit),
        Box::new(ThermalExpansionFit),
        Box::new(ExcessAreaFit),
    ]
}
