//! The pipeline file as written, the plan as resolved, and the run itself: [`run`] is the whole of it.

mod block_store;
mod canonical;
mod diagnostics;
mod estimate;
mod file;
mod fingerprint;
mod gate;
mod gate_check;
mod held_tension;
mod inputs;
pub mod keys;
mod measure;
mod plan;
mod progress;
mod replicas;
mod resolve;
mod results;
mod run;
mod run_error;
mod run_log;
mod run_records;
mod stored_run;
mod survey;
mod table_reader;
mod wording;

pub use canonical::{MeasuredForm, MeasuredSettings};
pub use diagnostics::{Diagnostic, Diagnostics, Related, Severity};
pub use file::{PipelineFile, RunEntry, SheetEntry};
pub use gate::{ErrorLimit, GateLimit};
pub use measure::{MeasureOptions, MeasuredRun, RunLabel, SheetFacts, measure_run};
pub use plan::{Plan, ProjectOptions, RunPlan, SheetPlan, SpectrumOptions};
pub use progress::Progress;
pub use run::{RunOptions, RunOutcome, run};
pub use run_error::{RunError, RunProblem};
pub use survey::{RunSurvey, survey, survey_run};
pub use table_reader::Written;
