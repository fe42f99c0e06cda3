//! How the sheet lies in its cell: reported, and never subtracted from heights.

use super::{Measured, Measurement, Series};
use crate::sheet::Surface;

/// Series `mean_height_A` (the centre along the normal), `tilt_a`, `tilt_b` (sines of the angles of a and b with the
/// mean plane), `slope_1`, `slope_2` (least-squares plane through the heights).
#[derive(Default)]
pub struct Tilt {
    values: Vec<f64>,
}

impl Measurement for Tilt {
    fn observe(&mut self, surface: &Surface) {
        self.values.push(surface.mean_height);
        self.values.extend(surface.tilt);
        self.values.extend(surface.slope);
    }

    fn close(self: Box<Self>) -> Measured {
        let columns = ["mean_height_A", "tilt_a", "tilt_b", "slope_1", "slope_2"];
        Measured {
            series: Some(Series::from_rows(&columns, self.values)),
            sums: None,
        }
    }
}
