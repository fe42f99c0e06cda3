//! Area per atom against temperature, with errors and the fitted curve.

use plotters::style::Color;

use crate::report::SheetReport;

use super::axis::{Axis, Scale};
use super::canvas::{Canvas, Figure};
use super::marker::Marker;
use super::plot_frame::{INK, LEGEND_LINE, PlotFrame, draw_legend_line};

/// The figure of one sheet; `None` where no run has an area.
#[must_use]
pub fn area_figure(sheet: &SheetReport<'_>) -> Option<Figure> {
    let runs: Vec<AreaPoint> = sheet
        .estimates
        .runs
        .iter()
        .filter(|run| run.atoms > 0 && run.area.value.is_finite())
        .map(|run| AreaPoint {
            temperature: run.temperature,
            area: run.area.value / run.atoms as f64,
            error: Some(run.area.error / run.atoms as f64).filter(|error| error.is_finite()),
            free: !run.cell_is_fixed(),
        })
        .collect();
    let curve = sheet.area_curve();
    let curve_areas = curve.iter().flat_map(|curve| curve.area_per_atom.iter().copied());
    let curve_temperatures = curve.iter().flat_map(|curve| curve.temperature.iter().copied());
    let temperatures = runs.iter().map(|run| run.temperature).chain(curve_temperatures);
    let areas = runs.iter().flat_map(AreaPoint::extent).chain(curve_areas);
    let x = Axis::around(Scale::Linear, temperatures, 0.05)?;
    let y = Axis::around(Scale::Linear, areas, 0.08)?;
    let frame = PlotFrame::new(x, y, 4);
    let title = format!("{}: projected area against temperature", sheet.estimates.name);
    Some(Canvas::figure(&title, frame.size(), |canvas| {
        frame.draw_grid(canvas);
        if let Some(curve) = curve {
            let places: Vec<_> = curve
                .temperature
                .iter()
                .zip(&curve.area_per_atom)
                .map(|(temperature, area)| frame.place(*temperature, *area))
                .collect();
            canvas.line(&places, INK.mix(0.75), 1.6);
        }
        let marker = Marker::of_run(0);
        for run in &runs {
            if let Some(error) = run.error {
                let low = frame.place(run.temperature, run.area - error);
                let high = frame.place(run.temperature, run.area + error);
                marker.draw_error_bar(canvas, low, high, run.free);
            }
            marker.draw(canvas, frame.place(run.temperature, run.area), run.free);
        }
        frame.draw_axes(
            canvas,
            &title,
            "temperature T (K)",
            "area per atom (\u{c5}\u{b2})",
        );
        draw_legend(canvas, marker, &runs, curve.is_some());
    }))
}

struct AreaPoint {
    temperature: f64,
    area: f64,
    error: Option<f64>,
    /// Whether the cell found its area, rather than being held at one.
    free: bool,
}

impl AreaPoint {
    fn extent(&self) -> [f64; 2] {
        let error = self.error.unwrap_or(0.0);
        [self.area - error, self.area + error]
    }
}

fn draw_legend(canvas: &Canvas<'_>, marker: Marker, runs: &[AreaPoint], fitted: bool) {
    let mut line = 0;
    if runs.iter().any(|run| run.free) {
        draw_legend_line(canvas, line, "mean of a run", |place| {
            marker.draw(canvas, place, true);
        });
        line += 1;
    }
    if runs.iter().any(|run| !run.free) {
        draw_legend_line(canvas, line, "held by a fixed cell", |place| {
            marker.draw(canvas, place, false);
        });
        line += 1;
    }
    if fitted {
        draw_legend_line(canvas, line, "fit", |(x, y)| {
            canvas.line(&[(x - 14.0, y), (x + 14.0, y)], INK.mix(0.75), 1.6);
        });
        line += 1;
    }
    draw_legend_line(canvas, line, "bar: 1 standard error", |(x, y)| {
        let half = 0.35 * LEGEND_LINE;
        marker.draw_error_bar(canvas, (x, y + half), (x, y - half), true);
    });
}
