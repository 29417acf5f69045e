//! A prediction as a table for machines and one self-contained page for people.

use crate::calibrate::outcome::UncertaintyRow;
use crate::output::shortest;
use crate::planning::budget::{Budget, Source};
use crate::planning::prediction::{Prediction, Question, Row};
use crate::report::STYLE;
use crate::report::axis::Axis;
use crate::report::figure::{Anchor, Figure, Frame, Rendition, Shape};
use crate::report::{numbers, range, words};
use minijinja::{AutoEscape, Environment, UndefinedBehavior, Value, context};

const PAGE: &str = include_str!("prediction.html");
const HEIGHT: f64 = 300.0;
const LITRES_PER_MINUTE: f64 = 6e4;

/// The curve as CSV: the columns of readings, and beside them those that `evenbore flow` adds.
pub fn table(question: &Question<'_>, prediction: &Prediction) -> String {
    let state = &question.state;
    let humid = state.humidity.map(|h| decimal(h, |h| 100.0 * h, |pct| pct / 100.0));
    let mut text = String::from("pressure_drop_Pa,temperature_C,line_pressure_kPa,");
    text.push_str(if humid.is_some() { "relative_humidity_pct," } else { "" });
    text.push_str("volume_flow_L_min,mass_flow_g_min,standard_flow_L_min,reynolds,u_volume_flow_rel,u_mass_flow_rel,u_standard_flow_rel,status,");
    text.push_str("coverage_factor,expanded_rel\n");
    let t = decimal(state.temperature, |t| t - 273.15, |c| c + 273.15);
    let p = decimal(state.line_pressure, |p| p / 1e3, |kpa| kpa * 1e3);
    let humid = humid.map_or_else(String::new, |h| h + ",");
    for row in &prediction.rows {
        let flow = &row.flow;
        let scaled = |si: f32| shortest((f64::from(si) * LITRES_PER_MINUTE) as f32);
        let standard = flow.standard.map(|q| scaled(q.as_cubic_metres_per_second())).unwrap_or_default();
        let u_standard = flow.standard.map(|_| shortest(flow.standard_uncertainty.combined())).unwrap_or_default();
        text += &format!(
            "{},{t},{p},{humid}{},{},{standard},{},{},{},{u_standard},{},{:.4},{:.6}\n",
            shortest(row.pressure_drop as f32),
            scaled(flow.volume.as_cubic_metres_per_second()),
            scaled(flow.mass.as_kilograms_per_second()),
            shortest(flow.reynolds),
            shortest(flow.uncertainty.combined()),
            shortest(flow.mass_uncertainty.combined()),
            flow.status,
            row.coverage_factor,
            row.expanded(),
        );
    }
    text
}

/// The fewest decimals in another unit that give the single-precision bits of `si` back.
fn decimal(si: f64, to_unit: fn(f64) -> f64, to_si: fn(f64) -> f64) -> String {
    let written = (0..12).map(|decimals| format!("{:.decimals$}", to_unit(si)));
    let exact = |text: &String| text.parse::<f64>().is_ok_and(|value| to_si(value) as f32 == si as f32);
    written.into_iter().find(exact).unwrap_or_else(|| format!("{}", to_unit(si)))
}

/// The page.
///
/// # Errors
/// Only when the built-in template and the values given to it do not fit each other.
pub fn render(question: &Question<'_>, prediction: &Prediction, command: &str) -> Result<String, minijinja::Error> {
    let mut environment = Environment::new();
    environment.set_auto_escape_callback(|_| AutoEscape::Html);
    environment.set_undefined_behavior(UndefinedBehavior::Strict);
    environment.add_template("prediction.html", PAGE)?;
    let safe = Value::from_safe_string;
    let both = |draw: &dyn Fn(Rendition) -> String| safe(draw(Rendition::Wide) + "\n" + &draw(Rendition::Narrow));
    let uncertainty: Vec<UncertaintyRow> = prediction.rows.iter().map(uncertainty_row).collect();
    let state = &question.state;
    environment.get_template("prediction.html")?.render(context! {
        style => safe(STYLE.to_string()),
        serial => question.record.serial.as_str(),
        fluid => question.fluid.name().replace('-', " "),
        calibrated_on => question.record.fluid.name().replace('-', " "),
        same_fluid => prediction.same_fluid,
        calibrated_at => numbers::fixed(f64::from(question.record.quality.temperature_k.as_celsius()), 1),
        temperature => numbers::fixed(state.temperature - 273.15, 2),
        pressure => numbers::significant(state.line_pressure / 1e3, 6),
        humidity => state.humidity.map(|h| numbers::significant(100.0 * h, 3)),
        rows => prediction.rows.iter().map(printed).collect::<Vec<Value>>(),
        budgets => prediction.budgets.iter().map(group).collect::<Vec<Value>>(),
        curve => both(&|rendition| curve(&prediction.rows, rendition)),
        uncertainty => both(&|rendition| range::draw_rows(&uncertainty, rendition)),
        doubtful => prediction.rows.iter().any(|row| !row.flow.status.is_empty()),
        version => env!("CARGO_PKG_VERSION"),
        command => command,
    })
}

