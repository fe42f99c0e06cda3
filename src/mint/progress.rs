//! Who watches a set being made.

/// Is told how far the work is. Calls may come from several threads.
pub trait Progress: Sync {
    /// So many more trajectories of hybrid Monte Carlo are to be made, in all.
    fn work_planned(&self, trajectories: usize);

    /// So many more are made.
    fn work_done(&self, trajectories: usize);

    /// The set is finished, whether it went well or not.
    fn finished(&self);

    /// Something worth knowing.
    fn note(&self, message: &str);
}
