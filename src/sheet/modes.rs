//! The wave vectors of the cell, keyed by integers because their lengths breathe with it.

use serde::{Deserialize, Serialize};

/// How many of the longest waves keep their whole series of h (contract, "Words").
pub const LONG_WAVES: usize = 32;

/// The independent modes of a periodic sheet: q and -q are one mode and stand once.
///
/// Mode m = (m1, m2) is the wave vector q = m1 b1 + m2 b2, with b1, b2 the reciprocal vectors of a, b (2 pi included).
/// The first non-zero of (m1, m2) is positive. Sorted by |q| on the reference cell, ties by m, so that the first
/// [`LONG_WAVES`] are the longest waves.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct ModeSet {
    /// The integers of each mode.
    pub integers: Vec<[i32; 2]>,
    /// Weight of each mode in a sum over the first Brillouin zone of the primitive lattice: 1 inside, 0 outside, and
    /// on the zone's edge one over the number of equivalent modes.
    pub zone_weight: Vec<f64>,
}

impl ModeSet {
    /// Number of modes.
    #[must_use]
    pub fn len(&self) -> usize {
        self.integers.len()
    }

    /// Whether there is no mode.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.integers.is_empty()
    }
}
