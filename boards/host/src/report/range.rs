//! Figure 3: relative uncertainty of flow over the range, in its three parts.

use super::axis::Axis;
use super::characteristic::limits;
use super::figure::{Anchor, Figure, Frame, Rendition};
use super::residuals::LITRES_PER_MINUTE;
use crate::calibrate::outcome::{Calibration, UncertaintyRow};

const HEIGHT: f64 = 276.0;
/// Least distance between the labels of two curves.
const LABEL_STEP: f64 = 16.0;

/// A curve of the figure: its label, the class of its line, and its value.
type Curve = (&'static str, &'static str, fn(&UncertaintyRow) -> f64);

const CURVES: [Curve; 4] = [
    ("expanded", "curve expanded", |row| row.expanded),
    ("common", "curve common", |row| row.common),
    ("sensors", "curve sensors", |row| row.sensors),
    ("fit", "curve fit", |row| row.type_a),
];

/// Rows that can be drawn, from small flow to large.
fn sorted(calibration: &Calibration) -> Vec<&UncertaintyRow> {
    sound(&calibration.uncertainty)
}

/// Rows that can be drawn, from small flow to large.
fn sound(rows: &[UncertaintyRow]) -> Vec<&UncertaintyRow> {
    let sound = |row: &&UncertaintyRow| row.flow.is_finite() && row.flow > 0.0 && row.expanded.is_finite();
    let mut rows: Vec<&UncertaintyRow> = rows.iter().filter(sound).collect();
    rows.sort_by(|a, b| a.flow.total_cmp(&b.flow));
    rows
}

/// The row at the upper end of the range.
pub fn full_scale(calibration: &Calibration) -> Option<UncertaintyRow> {
    sorted(calibration).last().map(|row| (*row).clone())
}

/// The row at the lower end of the range.
pub fn lowest(calibration: &Calibration) -> Option<UncertaintyRow> {
    sorted(calibration).first().map(|row| (*row).clone())
}

/// Smallest and largest flow calibrated, m3/s: those of the uncertainties, else those of the points used.
pub fn flows(calibration: &Calibration) -> Option<(f64, f64)> {
    let stated: Vec<f64> = sorted(calibration).iter().map(|row| row.flow).collect();
    let used = calibration.residuals.iter().filter(|row| row.used && row.reference_flow.is_finite());
    let flows = if stated.is_empty() { used.map(|row| row.reference_flow).collect() } else { stated };
    (!flows.is_empty()).then(|| limits(flows.into_iter()))
}

/// The row at `share` of the pressure drop at full scale, interpolated in the logarithms; absent outside the range.
pub fn at_share(calibration: &Calibration, share: f64) -> Option<UncertaintyRow> {
    let rows = sorted(calibration);
    let wanted = rows.last()?.pressure_drop * share;
    let below = rows.iter().rev().find(|row| row.pressure_drop <= wanted * (1.0 + 1e-9))?;
    let above = rows.iter().find(|row| row.pressure_drop >= wanted * (1.0 - 1e-9))?;
    let whole = (above.pressure_drop / below.pressure_drop).ln();
    let t = if whole > 0.0 { (wanted / below.pressure_drop).ln() / whole } else { 0.0 };
    let between = |part: fn(&UncertaintyRow) -> f64| {
        let (low, high) = (part(below), part(above));
        if low > 0.0 && high > 0.0 { low * (high / low).powf(t) } else { low + (high - low) * t }
    };
    Some(UncertaintyRow {
        flow: between(|row| row.flow),
        pressure_drop: wanted,
        type_a: between(|row| row.type_a),
        common: between(|row| row.common),
        sensors: between(|row| row.sensors),
        expanded: between(|row| row.expanded),
        coverage_factor: between(|row| row.coverage_factor),
    })
}

/// Draws the figure.
pub fn draw(calibration: &Calibration, rendition: Rendition) -> String {
    draw_rows(&calibration.uncertainty, rendition)
}

