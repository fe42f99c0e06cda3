//! Measurements: each observes the surfaces of a block and closes as one [`Record`].

mod record;

pub use record::{BlockRecord, History, LAGS, ModeSums, Record, Series};
