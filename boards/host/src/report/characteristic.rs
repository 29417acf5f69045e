//! Figure 1: the characteristic. `y = ρ Δp / (μ q_m)` against `x = q_m / μ`, the fitted line and its 95 % bands.

use super::axis::Axis;
use super::figure::{Anchor, Figure, Frame, Rendition, Shape};
use super::key::{Key, Sign};
use super::label::Labels;
use super::numbers;
use crate::calibrate::outcome::{Calibration, ResidualRow};

/// Steps along the bands.
const STEPS: usize = 48;
/// At most this many labels.
const LABELS: usize = 8;

/// The fitted line with both bands.
struct Line {
    a: f64,
    b: f64,
    fit: Ellipse,
    all: Ellipse,
    /// Coverage factor of the bands.
    k: f64,
    from: f64,
    to: f64,
}

/// Covariance of the two coefficients.
struct Ellipse {
    u_a: f64,
    u_b: f64,
    correlation: f64,
}

impl Ellipse {
    /// Standard uncertainty of the line at `x`.
    fn at(&self, x: f64) -> f64 {
        let (a, b) = (self.u_a, self.u_b * x);
        finite((a * a + b * b + 2.0 * self.correlation * a * b).max(0.0).sqrt())
    }
}

impl Line {
    fn of(calibration: &Calibration) -> Self {
        let c = calibration;
        let factors = c.uncertainty.iter().map(|row| row.coverage_factor).filter(|k| k.is_finite() && *k > 0.0);
        Self {
            a: finite(c.a),
            b: finite(c.b),
            fit: Ellipse { u_a: c.u_a_fit, u_b: c.u_b_fit, correlation: c.correlation_ab_fit },
            all: Ellipse { u_a: c.u_a, u_b: c.u_b, correlation: c.correlation_ab },
            k: factors.reduce(f64::max).unwrap_or(2.0),
            from: finite(c.range.x_min),
            to: finite(c.range.x_max),
        }
    }

    fn y(&self, x: f64) -> f64 {
        self.a + self.b * x
    }

    /// Line and band at steps along the calibrated range: x, y, half width.
    fn band(&self, part: &Ellipse) -> Vec<(f64, f64, f64)> {
        let step = (self.to - self.from) / STEPS as f64;
        (0..=STEPS).map(|i| self.from + step * i as f64).map(|x| (x, self.y(x), self.k * part.at(x))).collect()
    }
}

/// Draws the figure.
pub fn draw(calibration: &Calibration, rendition: Rendition) -> String {
    let line = Line::of(calibration);
    let title = "Characteristic of the element";
    let id = format!("characteristic-{}", rendition.class());
    let height = if rendition == Rendition::Wide { 352.0 } else { 380.0 };
    let mut figure = Figure::new(&id, rendition, height, title, &description(calibration));
    let key = Key::new(key_items(calibration, &line), rendition.width());
    let frame = frame(calibration, &line, rendition, key.height(), height);
    key.draw(&mut figure);
    draw_band(&mut figure, &frame, &line.band(&line.all), "band-all");
    draw_band(&mut figure, &frame, &line.band(&line.fit), "band-fit");
    frame.draw(&mut figure, "x = q_{m}/μ, m", &y_title(&frame));
    if rendition == Rendition::Wide {
        percent_scale(&mut figure, &frame, line.a);
    }
    draw_line(&mut figure, &frame, &line);
    figure.crowd(calibration.residuals.len());
    for row in &calibration.residuals {
        draw_point(&mut figure, &frame, row);
    }
    if figure.is_crowded() {
        draw_line(&mut figure, &frame, &line);
    }
    draw_labels(&mut figure, &frame, &line, &calibration.residuals);
    figure.finish()
}

fn description(calibration: &Calibration) -> String {
    format!(
        "{} points, {} of them used, about the line y = a + b x. Numbers are in the table of results and the table of points.",
        calibration.residuals.len(),
        calibration.residuals.iter().filter(|row| row.used).count()
    )
}

fn key_items(calibration: &Calibration, line: &Line) -> Vec<(Sign, &'static str)> {
    let mut items = vec![(Sign::Marker(Shape::Disc), "point used, ±2u")];
    if calibration.residuals.iter().any(|row| !row.used) {
        items.push((Sign::Marker(Shape::Diamond), "point not used"));
    }
    items.push((Sign::Line("fitted"), "fitted line"));
    if line.band(&line.fit).iter().any(|(_, _, half)| *half > 0.0) {
        items.push((Sign::Area("band-fit"), "95 %, fit alone"));
    }
    items.push((Sign::Area("band-all"), "95 %, all parts"));
    items
}

