//! The pipeline file as written, the plan as resolved, and the run itself.

mod canonical;
mod diagnostics;
mod file;
mod gate;
mod inputs;
pub mod keys;
mod plan;
mod progress;
mod replicas;
mod resolve;
mod table_reader;
mod wording;

pub use canonical::{MeasuredForm, MeasuredSettings};
pub use diagnostics::{Diagnostic, Diagnostics, Related, Severity};
pub use file::{PipelineFile, RunEntry, SheetEntry};
pub use gate::{ErrorLimit, GateLimit};
pub use plan::{Plan, Positions, ProjectOptions, RunPlan, SheetPlan, SpectrumOptions};
pub use progress::Progress;
pub use table_reader::Written;
