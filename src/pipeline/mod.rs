//! The pipeline file as written, the plan as resolved, and the run itself.
