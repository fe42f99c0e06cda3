//! The periodic cell of a frame.

use serde::{Deserialize, Serialize};

/// The periodic cell: three vectors in A.
///
/// `vectors[0]` is a, `vectors[1]` is b, `vectors[2]` is c, each in Cartesian components. After reading, the axis out
/// of the sheet's plane always stands last (see [`Cell::with_normal_last`]), so the sheet lies along a and b.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Cell {
    /// The vectors a, b, c, in A.
    pub vectors: [[f64; 3]; 3],
}

/// One of the three cell axes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum CellAxis {
    /// The first cell vector.
    A,
    /// The second cell vector.
    B,
    /// The third cell vector.
    C,
}

impl CellAxis {
    /// The letter used in pipeline files and messages.
    #[must_use]
    pub fn letter(self) -> char {
        match self {
            Self::A => 'a',
            Self::B => 'b',
            Self::C => 'c',
        }
    }
}

impl Cell {
    /// The same cell with its vectors permuted cyclically, so that `normal` becomes the third one. Handedness is kept.
    #[must_use]
    pub fn with_normal_last(&self, normal: CellAxis) -> Self {
        let [a, b, c] = self.vectors;
        let vectors = match normal {
            CellAxis::A => [b, c, a],
            CellAxis::B => [c, a, b],
            CellAxis::C => [a, b, c],
        };
        Self { vectors }
    }

    /// The vector a x b, in A^2: its length is the projected area.
    #[must_use]
    pub fn area_vector(&self) -> [f64; 3] {
        cross(self.vectors[0], self.vectors[1])
    }

    /// The projected area |a x b|, in A^2.
    #[must_use]
    pub fn area(&self) -> f64 {
        length(self.area_vector())
    }

    /// The volume a . (b x c), in A^3; negative for a left-handed cell.
    #[must_use]
    pub fn volume(&self) -> f64 {
        dot(self.area_vector(), self.vectors[2])
    }

    /// The height of the cell along its normal a x b, in A.
    #[must_use]
    pub fn height(&self) -> f64 {
        (self.volume() / self.area()).abs()
    }
}

/// Cross product of two Cartesian vectors.
#[must_use]
pub fn cross(u: [f64; 3], v: [f64; 3]) -> [f64; 3] {
    [
        u[1] * v[2] - u[2] * v[1],
        u[2] * v[0] - u[0] * v[2],
        u[0] * v[1] - u[1] * v[0],
    ]
}

/// Scalar product of two Cartesian vectors.
#[must_use]
pub fn dot(u: [f64; 3], v: [f64; 3]) -> f64 {
    u[0] * v[0] + u[1] * v[1] + u[2] * v[2]
}

/// Length of a Cartesian vector.
#[must_use]
pub fn length(u: [f64; 3]) -> f64 {
    dot(u, u).sqrt()
}
