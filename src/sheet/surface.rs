//! One frame as a surface: heights over reference sites, modes, and the metric of its cell.

use num_complex::Complex64;

/// What every measurement sees of one frame.
#[derive(Clone, Debug, PartialEq)]
pub struct Surface {
    /// h_q of each mode of the run's `ModeSet`, in A: (1/N) sum_j h_j exp(-i q.R_j).
    pub modes: Vec<Complex64>,
    /// Scalar products a.a, a.b, b.b of the in-plane cell vectors, in A^2.
    pub metric: [f64; 3],
    /// Displacement of the sheet's centre along the normal since the reference, in A, modulo the cell.
    pub mean_height: f64,
    /// Sines of the angles that a and b make with the plane of the mean cell.
    pub tilt: [f64; 2],
    /// Mean slope of the heights along axis 1 and axis 2 (least-squares plane); reported, never subtracted.
    pub slope: [f64; 2],
    /// The first atom found away from its site, where any.
    pub hopped: Option<usize>,
}

impl Surface {
    /// Projected area |a x b| in A^2.
    #[must_use]
    pub fn area(&self) -> f64 {
        let [aa, ab, bb] = self.metric;
        (aa * bb - ab * ab).sqrt()
    }
}
