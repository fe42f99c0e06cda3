//! The height modes of a periodic box that a theory sums over.

use super::{BrillouinZone, PlaneCell};

/// Independent height modes of a periodic box (q and -q once, none at q = 0) and their weights in sums over modes.
#[derive(Clone, Debug, PartialEq)]
pub struct BoxModes {
    /// The box.
    pub cell: PlaneCell,
    /// Integers (m1, m2) of each mode: q = m1 b1 + m2 b2 with b1, b2 the reciprocal vectors of the cell.
    pub integers: Vec<[i32; 2]>,
    /// Weight of each mode in the sums: 1, or less on the edge of the zone (see [`BrillouinZone::weight`]).
    pub weights: Vec<f64>,
}

impl BoxModes {
    /// Every mode of `cell` inside the first Brillouin zone `zone`, weighed by it.
    #[must_use]
    pub fn in_zone(cell: PlaneCell, zone: &BrillouinZone) -> Self {
        Self::weighed(cell, zone.circumradius() * (1.0 + 1e-9), |q| zone.weight(q))
    }

    /// Every mode of `cell` with |q| < `cut` (1/A), weight 1.
    #[must_use]
    pub fn within(cell: PlaneCell, cut: f64) -> Self {
        Self::weighed(cell, cut, |q| if q[0].hypot(q[1]) < cut { 1.0 } else { 0.0 })
    }

    fn weighed(cell: PlaneCell, cut: f64, weight: impl Fn([f64; 2]) -> f64) -> Self {
        // |m1| = |q . a|/2 pi <= |q| |a|/2 pi.
        let most =
            |vector: [f64; 2]| (cut * vector[0].hypot(vector[1]) / std::f64::consts::TAU).floor() as i32 + 1;
        let (most1, most2) = (most(cell.a), most(cell.b));
        let mut modes = Self {
            cell,
            integers: Vec::new(),
            weights: Vec::new(),
        };
        for m1 in 0..=most1 {
            for m2 in -most2..=most2 {
                if m1 == 0 && m2 <= 0 {
                    continue;
                }
                let weight = weight(cell.wave_vector([m1, m2]));
                if weight > 0.0 {
                    modes.integers.push([m1, m2]);
                    modes.weights.push(weight);
                }
            }
        }
        modes
    }

    /// Number of independent modes.
    #[must_use]
    pub fn len(&self) -> usize {
        self.integers.len()
    }

    /// Whether there is no mode.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.integers.is_empty()
    }

    /// Wave vector of each mode, in 1/A.
    #[must_use]
    pub fn wave_vectors(&self) -> Vec<[f64; 2]> {
        self.integers.iter().map(|&m| self.cell.wave_vector(m)).collect()
    }
}
