//! The projected area of the cell.

use super::{Measured, Measurement, Series};
use crate::sheet::Surface;

/// Series `area_A2`: |a x b| of each frame in A^2.
#[derive(Default)]
pub struct Area {
    values: Vec<f64>,
}

impl Measurement for Area {
    fn observe(&mut self, surface: &Surface) {
        self.values.push(surface.area());
    }

    fn close(self: Box<Self>) -> Measured {
        Measured {
            series: Some(Series::from_rows(&["area_A2"], self.values)),
            sums: None,
        }
    }
}
