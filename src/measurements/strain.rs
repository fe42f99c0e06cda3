//! The metric of the in-plane cell, from which strain follows about any reference.

use super::{Measured, Measurement, Series};
use crate::sheet::Surface;

/// Series `aa_A2`, `ab_A2`, `bb_A2`: a.a, a.b, b.b of each frame in A^2. The metric h^T h is all that the strain
/// (h0^-T h^T h h0^-1 - 1)/2 needs, and does not change when the cell turns in space.
#[derive(Default)]
pub struct Strain {
    values: Vec<f64>,
}

impl Measurement for Strain {
    fn observe(&mut self, surface: &Surface) {
        self.values.extend(surface.metric);
    }

    fn close(self: Box<Self>) -> Measured {
        Measured {
            series: Some(Series::from_rows(&["aa_A2", "ab_A2", "bb_A2"], self.values)),
            sums: None,
        }
    }
}
