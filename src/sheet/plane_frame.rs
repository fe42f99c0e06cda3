//! Atoms in the coordinates of the sheet: scaled along a and b, and a height above the plane they span.

use crate::frames::{Cell, cross, dot, length};

/// Maps Cartesian positions of one frame to sheet coordinates (s1, s2, h): r = s1 a + s2 b + h n, with the unit normal
/// n of the *mean* cell. Measured from the plane of the frame's own a and b, h is periodic even in a cell that tilts.
#[derive(Clone, Copy, Debug)]
pub struct PlaneFrame {
    /// Rows map a Cartesian vector to s1, s2 and h.
    rows: [[f64; 3]; 3],
    /// c in sheet coordinates: what one crossing of the cell's lid adds.
    pub lid: [f64; 3],
    /// Scalar products a.a, a.b, b.b, in A^2.
    pub metric: [f64; 3],
}

impl PlaneFrame {
    /// The coordinates of `cell` with heights along the unit vector `normal`.
    ///
    /// The cell must have a volume, and its plane must not contain `normal`; the reader checks the former.
    #[must_use]
    pub fn new(cell: &Cell, normal: [f64; 3]) -> Self {
        let [a, b, c] = cell.vectors;
        let volume = dot(cross(a, b), normal);
        let over = |v: [f64; 3]| v.map(|x| x / volume);
        let rows = [over(cross(b, normal)), over(cross(normal, a)), over(cross(a, b))];
        let mut frame = Self {
            rows,
            lid: [0.0; 3],
            metric: [dot(a, a), dot(a, b), dot(b, b)],
        };
        frame.lid = frame.coordinates(c);
        frame
    }

    /// (s1, s2, h) of a Cartesian position; h in A.
    #[must_use]
    pub fn coordinates(&self, position: [f64; 3]) -> [f64; 3] {
        self.rows.map(|row| dot(row, position))
    }

    /// Squared length, in A^2, of the in-plane part of the displacement (d1, d2) in scaled units.
    #[must_use]
    pub fn squared_in_plane(&self, d1: f64, d2: f64) -> f64 {
        let [aa, ab, bb] = self.metric;
        d1 * d1 * aa + 2.0 * d1 * d2 * ab + d2 * d2 * bb
    }

    /// In-plane scalar product, in A^2, of two displacements in scaled units.
    #[must_use]
    pub fn scalar_in_plane(&self, u: [f64; 2], v: [f64; 2]) -> f64 {
        let [aa, ab, bb] = self.metric;
        u[0] * v[0] * aa + (u[0] * v[1] + u[1] * v[0]) * ab + u[1] * v[1] * bb
    }
}

/// Unit vector along a x b.
#[must_use]
pub fn unit_normal(cell: &Cell) -> [f64; 3] {
    let area = cell.area_vector();
    let size = length(area);
    area.map(|x| x / size)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn coordinates_invert_the_cell() {
        let cell = Cell {
            vectors: [[10.0, 0.0, 0.0], [3.0, 8.0, 0.5], [1.0, -2.0, 30.0]],
        };
        let normal = unit_normal(&cell);
        let frame = PlaneFrame::new(&cell, normal);
        let [a, b, _] = cell.vectors;
        let (s1, s2, h) = (0.3, -1.2, 4.5);
        let position = std::array::from_fn(|i| s1 * a[i] + s2 * b[i] + h * normal[i]);
        let found = frame.coordinates(position);
        for (x, y) in found.iter().zip([s1, s2, h]) {
            assert!((x - y).abs() < 1e-13, "{found:?}");
        }
        assert!((frame.lid[2] - cell.height()).abs() < 1e-12);
    }
}
