//! The periodic box in the plane, and its wave vectors.

use serde::{Deserialize, Serialize};

/// The in-plane cell: a along axis 1, b in the plane; the coordinates of every two-dimensional formula.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct PlaneCell {
    /// a = (a1, 0), in A.
    pub a: [f64; 2],
    /// b = (b1, b2), in A, b2 > 0.
    pub b: [f64; 2],
}

impl PlaneCell {
    /// From the scalar products a.a, a.b, b.b in A^2, which do not change when the cell turns in space.
    #[must_use]
    pub fn from_metric(aa: f64, ab: f64, bb: f64) -> Self {
        let length_a = aa.sqrt();
        let along = ab / length_a;
        Self {
            a: [length_a, 0.0],
            b: [along, (bb - along * along).sqrt()],
        }
    }

    /// Area in A^2.
    #[must_use]
    pub fn area(&self) -> f64 {
        self.a[0] * self.b[1] - self.a[1] * self.b[0]
    }

    /// The reciprocal vectors b1, b2 in 1/A, 2 pi included: a . b1 = 2 pi, b . b1 = 0.
    #[must_use]
    pub fn reciprocal(&self) -> [[f64; 2]; 2] {
        let factor = std::f64::consts::TAU / self.area();
        [
            [factor * self.b[1], -factor * self.b[0]],
            [-factor * self.a[1], factor * self.a[0]],
        ]
    }

    /// The wave vector m1 b1 + m2 b2 in 1/A.
    #[must_use]
    pub fn wave_vector(&self, m: [i32; 2]) -> [f64; 2] {
        let [b1, b2] = self.reciprocal();
        let (m1, m2) = (f64::from(m[0]), f64::from(m[1]));
        [m1 * b1[0] + m2 * b2[0], m1 * b1[1] + m2 * b2[1]]
    }
}
