//! A drawing surface over the SVG back end: positions in pixels of the figure, colours, lines, text.

use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::FontTransform;
use plotters::style::text_anchor::{HPos, Pos, VPos};

/// A finished figure.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Figure {
    /// The SVG document.
    pub svg: String,
}

/// The back end places everything on whole units, so a figure is drawn this many times larger and shown smaller: lines
/// and markers then sit to an eighth of a pixel.
const FINE: f64 = 8.0;

/// The font size the back end writes is the wanted one over this number.
const BACK_END_FONT_RATIO: f64 = 1.24;

/// A drawing to memory has no step that can fail.
const IN_MEMORY: &str = "drawing to memory cannot fail";

/// A place in the figure, in pixels from its upper left corner.
pub(super) type Place = (f64, f64);

/// Which end of a text stands at its place.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Anchor {
    /// The middle of its left end.
    Left,
    /// The middle of its right end.
    Right,
    /// Its middle.
    Centre,
    /// Its middle, the text running upwards.
    Upwards,
}

/// A drawing surface.
pub(super) struct Canvas<'a> {
    area: DrawingArea<SVGBackend<'a>, Shift>,
}

impl Canvas<'_> {
    /// Draws a figure of `size` pixels; `title` is what a screen reader says of it.
    pub fn figure(title: &str, size: (u32, u32), draw: impl FnOnce(&Canvas<'_>)) -> Figure {
        let fine = (size.0 * FINE as u32, size.1 * FINE as u32);
        let mut text = String::new();
        {
            let canvas = Canvas {
                area: SVGBackend::with_string(&mut text, fine).into_drawing_area(),
            };
            canvas.area.fill(&WHITE).expect(IN_MEMORY);
            draw(&canvas);
            canvas.area.present().expect(IN_MEMORY);
        }
        let (_, body) = text.split_once('\n').unwrap_or(("", &text));
        let title = maud::html! { title { (title) } }.into_string();
        let svg = format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{}\" height=\"{}\" viewBox=\"0 0 {} {}\" \
             role=\"img\">\n{title}\n{body}",
            size.0, size.1, fine.0, fine.1
        );
        Figure { svg }
    }

    /// A line through `places`, `width` pixels wide.
    pub fn line(&self, places: &[Place], colour: RGBAColor, width: f64) {
        let places: Vec<(i32, i32)> = places.iter().copied().map(fine).collect();
        let style = colour.stroke_width((width * FINE).round() as u32);
        self.area.draw(&PathElement::new(places, style)).expect(IN_MEMORY);
    }

    /// A filled polygon.
    pub fn polygon(&self, corners: &[Place], colour: RGBAColor) {
        let corners: Vec<(i32, i32)> = corners.iter().copied().map(fine).collect();
        self.area
            .draw(&Polygon::new(corners, colour.filled()))
            .expect(IN_MEMORY);
    }

    /// A filled rectangle between two opposite corners.
    pub fn rectangle(&self, upper_left: Place, lower_right: Place, colour: RGBAColor) {
        let corners = [fine(upper_left), fine(lower_right)];
        self.area
            .draw(&Rectangle::new(corners, colour.filled()))
            .expect(IN_MEMORY);
    }

    /// A text of `size` pixels.
    pub fn text(&self, text: &str, place: Place, size: f64, anchor: Anchor, colour: RGBAColor) {
        let horizontal = match anchor {
            Anchor::Left => HPos::Left,
            Anchor::Right => HPos::Right,
            Anchor::Centre | Anchor::Upwards => HPos::Center,
        };
        let turn = match anchor {
            Anchor::Upwards => FontTransform::Rotate270,
            _ => FontTransform::None,
        };
        let style = TextStyle::from(("sans-serif", size * FINE * BACK_END_FONT_RATIO).into_font())
            .transform(turn)
            .color(&colour)
            .pos(Pos::new(horizontal, VPos::Center));
        self.area
            .draw(&Text::new(text.to_owned(), fine(place), style))
            .expect(IN_MEMORY);
    }
}

fn fine((x, y): Place) -> (i32, i32) {
    ((x * FINE).round() as i32, (y * FINE).round() as i32)
}
