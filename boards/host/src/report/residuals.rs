//! Figure 2: residuals against flow, in percent of flow and in units of their standard uncertainty.

use super::axis::Axis;
use super::characteristic::{finite, limits};
use super::figure::{Anchor, Figure, Frame, Rendition};
use super::label::Labels;
use super::numbers;
use crate::calibrate::outcome::{Calibration, ResidualRow};

/// Cubic metres a second in litres a minute.
pub const LITRES_PER_MINUTE: f64 = 60_000.0;
/// Residuals larger than this many standard uncertainties carry their line number.
const NOTABLE: f64 = 3.0;
/// At most this many labels.
const LABELS: usize = 8;
const HEIGHT: f64 = 270.0;

/// Draws the panel in percent of flow.
pub fn draw_percent(calibration: &Calibration) -> String {
    let title = "Residuals in percent of flow";
    let description = "Fitted over reference flow minus one, for each point, with bars of two standard uncertainties.";
    let mut figure = Figure::new("residuals-percent", Rendition::Panel, HEIGHT, title, description);
    let rows = &calibration.residuals;
    let reach = reach(rows, |row| percent(row).abs() + 2.0 * u_percent(row), 1e-9);
    let frame = frame(rows, reach);
    frame.draw(&mut figure, "reference flow, L/min", "residual, % of flow");
    zero_line(&mut figure, &frame);
    figure.crowd(rows.len());
    for row in rows {
        let (x, y, half) = (flow(row), percent(row), 2.0 * u_percent(row));
        if frame.y.contains(y) && half > 0.0 {
            figure.line(frame.at(x, y - half), frame.at(x, y + half), "bar");
        }
        frame.point(&mut figure, (x, y), row.used, &describe(row));
    }
    draw_labels(&mut figure, &frame, rows, percent, |row| {
        let half = 2.0 * u_percent(row);
        (percent(row) - half, percent(row) + half)
    });
    figure.finish()
}

/// Draws the panel in units of standard uncertainty.
pub fn draw_units(calibration: &Calibration) -> String {
    let title = "Residuals in units of their standard uncertainty";
    let description = "Each residual divided by its standard uncertainty; about 95 in 100 are expected within ±2.";
    let mut figure = Figure::new("residuals-units", Rendition::Panel, HEIGHT, title, description);
    let rows = &calibration.residuals;
    let frame = frame(rows, reach(rows, |row| units(row).abs(), 2.6));
    let (left, upper) = (frame.left, frame.at(0.0, 2.0).1);
    figure.rectangle((left, upper), (frame.right, frame.at(0.0, -2.0).1), "band-all");
    frame.draw(&mut figure, "reference flow, L/min", "residual, in u");
    zero_line(&mut figure, &frame);
    figure.crowd(rows.len());
    figure.text((frame.right, frame.top - 14.0), Anchor::End, "note", "shaded: within ±2");
    for row in rows {
        let (x, y) = (flow(row), units(row));
        figure.line(frame.at(x, 0.0), frame.at(x, y), "bar");
        frame.point(&mut figure, (x, y), row.used, &describe(row));
    }
    draw_labels(&mut figure, &frame, rows, units, |row| (0.0, units(row)));
    figure.finish()
}

fn flow(row: &ResidualRow) -> f64 {
    finite(row.reference_flow * LITRES_PER_MINUTE)
}

fn percent(row: &ResidualRow) -> f64 {
    finite(row.residual_rel * 100.0)
}

fn units(row: &ResidualRow) -> f64 {
    finite(row.residual_u)
}

/// Standard uncertainty of a residual in percent of flow, from its two forms; zero when it cannot be had.
fn u_percent(row: &ResidualRow) -> f64 {
    finite((row.residual_rel * 100.0 / row.residual_u).abs())
}

fn describe(row: &ResidualRow) -> String {
    let used = if row.used { "" } else { ", not used" };
    let (percent, units) = (numbers::signed(percent(row), 3), numbers::signed(units(row), 1));
    format!("line {}: {percent} %, {units} u{used}", row.line)
}

/// Half height of a panel: room for the points used, and for the others up to twice that.
fn reach(rows: &[ResidualRow], size: impl Fn(&ResidualRow) -> f64, least: f64) -> f64 {
    let largest = |used: bool| rows.iter().filter(|row| row.used == used).map(&size).fold(0.0, f64::max);
    let (kept, others) = (largest(true), largest(false));
    let base = if kept > 0.0 { kept } else { others };
    1.1 * base.max(others.min(2.0 * base)).max(least)
}

fn frame(rows: &[ResidualRow], reach: f64) -> Frame {
    let (low, high) = limits(rows.iter().map(flow));
    Frame {
        left: 48.0,
        top: 32.0,
        right: Rendition::Panel.width() - 8.0,
        bottom: HEIGHT - 46.0,
        x: Axis::spanning(low, high, 5),
        y: Axis::linear(-reach, reach, 6),
    }
}

fn zero_line(figure: &mut Figure, frame: &Frame) {
    let (_, y) = frame.at(0.0, 0.0);
    figure.line((frame.left, y), (frame.right, y), "zero");
}

/// Line numbers beside the most remarkable points, largest first; with the residual itself where it is off the frame.
fn draw_labels(
    figure: &mut Figure,
    frame: &Frame,
    rows: &[ResidualRow],
    value: impl Fn(&ResidualRow) -> f64,
    bar: impl Fn(&ResidualRow) -> (f64, f64),
) {
    let mut labels = Labels::new(frame);
    for row in rows {
        let (from, to) = bar(row);
        labels.avoid_marker(frame.at(flow(row), value(row)));
        labels.avoid_bar(frame.at(flow(row), from), frame.at(flow(row), to));
    }
    let mut notable: Vec<&ResidualRow> = rows.iter().filter(|row| !row.used || units(row).abs() > NOTABLE).collect();
    notable.sort_by(|a, b| units(b).abs().total_cmp(&units(a).abs()));
    for row in notable.into_iter().take(LABELS) {
        let beyond = !frame.y.contains(value(row));
        let size = if beyond { format!(": {}", numbers::significant(value(row), 2)) } else { String::new() };
        labels.write(figure, frame.at(flow(row), value(row)), &format!("line {}{size}", row.line));
    }
}
