//! What a running pipeline tells whoever watches it. Nothing here prints: the command line decides what is shown.

/// Somebody who watches a run. Called from worker threads.
pub trait Progress: Sync {
    /// A run of so many frames starts. Runs follow one another.
    fn run_started(&self, sheet: &str, run: &str, frames: usize);

    /// So many more frames, of so many atoms each, are measured.
    fn frames_done(&self, frames: usize, atoms: usize);

    /// The run that was started last is finished, whether it went well or not.
    fn run_finished(&self);

    /// Something that the user should act on.
    fn warning(&self, message: &str);

    /// Something worth knowing.
    fn note(&self, message: &str);
}
