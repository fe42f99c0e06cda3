//! The colour and the shape that tell one run from another.

use std::f64::consts::{FRAC_PI_2, FRAC_PI_4, TAU};

use plotters::style::{Color, RGBAColor, RGBColor};

use super::canvas::{Canvas, Place};

/// Colours that people with any common colour blindness tell apart, dark enough for lines on white, from cool to warm
/// (Okabe and Ito, Color Universal Design (2008), without the yellow).
const COLOURS: [RGBColor; 7] = [
    RGBColor(0, 114, 178),
    RGBColor(86, 180, 233),
    RGBColor(0, 158, 115),
    RGBColor(230, 159, 0),
    RGBColor(213, 94, 0),
    RGBColor(204, 121, 167),
    RGBColor(0, 0, 0),
];

/// Corners of the shapes and the angle of their first corner; 0 corners is a circle. Six shapes and seven colours repeat
/// together only after 42 runs.
const SHAPES: [(u32, f64); 6] = [
    (0, 0.0),
    (4, FRAC_PI_4),
    (3, -FRAC_PI_2),
    (4, 0.0),
    (3, FRAC_PI_2),
    (5, -FRAC_PI_2),
];

/// How a run looks in a figure.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Marker {
    /// Its colour.
    pub colour: RGBColor,
    corners: u32,
    first_angle: f64,
}

impl Marker {
    /// The marker of the run at this place in its sheet.
    pub fn of_run(at: usize) -> Self {
        let (corners, first_angle) = SHAPES[at % SHAPES.len()];
        Self {
            colour: COLOURS[at % COLOURS.len()],
            corners,
            first_angle,
        }
    }

    /// The marker of explanations that belong to no run.
    pub fn grey() -> Self {
        Self {
            colour: RGBColor(90, 90, 90),
            ..Self::of_run(0)
        }
    }

    /// Draws it: filled for a point that was used, hollow and pale for one that was not.
    pub fn draw(&self, canvas: &Canvas<'_>, place: Place, used: bool) {
        let outline = self.outline(place);
        if used {
            canvas.polygon(&outline, self.colour.mix(1.0));
        } else {
            canvas.polygon(&outline, RGBAColor(255, 255, 255, 1.0));
            canvas.line(&closed(&outline), self.shade(used), 1.1);
        }
    }

    /// An error bar with caps between two places one above the other.
    pub fn draw_error_bar(&self, canvas: &Canvas<'_>, low: Place, high: Place, used: bool) {
        const CAP: f64 = 3.0;
        let shade = self.shade(used);
        let ((x, bottom), (_, top)) = (low, high);
        let (left, right) = (x - CAP, x + CAP);
        let stroke = [
            (left, top),
            (right, top),
            (x, top),
            (x, bottom),
            (left, bottom),
            (right, bottom),
        ];
        canvas.line(&stroke, shade, 1.1);
    }

    fn shade(&self, used: bool) -> RGBAColor {
        self.colour.mix(if used { 1.0 } else { 0.55 })
    }

    /// Shapes of about equal area: a circle of radius 4 pixels sets it.
    fn outline(&self, (x, y): Place) -> Vec<Place> {
        let (corners, radius) = match self.corners {
            0 => (16, 4.0),
            3 => (3, 5.6),
            4 => (4, 5.0),
            more => (more, 4.7),
        };
        (0..corners)
            .map(|corner| {
                let angle = self.first_angle + TAU * f64::from(corner) / f64::from(corners);
                (x + radius * angle.cos(), y + radius * angle.sin())
            })
            .collect()
    }
}

fn closed(outline: &[Place]) -> Vec<Place> {
    outline.iter().chain(outline.first()).copied().collect()
}