/// Draws the figure of any rows.
pub fn draw_rows(rows: &[UncertaintyRow], rendition: Rendition) -> String {
    let title = "Relative uncertainty of flow over the range";
    let description = "Standard uncertainty from the fit, from what all points share, and from the sensors in use; \
                       and the expanded uncertainty of all three.";
    let id = format!("range-{}", rendition.class());
    let mut figure = Figure::new(&id, rendition, HEIGHT, title, description);
    let rows = sound(rows);
    let frame = frame(&rows, rendition);
    frame.draw(&mut figure, "flow, L/min", "relative uncertainty, %");
    for (_, class, part) in CURVES {
        let points: Vec<(f64, f64)> = rows.iter().map(|row| position(&frame, row, part)).collect();
        figure.path(&points, false, class);
        if let ([(x, y)], true) = (points.as_slice(), points.len() == 1) {
            figure.line((x - 5.0, *y), (x + 5.0, *y), class);
        }
    }
    if let Some(last) = rows.last() {
        draw_labels(&mut figure, &frame, last);
    }
    figure.finish()
}

fn position(frame: &Frame, row: &UncertaintyRow, part: fn(&UncertaintyRow) -> f64) -> (f64, f64) {
    frame.at(row.flow * LITRES_PER_MINUTE, part(row) * 100.0)
}

/// Logarithmic upwards when the expanded uncertainty changes much over the range, else from zero.
fn frame(rows: &[&UncertaintyRow], rendition: Rendition) -> Frame {
    let (low, high) = limits(rows.iter().map(|row| row.flow * LITRES_PER_MINUTE));
    let (least, most) = limits(rows.iter().map(|row| row.expanded * 100.0));
    let parts = rows.iter().flat_map(|row| CURVES.map(|(_, _, part)| part(row) * 100.0));
    let smallest = parts.filter(|u| *u > 0.0).fold(most, f64::min);
    let y = if least > 0.0 && most > 6.0 * least {
        Axis::logarithmic(smallest.max(most * 1e-4) / 1.3, most * 1.3)
    } else {
        Axis::linear(0.0, most * 1.08, 6)
    };
    Frame {
        left: 48.0,
        top: 32.0,
        right: rendition.width() - 84.0,
        bottom: HEIGHT - 46.0,
        x: Axis::logarithmic(low, high),
        y,
    }
}

/// Labels at the right end of the curves, moved apart where the curves end close together, each led to its curve.
fn draw_labels(figure: &mut Figure, frame: &Frame, last: &UncertaintyRow) {
    let mut ends: Vec<(&str, &str, (f64, f64))> =
        CURVES.iter().map(|(label, class, part)| (*label, *class, position(frame, last, *part))).collect();
    ends.sort_by(|a, b| a.2.1.total_cmp(&b.2.1));
    let heights: Vec<f64> = ends.iter().map(|(_, _, (_, y))| *y).collect();
    for ((label, class, (x, y)), level) in ends.into_iter().zip(spread(&heights, frame.top, frame.bottom - 6.0)) {
        figure.line((x + 2.0, y), (frame.right + 16.0, level), "leader");
        figure.text((frame.right + 20.0, level + 4.0), Anchor::Start, &format!("label {class}"), label);
    }
}

/// Sorted heights moved at least a label apart and kept between `top` and `bottom`.
fn spread(heights: &[f64], top: f64, bottom: f64) -> Vec<f64> {
    let mut levels = heights.to_vec();
    let mut floor = top;
    for level in &mut levels {
        *level = level.max(floor);
        floor = *level + LABEL_STEP;
    }
    let mut ceiling = bottom;
    for level in levels.iter_mut().rev() {
        *level = level.min(ceiling);
        ceiling = *level - LABEL_STEP;
    }
    levels
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_keep_their_distance_and_stay_inside() {
        let levels = spread(&[100.0, 101.0, 102.0, 290.0], 30.0, 292.0);
        assert!(levels.windows(2).all(|pair| pair[1] - pair[0] >= LABEL_STEP));
        assert!(spread(&[290.0; 4], 30.0, 292.0).iter().all(|y| (30.0..=292.0).contains(y)));
    }
}
