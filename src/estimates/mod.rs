//! Histories become numbers with errors: equilibration cut, effective samples, covariance.

mod estimate;
mod run;
mod spectrum;
mod strain;

pub use estimate::Estimate;
pub use run::{AreaBlock, RunEstimates, SheetEstimates, Tension};
pub use spectrum::{ModeEstimate, SpectrumEstimate, SpectrumRow};
pub use strain::StrainEstimate;
