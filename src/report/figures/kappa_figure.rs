//! kappa(q) of every run of a sheet, with errors, the fitted curves and the fit's window.

use plotters::style::{Color, RGBAColor};

use crate::estimates::RunEstimates;
use crate::fits::PlateCurve;
use crate::report::spectrum_table::is_inside;
use crate::report::{KappaPoint, SheetReport, kappa_points};

use super::axis::{Axis, Scale};
use super::canvas::{Canvas, Figure};
use super::marker::Marker;
use super::plot_frame::{LEGEND_LINE, PlotFrame, draw_legend_line};

/// Opacity of the window where the windows of all runs overlap.
const WINDOW_OPACITY: f64 = 0.13;
/// Lines of the legend below the runs: a gap and four explanations.
const EXPLANATIONS: usize = 5;

/// One run as the figure draws it.
struct Drawn<'a> {
    label: String,
    marker: Marker,
    points: Vec<Point>,
    curve: Option<&'a PlateCurve>,
}

/// A point with a positive kappa, the only kind that a logarithmic axis shows.
struct Point {
    q: f64,
    kappa: f64,
    error: Option<f64>,
    used: bool,
}

/// The figure of one sheet; `None` where no run has a positive kappa.
#[must_use]
pub fn kappa_figure(sheet: &SheetReport<'_>) -> Option<Figure> {
    let runs: Vec<Drawn<'_>> = sheet
        .estimates
        .runs
        .iter()
        .enumerate()
        .map(|(at, run)| drawn(at, run, sheet.plate_curve(&run.name), sheet.q_max))
        .collect();
    let points = || runs.iter().flat_map(|run| &run.points);
    let x = Axis::around(Scale::Logarithmic, points().map(|point| point.q), 0.04)?;
    let y = Axis::around(Scale::Logarithmic, points().flat_map(extent), 0.06)?;
    let frame = PlotFrame::new(x, y, runs.len() + EXPLANATIONS);
    let name = &sheet.estimates.name;
    let title = format!("{name}: bending rigidity against wave vector");
    Some(Canvas::figure(&title, frame.size(), |canvas| {
        draw_windows(canvas, &frame, &runs);
        frame.draw_grid(canvas);
        for run in &runs {
            draw_points(canvas, &frame, run);
        }
        for run in &runs {
            draw_curve(canvas, &frame, run);
        }
        frame.draw_axes(
            canvas,
            &title,
            "wave vector q (1/\u{c5})",
            "bending rigidity \u{3ba}(q) (eV)",
        );
        draw_legend(canvas, &runs);
    }))
}

fn drawn<'a>(at: usize, run: &RunEstimates, curve: Option<&'a PlateCurve>, q_max: Option<f64>) -> Drawn<'a> {
    let shown = |point: &&KappaPoint| q_max.is_none_or(|limit| point.q <= limit);
    Drawn {
        label: run_label(run),
        marker: Marker::of_run(at),
        points: kappa_points(run, curve)
            .iter()
            .filter(shown)
            .filter_map(positive)
            .collect(),
        curve,
    }
}

fn positive(point: &KappaPoint) -> Option<Point> {
    let kappa = point.kappa.filter(|kappa| *kappa > 0.0)?;
    Some(Point {
        q: point.q,
        kappa,
        error: point.error,
        used: point.used,
    })
}

/// The run's name, and its temperature where the name does not say it.
fn run_label(run: &RunEstimates) -> String {
    let temperature = format!("{}", run.temperature);
    if run.name == format!("{temperature}K") || run.name == format!("{temperature} K") {
        format!("{temperature} K")
    } else if run.name.contains(&format!("{temperature}K")) {
        run.name.clone()
    } else {
        format!("{}, {temperature} K", run.name)
    }
}

/// What the vertical axis must show of a point: its bar, but no more than a factor of two to either side, so that one
/// point without statistics does not squeeze all others.
fn extent(point: &Point) -> [f64; 2] {
    let error = point.error.unwrap_or(0.0);
    [
        (point.kappa - error).max(0.5 * point.kappa),
        (point.kappa + error).min(2.0 * point.kappa),
    ]
}

fn window_colour(runs: &[Drawn<'_>]) -> RGBAColor {
    let windows = runs.iter().filter(|run| run.curve.is_some()).count().max(1);
    // Layers of opacity p leave (1 - p)^n of the white beneath.
    let layer = 1.0 - (1.0 - WINDOW_OPACITY).powf(1.0 / windows as f64);
    RGBAColor(120, 130, 145, (layer * 1e4).round() / 1e4)
}

fn draw_windows(canvas: &Canvas<'_>, frame: &PlotFrame, runs: &[Drawn<'_>]) {
    let colour = window_colour(runs);
    for curve in runs.iter().filter_map(|run| run.curve) {
        // A little beyond the outermost points, so that they lie inside.
        let [first, last] = curve.window;
        frame.shade_between(canvas, [first / 1.015, last * 1.015], colour);
    }
}

fn draw_points(canvas: &Canvas<'_>, frame: &PlotFrame, run: &Drawn<'_>) {
    // Points outside the window first, so that those used lie on top.
    for used in [false, true] {
        for point in run.points.iter().filter(|point| point.used == used) {
            if let Some(error) = point.error {
                let low = frame.place(point.q, point.kappa - error);
                let high = frame.place(point.q, point.kappa + error);
                run.marker.draw_error_bar(canvas, low, high, used);
            }
            run.marker.draw(canvas, frame.place(point.q, point.kappa), used);
        }
    }
}

/// The fitted curve over its window, where both axes show it: beyond the window the fit says nothing.
fn draw_curve(canvas: &Canvas<'_>, frame: &PlotFrame, run: &Drawn<'_>) {
    let Some(curve) = run.curve else { return };
    let places: Vec<_> = curve
        .q
        .iter()
        .zip(&curve.kappa)
        .filter(|(q, kappa)| frame.x.shows(**q) && frame.y.shows(**kappa) && is_inside(**q, curve.window))
        .map(|(q, kappa)| frame.place(*q, *kappa))
        .collect();
    if places.len() > 1 {
        canvas.line(&places, run.marker.colour.mix(0.9), 1.6);
    }
}

fn draw_legend(canvas: &Canvas<'_>, runs: &[Drawn<'_>]) {
    for (line, run) in runs.iter().enumerate() {
        draw_legend_line(canvas, line, &run.label, |(x, y)| {
            if run.curve.is_some() {
                canvas.line(&[(x - 14.0, y), (x + 14.0, y)], run.marker.colour.mix(0.9), 1.6);
            }
            run.marker.draw(canvas, (x, y), true);
        });
    }
    let first = runs.len() + 1;
    let grey = Marker::grey();
    draw_legend_line(canvas, first, "used in the fit", |place| {
        grey.draw(canvas, place, true);
    });
    draw_legend_line(canvas, first + 1, "not used", |place| {
        grey.draw(canvas, place, false);
    });
    draw_legend_line(canvas, first + 2, "window of the fit", |(x, y)| {
        let half = 0.3 * LEGEND_LINE;
        let colour = RGBAColor(120, 130, 145, WINDOW_OPACITY);
        canvas.rectangle((x - 14.0, y - half), (x + 14.0, y + half), colour);
    });
    draw_legend_line(canvas, first + 3, "bar: 1 standard error", |(x, y)| {
        let half = 0.35 * LEGEND_LINE;
        grey.draw_error_bar(canvas, (x, y + half), (x, y - half), true);
    });
}
