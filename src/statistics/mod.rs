//! Series algorithms: numbers in, numbers out.

mod autocorrelation;
mod block_mean;
mod blocking;
mod equilibration;
mod jackknife;
mod pooled_blocks;
mod split_r_hat;

pub use autocorrelation::{Autocorrelation, autocovariance, integrated_autocorrelation};
pub use block_mean::{BlockMean, weighted_block_mean};
pub use blocking::{BlockingLevel, blocking_levels};
pub use equilibration::equilibration_cut;
pub use jackknife::block_jackknife;
pub use pooled_blocks::{PooledBlocks, neighbour_mean, pooled_block_correlation};
pub use split_r_hat::split_r_hat;
