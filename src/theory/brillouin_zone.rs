//! The first Brillouin zone of a plane lattice, for sums over the independent waves of a crystal.

use super::PlaneCell;

/// How closely, relative to the zone's size, a wave vector must lie to the zone's edge to count as on it.
const EDGE_TOLERANCE: f64 = 1e-6;

/// The first Brillouin zone of a plane lattice: the wave vectors nearer to 0 than to any other reciprocal lattice point
/// (Wigner-Seitz cell of the reciprocal lattice; Ashcroft and Mermin, Solid State Physics, ch. 5).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct BrillouinZone {
    /// Reduced reciprocal vectors g1, g2 in 1/A: |g1| <= |g2| and 0 <= g1.g2 <= |g1|^2/2.
    reciprocal: [[f64; 2]; 2],
}

impl BrillouinZone {
    /// The zone of the lattice spanned by two primitive vectors in A, in any basis and of either handedness.
    ///
    /// The vectors must not be parallel: they span a lattice only then.
    #[must_use]
    pub fn of_lattice(primitive: [[f64; 2]; 2]) -> Self {
        let lattice = PlaneCell {
            a: primitive[0],
            b: primitive[1],
        };
        debug_assert!(lattice.area() != 0.0, "lattice vectors are parallel");
        Self {
            reciprocal: reduced(lattice.reciprocal()),
        }
    }

    /// Weight of wave vector `q` (1/A) in a sum over the zone: 1 inside, 0 outside, and on the edge one over the number of
    /// edge points that differ from it by a reciprocal lattice vector, so that the weights of equivalent points add to 1.
    #[must_use]
    pub fn weight(&self, q: [f64; 2]) -> f64 {
        let mut equivalent = 1.0;
        for g in self.neighbours() {
            // q.g / (|g|^2/2) is 1 on the line halfway to g.
            let position = 2.0 * dot(q, g) / dot(g, g);
            if position > 1.0 + EDGE_TOLERANCE {
                return 0.0;
            }
            if position > 1.0 - EDGE_TOLERANCE {
                equivalent += 1.0;
            }
        }
        1.0 / equivalent
    }

    /// The largest |q| in the zone, that of its farthest corner, in 1/A.
    #[must_use]
    pub fn circumradius(&self) -> f64 {
        // Corners are circumcentres of the triangle 0, g1, g2, which is not obtuse once the basis is reduced.
        let [g1, g2] = self.reciprocal;
        let third = [g2[0] - g1[0], g2[1] - g1[1]];
        let area = (g1[0] * g2[1] - g1[1] * g2[0]).abs();
        (dot(g1, g1) * dot(g2, g2) * dot(third, third)).sqrt() / (2.0 * area)
    }

    /// Area of the zone in 1/A^2: (2 pi)^2 over the area of the primitive cell.
    #[must_use]
    pub fn area(&self) -> f64 {
        let [g1, g2] = self.reciprocal;
        (g1[0] * g2[1] - g1[1] * g2[0]).abs()
    }

    /// The zone's reciprocal lattice vectors next to 0. Those of a reduced basis with coefficients in -1..=1 hold every
    /// one whose halfway line touches the zone.
    fn neighbours(&self) -> impl Iterator<Item = [f64; 2]> {
        let [g1, g2] = self.reciprocal;
        [
            [1.0, 0.0],
            [0.0, 1.0],
            [1.0, 1.0],
            [1.0, -1.0],
            [-1.0, 0.0],
            [0.0, -1.0],
            [-1.0, -1.0],
            [-1.0, 1.0],
        ]
        .into_iter()
        .map(move |[m, n]| [m * g1[0] + n * g2[0], m * g1[1] + n * g2[1]])
    }
}

/// Lagrange-Gauss reduction: the two shortest vectors of the lattice, turned so that their angle is not obtuse.
fn reduced([mut u, mut v]: [[f64; 2]; 2]) -> [[f64; 2]; 2] {
    if dot(u, u) > dot(v, v) {
        std::mem::swap(&mut u, &mut v);
    }
    loop {
        let multiple = (dot(u, v) / dot(u, u)).round();
        v = [v[0] - multiple * u[0], v[1] - multiple * u[1]];
        // Stops on equal lengths as well: swapping those back and forth would never end.
        if dot(v, v) >= dot(u, u) * (1.0 - f64::EPSILON * 8.0) {
            break;
        }
        std::mem::swap(&mut u, &mut v);
    }
    if dot(u, v) < 0.0 {
        v = [-v[0], -v[1]];
    }
    [u, v]
}

fn dot(u: [f64; 2], v: [f64; 2]) -> f64 {
    u[0] * v[0] + u[1] * v[1]
}
