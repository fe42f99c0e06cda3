//! Histories become numbers with errors: equilibration cut, effective samples, covariance.

mod area;
mod combination;
mod cut;
mod error;
mod estimate;
mod excess_area;
mod history_view;
mod mode_blocks;
mod mode_statistics;
mod modes;
mod pool;
mod run;
mod series;
mod spectrum;
mod strain;

pub use cut::Cut;
pub use error::EstimateError;
pub use estimate::Estimate;
pub use pool::pool;
pub use run::{AreaBlock, RunEstimates, RunFacts, SheetEstimates, Tension};
pub use series::{estimate_series, tension_from_series};
pub use spectrum::{ModeEstimate, SpectrumEstimate, SpectrumRow};
pub use strain::{STIFFEST_EV_PER_A2, StrainEstimate};
