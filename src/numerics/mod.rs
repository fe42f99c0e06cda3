//! Named numerical algorithms, each with an oracle test.

mod direct_sum;
mod nonuniform_fft;

pub use direct_sum::{DirectSum, mode_by_definition, modes_of_moving_points};
pub use nonuniform_fft::{NonuniformFft, Scratch};
