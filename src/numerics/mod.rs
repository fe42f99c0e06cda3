//! Named numerical algorithms, each with an oracle test.

mod anderson;
mod direct_sum;
mod fast_length;
mod linear_least_squares;
mod nonuniform_fft;

pub use anderson::{AndersonSettings, FixedPoint, fixed_point};
pub use direct_sum::{DirectSum, mode_by_definition, modes_of_moving_points};
pub use fast_length::fast_length;
pub use linear_least_squares::LinearLeastSquares;
pub use nonuniform_fft::{NonuniformFft, Scratch};