/// The plotting area: x from zero, where the line meets `a`; y about the line and the points, points not used included
/// as long as they do not squeeze the rest.
fn frame(calibration: &Calibration, line: &Line, rendition: Rendition, key: f64, height: f64) -> Frame {
    let rows = &calibration.residuals;
    let xs = rows.iter().map(|row| finite(row.x)).chain([0.0, line.from, line.to]);
    let (x_low, x_high) = limits(xs);
    let used = rows.iter().filter(|row| row.used).map(|row| finite(row.y));
    let bands = line.band(&line.all);
    let edges = bands.iter().flat_map(|(_, y, half)| [y - half, y + half]);
    let (low, high) = limits(used.chain(edges).chain([line.a]));
    let room = 0.6 * (high - low);
    let bars = rows.iter().flat_map(|row| {
        let half = if row.used { 2.0 * finite(row.u_y) } else { 0.0 };
        [row.y - half, row.y + half]
    });
    let (low, high) = limits(bars.map(|y| finite(y).clamp(low - room, high + room)).chain([low, high]));
    let margin = 0.06 * (high - low);
    let wide = rendition == Rendition::Wide;
    Frame {
        left: 48.0,
        top: key + 40.0,
        right: rendition.width() - if wide { 50.0 } else { 8.0 },
        bottom: height - 46.0,
        x: Axis::linear(x_low, x_high + 0.03 * (x_high - x_low), if wide { 7 } else { 4 }),
        y: Axis::linear(low - margin, high + margin, 6),
    }
}

fn y_title(frame: &Frame) -> String {
    let unit = match frame.y.exponent {
        0 => "m^{−3}".to_string(),
        e => format!("10^{{{}}} m^{{−3}}", e.to_string().replace('-', "−")),
    };
    format!("y = ρ Δp/(μ q_{{m}}), {unit}")
}

/// Ticks on the right edge: how far y stands above the intercept, in percent of it.
fn percent_scale(figure: &mut Figure, frame: &Frame, a: f64) {
    let share = |y: f64| (y / a - 1.0) * 100.0;
    let (low, high) = (share(frame.y.at(0.0)), share(frame.y.at(1.0)));
    if !(low.is_finite() && high.is_finite() && a > 0.0 && high - low < 1e6) {
        return;
    }
    for tick in Axis::linear(low, high, 6).ticks {
        let (x, y) = frame.at(f64::INFINITY, a * (1.0 + tick.value / 100.0));
        figure.line((x, y), (x + 5.0, y), "axis");
        figure.text((x + 9.0, y + 4.0), Anchor::Start, "tick", &tick.label);
    }
    figure.text((718.0, frame.top - 14.0), Anchor::End, "title", "y/a − 1, %");
}

fn draw_band(figure: &mut Figure, frame: &Frame, band: &[(f64, f64, f64)], class: &str) {
    let upper = band.iter().map(|(x, y, half)| frame.at(*x, y + half));
    let lower = band.iter().rev().map(|(x, y, half)| frame.at(*x, y - half));
    let outline: Vec<(f64, f64)> = upper.chain(lower).collect();
    figure.path(&outline, true, class);
}

fn draw_line(figure: &mut Figure, frame: &Frame, line: &Line) {
    let at = |x: f64| frame.at(x, line.y(x));
    figure.line(at(0.0), at(line.from), "extended");
    figure.line(at(line.from), at(line.to), "fitted");
    let (x, y) = at(0.0);
    figure.line((x - 4.0, y), (x + 4.0, y), "fitted");
}

fn draw_point(figure: &mut Figure, frame: &Frame, row: &ResidualRow) {
    let (x, y) = (finite(row.x), finite(row.y));
    let half = 2.0 * finite(row.u_y);
    if frame.y.contains(y) && half > 0.0 {
        figure.line(frame.at(x, y - half), frame.at(x, y + half), "bar");
    }
    let label = format!("line {}: {} % of flow", row.line, numbers::signed(row.residual_rel * 100.0, 3));
    frame.point(figure, (x, y), row.used, &label);
}

/// Line numbers beside the first few points the fit did not use.
fn draw_labels(figure: &mut Figure, frame: &Frame, line: &Line, rows: &[ResidualRow]) {
    let mut labels = Labels::new(frame);
    for pair in line.band(&line.fit).windows(2) {
        labels.avoid_bar(frame.at(pair[0].0, pair[0].1), frame.at(pair[1].0, pair[1].1));
    }
    for row in rows {
        let (x, y, half) = (finite(row.x), finite(row.y), 2.0 * finite(row.u_y));
        labels.avoid_marker(frame.at(x, y));
        labels.avoid_bar(frame.at(x, y - half), frame.at(x, y + half));
    }
    for row in rows.iter().filter(|row| !row.used).take(LABELS) {
        labels.write(figure, frame.at(finite(row.x), finite(row.y)), &format!("line {}", row.line));
    }
}

/// Smallest and largest of `values`; zero and zero when there are none.
pub fn limits(values: impl Iterator<Item = f64>) -> (f64, f64) {
    let folded = values
        .fold(None, |found: Option<(f64, f64)>, v| Some(found.map_or((v, v), |(low, high)| (low.min(v), high.max(v)))));
    folded.unwrap_or((0.0, 0.0))
}

/// `value`, or zero when it is not finite.
pub fn finite(value: f64) -> f64 {
    if value.is_finite() { value } else { 0.0 }
}