fn uncertainty_row(row: &Row) -> UncertaintyRow {
    let u = row.flow.uncertainty;
    UncertaintyRow {
        flow: row.volume(),
        pressure_drop: row.pressure_drop,
        type_a: f64::from(u.fit),
        common: f64::from(u.common),
        sensors: f64::from(u.sensors),
        expanded: row.expanded(),
        coverage_factor: row.coverage_factor,
    }
}

fn printed(row: &Row) -> Value {
    let flow = row.volume() * LITRES_PER_MINUTE;
    let stated = numbers::stated(flow, flow * row.expanded());
    context! {
        drop => numbers::significant(row.pressure_drop, 4),
        flow => stated.value,
        uncertainty => stated.uncertainty,
        exponent => if stated.exponent == 0 { String::new() } else { numbers::fixed(f64::from(stated.exponent), 0) },
        expanded => numbers::percent(row.expanded()),
        factor => numbers::fixed(row.coverage_factor, 2),
        reynolds => numbers::significant(f64::from(row.flow.reynolds), 3),
        status => row.flow.status.to_string().replace('+', ", "),
    }
}

fn group(budget: &Budget) -> Value {
    let place = numbers::place_of_uncertainty(100.0 * budget.combined_rel).map_or(3, |place| (1 - place).clamp(1, 9));
    let heading = match budget.at {
        1.0 => format!("Full scale, {} Pa", numbers::significant(budget.pressure_drop, 4)),
        at => format!(
            "{} % of full scale in pressure drop, {} Pa",
            numbers::freedom(100.0 * at),
            numbers::significant(budget.pressure_drop, 4)
        ),
    };
    context! {
        heading => heading,
        rows => budget.sources.iter().map(|source| budget_row(source, place)).collect::<Vec<Value>>(),
        combined => numbers::fixed(100.0 * budget.combined_rel, place),
        expanded => numbers::percent(budget.expanded_rel),
        factor => numbers::fixed(budget.coverage_factor, 2),
        dominant => budget.dominant.as_str(),
    }
}

fn budget_row(row: &Source, place: i32) -> Value {
    let relative = row.unit == "rel";
    let (u, unit) = if relative { (100.0 * row.u, "%") } else { (row.u, row.unit) };
    context! {
        source => words::capitalised(&row.source),
        part => row.part,
        u => numbers::significant(u, 2),
        unit => unit,
        distribution => row.distribution,
        sensitivity => numbers::significant(row.sensitivity * if relative { 1.0 } else { 100.0 }, 3),
        sensitivity_unit => if relative { "%/%".to_string() } else { format!("%/{unit}") },
        contribution => numbers::fixed(100.0 * row.contribution, place),
        share => numbers::fixed(row.share_pct, 0),
        bar => format!("{:.1}", row.share_pct.clamp(0.0, 100.0)),
        freedom => row.degrees_of_freedom.map_or_else(|| "∞".to_string(), numbers::freedom),
    }
}

/// Flow against pressure drop, with the straight line that a purely viscous element would follow.
fn curve(rows: &[Row], rendition: Rendition) -> String {
    let title = "Flow over pressure drop";
    let about =
        "Predicted flow at each pressure drop; dashed, the straight line that the smallest flow would continue.";
    let mut figure = Figure::new(&format!("curve-{}", rendition.class()), rendition, HEIGHT, title, about);
    let (Some(first), Some(last)) = (rows.first(), rows.last()) else { return figure.finish() };
    let top = last.volume() * LITRES_PER_MINUTE;
    let slope = first.volume() * LITRES_PER_MINUTE / first.pressure_drop;
    let straight = slope * last.pressure_drop;
    let wide = rendition == Rendition::Wide;
    let frame = Frame {
        left: 48.0,
        top: 32.0,
        right: rendition.width() - 24.0,
        bottom: HEIGHT - 46.0,
        x: Axis::linear(0.0, 1.04 * last.pressure_drop, if wide { 7 } else { 4 }),
        y: Axis::linear(0.0, 1.06 * top.max(straight), 5),
    };
    let scale = if frame.x.exponent == 0 { String::new() } else { format!("10^{{{}}} ", frame.x.exponent) };
    frame.draw(&mut figure, &format!("pressure drop, {scale}Pa"), "volume flow at line conditions, L/min");
    figure.line(frame.at(0.0, 0.0), frame.at(last.pressure_drop, straight), "extended");
    let at = |row: &Row| frame.at(row.pressure_drop, row.volume() * LITRES_PER_MINUTE);
    let line: Vec<(f64, f64)> = std::iter::once(frame.at(0.0, 0.0)).chain(rows.iter().map(at)).collect();
    figure.path(&line, false, "fitted");
    for row in rows {
        let good = row.flow.status.is_empty();
        let label = format!("Re {:.0}, {}", row.flow.reynolds, row.flow.status);
        figure.marker(if good { Shape::Disc } else { Shape::Diamond }, at(row), &label);
    }
    let (x, y) = at(last);
    let text = format!("Re {}", numbers::fixed(f64::from(last.flow.reynolds), 0));
    figure.text((x, y + 34.0), Anchor::End, "note halo", &text);
    figure.finish()
}
