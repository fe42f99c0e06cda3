//! The frame of a plot: axes with ticks and labels, the title, and the legend beside it, never over the data.

use plotters::style::RGBAColor;

use super::axis::Axis;
use super::canvas::{Anchor, Canvas, Place};

/// Width of every figure in pixels.
pub(super) const WIDTH: u32 = 890;
/// Height of a figure whose legend fits.
const HEIGHT: u32 = 520;
const LEFT: f64 = 94.0;
const RIGHT: f64 = 208.0;
/// Where the plot ends on the right.
const END: f64 = WIDTH as f64 - RIGHT;
const TOP: f64 = 48.0;
const BOTTOM: f64 = 64.0;
/// Height of a line of the legend.
pub(super) const LEGEND_LINE: f64 = 22.0;
/// Most characters of a legend line that fit beside the plot.
const LEGEND_CHARACTERS: usize = 22;

pub(super) const INK: RGBAColor = RGBAColor(34, 34, 34, 1.0);
const GRID: RGBAColor = RGBAColor(216, 216, 216, 1.0);

/// Axes in their place.
pub(super) struct PlotFrame {
    pub x: Axis,
    pub y: Axis,
    height: f64,
}

impl PlotFrame {
    /// A frame beside a legend of so many lines.
    pub fn new(x: Axis, y: Axis, legend_lines: usize) -> Self {
        let wanted = TOP + BOTTOM + LEGEND_LINE * legend_lines as f64;
        Self {
            x,
            y,
            height: wanted.max(f64::from(HEIGHT)).ceil(),
        }
    }

    /// Size of the figure in pixels.
    pub fn size(&self) -> (u32, u32) {
        (WIDTH, self.height as u32)
    }

    /// Where a point of the data stands.
    pub fn place(&self, x: f64, y: f64) -> Place {
        (
            LEFT + self.x.position(x) * (END - LEFT),
            self.bottom() - self.y.position(y) * (self.bottom() - TOP),
        )
    }

    fn bottom(&self) -> f64 {
        self.height - BOTTOM
    }

    /// A band over the whole height between two values of x.
    pub fn shade_between(&self, canvas: &Canvas<'_>, [first, last]: [f64; 2], colour: RGBAColor) {
        let (left, _) = self.place(first, 0.0);
        let (right, _) = self.place(last, 0.0);
        canvas.rectangle((left, TOP), (right, self.bottom()), colour);
    }

    /// Grid lines, to be drawn under the data.
    pub fn draw_grid(&self, canvas: &Canvas<'_>) {
        for (tick, _) in self.x.labelled_ticks() {
            let (x, _) = self.place(tick, 0.0);
            canvas.line(&[(x, TOP), (x, self.bottom())], GRID, 0.75);
        }
        for (tick, _) in self.y.labelled_ticks() {
            let y = self.y_of(tick);
            canvas.line(&[(LEFT, y), (END, y)], GRID, 0.75);
        }
    }

    /// Border, ticks, labels and title, to be drawn over the data.
    pub fn draw_axes(&self, canvas: &Canvas<'_>, title: &str, x_label: &str, y_label: &str) {
        const TICK: f64 = 6.0;
        const SMALL_TICK: f64 = 3.0;
        let (right, bottom) = (END, self.bottom());
        let border = [
            (LEFT, TOP),
            (right, TOP),
            (right, bottom),
            (LEFT, bottom),
            (LEFT, TOP),
        ];
        canvas.line(&border, INK, 1.0);
        for tick in self.x.small_ticks() {
            let (x, _) = self.place(tick, 0.0);
            canvas.line(&[(x, bottom), (x, bottom - SMALL_TICK)], INK, 0.75);
        }
        for tick in self.y.small_ticks() {
            let y = self.y_of(tick);
            canvas.line(&[(LEFT, y), (LEFT + SMALL_TICK, y)], INK, 0.75);
        }
        for (tick, label) in self.x.labelled_ticks() {
            let (x, _) = self.place(tick, 0.0);
            canvas.line(&[(x, bottom), (x, bottom - TICK)], INK, 1.0);
            canvas.text(&label, (x, bottom + 15.0), 13.0, Anchor::Centre, INK);
        }
        for (tick, label) in self.y.labelled_ticks() {
            let y = self.y_of(tick);
            canvas.line(&[(LEFT, y), (LEFT + TICK, y)], INK, 1.0);
            canvas.text(&label, (LEFT - 8.0, y), 13.0, Anchor::Right, INK);
        }
        let middle = f64::midpoint(LEFT, right);
        canvas.text(title, (LEFT, TOP - 20.0), 16.0, Anchor::Left, INK);
        canvas.text(x_label, (middle, self.height - 20.0), 14.0, Anchor::Centre, INK);
        canvas.text(
            y_label,
            (22.0, f64::midpoint(TOP, bottom)),
            14.0,
            Anchor::Upwards,
            INK,
        );
    }

    fn y_of(&self, tick: f64) -> f64 {
        self.bottom() - self.y.position(tick) * (self.bottom() - TOP)
    }
}

/// A line of the legend: `draw` puts a sample around its place, `text` stands beside it.
pub(super) fn draw_legend_line(canvas: &Canvas<'_>, line: usize, text: &str, draw: impl FnOnce(Place)) {
    let y = TOP + LEGEND_LINE * (line as f64 + 0.5);
    draw((END + 26.0, y));
    canvas.text(&shortened(text), (END + 48.0, y), 13.0, Anchor::Left, INK);
}

/// At most [`LEGEND_CHARACTERS`], the middle of a longer text left out: names of runs differ at their ends.
fn shortened(text: &str) -> String {
    let characters: Vec<char> = text.chars().collect();
    if characters.len() <= LEGEND_CHARACTERS {
        return text.to_owned();
    }
    let head = LEGEND_CHARACTERS / 2;
    let tail = LEGEND_CHARACTERS - head - 1;
    let start: String = characters[..head].iter().collect();
    let end: String = characters[characters.len() - tail..].iter().collect();
    format!("{start}\u{2026}{end}")
}
