//! The wave vectors of the cell, keyed by integers because their lengths breathe with it.

use serde::{Deserialize, Serialize};

use crate::theory::{BrillouinZone, PlaneCell};

/// How many of the longest waves keep their whole series of h.
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
    /// All independent modes of `cell` in the first zone, and those up to `q_max` (1/A) beyond it.
    #[must_use]
    pub fn new(cell: PlaneCell, zone: &BrillouinZone, q_max: Option<f64>) -> Self {
        let reach = q_max.unwrap_or(0.0).max(zone.circumradius()) * (1.0 + 1e-9);
        // q . a = 2 pi m1, so |m1| is at most |q| |a| / 2 pi; likewise m2.
        let most =
            [cell.a, cell.b].map(|v| (reach * v[0].hypot(v[1]) / std::f64::consts::TAU).floor() as i32);
        let mut modes: Vec<(f64, [i32; 2], f64)> = Vec::new();
        for m1 in 0..=most[0] {
            let first = if m1 == 0 { 1 } else { -most[1] };
            for m2 in first..=most[1] {
                let q = cell.wave_vector([m1, m2]);
                let length = q[0].hypot(q[1]);
                let weight = zone.weight(q);
                if weight > 0.0 || q_max.is_some_and(|limit| length <= limit) {
                    modes.push((length, [m1, m2], weight));
                }
            }
        }
        // Lengths equal but for rounding must not be ordered by it: compare to nine digits, then by the integers.
        let key = |length: f64| (length / reach * 1e9).round() as i64;
        modes.sort_by_key(|&(length, m, _)| (key(length), m));
        Self {
            integers: modes.iter().map(|mode| mode.1).collect(),
            zone_weight: modes.iter().map(|mode| mode.2).collect(),
        }
    }

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
