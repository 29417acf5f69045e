//! The report of a calibration: one self-contained page that a person would rather look at than a table.
//!
//! The page needs nothing but itself: no script, no font, no picture from elsewhere. Text is set by the template
//! `report/page.html` with every value escaped; figures are drawn by the modules below and hold no text of the user's
//! that has not been escaped.

pub(crate) mod numbers; // rounding and typography of numbers

pub(crate) mod axis; // scales and ticks

pub(crate) mod figure; // SVG primitives

pub(crate) mod key; // keys of figures

mod label; // labels that keep clear of each other

mod characteristic; // figure 1

mod residuals; // figure 2

pub(crate) mod range; // figure 3

pub(crate) mod words; // sentences

mod tables; // rows of the tables

use crate::calibrate::outcome::{Calibration, Finding, UncertaintyRow};
use figure::Rendition;
use minijinja::{AutoEscape, Environment, UndefinedBehavior, Value, context};
use numbers::MISSING;
use residuals::LITRES_PER_MINUTE;

const PAGE: &str = include_str!("report/page.html");
/// Style of every page and figure.
pub(crate) const STYLE: &str = include_str!("report/style.css");

/// Where a report comes from: what ran, on what, and what it wrote.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Provenance {
    /// Version of the tool.
    pub tool_version: String,
    /// The command as given.
    pub command: String,
    /// CRC-32 of the record written from this calibration, as printed.
    pub record_crc: Option<String>,
    /// Where the uncertainties of the instrument's sensors come from, in words.
    pub sensors: String,
    /// The element as described to the tool: name and value, in the order to print.
    pub element: Vec<(String, String)>,
}

/// Renders the report as one HTML page.
///
/// # Errors
/// Only when the built-in template and the values given to it do not fit each other.
pub fn render(calibration: &Calibration, provenance: &Provenance) -> Result<String, minijinja::Error> {
    let mut environment = Environment::new();
    environment.set_auto_escape_callback(|_| AutoEscape::Html);
    environment.set_undefined_behavior(UndefinedBehavior::Strict);
    environment.add_template("page.html", PAGE)?;
    environment.get_template("page.html")?.render(context! {
        style => Value::from_safe_string(STYLE.to_string()),
        run => run(calibration),
        verdict => verdict(calibration),
        key => key_numbers(calibration),
        findings => findings(calibration),
        figures => figures(calibration),
        points => tables::points(calibration),
        budget => tables::budget(calibration),
        common => tables::common(calibration),
        coverage => words::coverage(calibration),
        basis => words::basis(calibration),
        state => words::state(calibration),
        cautions => words::cautions(calibration),
        provenance => provenance_values(provenance),
    })
}

fn run(calibration: &Calibration) -> Value {
    let c = calibration;
    context! {
        serial => or_dash(&c.serial),
        fluid => or_dash(&c.fluid.replace('-', " ")),
        date => or_dash(&c.date),
        file => or_dash(&c.points_file),
        points => c.points,
        points_used => c.points_used,
    }
}

fn verdict(calibration: &Calibration) -> Value {
    let verdict = words::verdict(calibration);
    context! {
        kind => verdict.kind,
        headline => verdict.headline,
        sentence => verdict.sentence,
        overruled => words::overruled(calibration),
    }
}

fn findings(calibration: &Calibration) -> Vec<Value> {
    let finding = |finding: &Finding| {
        context! {
            name => words::finding_name(finding),
            message => &finding.message,
            lines => words::finding_lines(finding),
            refuses => finding.refuses,
        }
    };
    calibration.findings.iter().map(finding).collect()
}

fn key_numbers(calibration: &Calibration) -> Value {
    let c = calibration;
    let flows = range::flows(c);
    let litres = |flow: f64| numbers::significant(flow * LITRES_PER_MINUTE, 3);
    context! {
        a => coefficient(c.a, c.u_a),
        b => coefficient(c.b, c.u_b),
        b_from_prior => c.b_from_prior,
        correlation => numbers::fixed(c.correlation_ab, 3),
        chi_squared => numbers::fixed(c.chi_squared, 1),
        freedom => numbers::freedom(c.degrees_of_freedom),
        p_value => numbers::probability(c.p_value),
        flow_low => flows.map(|(low, _)| litres(low)),
        flow_high => flows.map(|(_, high)| litres(high)),
        x_low => numbers::significant(c.range.x_min, 3),
        x_high => numbers::significant(c.range.x_max, 3),
        drop_high => numbers::significant(c.range.pressure_drop_max, 4),
        reynolds => c.range.reynolds_max.map_or_else(|| MISSING.to_string(), |re| numbers::fixed(re, 0)),
        a_ratio => ratio(c.geometry.a_ratio),
        b_ratio => ratio(c.geometry.b_ratio),
        full_scale => uncertainty_at(range::full_scale(c)),
        tenth => uncertainty_at(range::at_share(c, 0.1)),
    }
}

fn ratio(ratio: Option<f64>) -> String {
    ratio.map_or_else(|| MISSING.to_string(), |ratio| numbers::significant(ratio, 4))
}

fn coefficient(value: f64, u: f64) -> Value {
    let stated = numbers::stated(value, u);
    context! {
        value => stated.value,
        uncertainty => stated.uncertainty,
        exponent => if stated.exponent == 0 { String::new() } else { numbers::fixed(f64::from(stated.exponent), 0) },
        relative => numbers::percent(u / value.abs()),
    }
}

/// Flow and expanded uncertainty, rounded together, and the same in percent.
fn uncertainty_at(row: Option<UncertaintyRow>) -> Value {
    let Some(row) = row else {
        return context! { known => false, percent => MISSING };
    };
    let flow = row.flow * LITRES_PER_MINUTE;
    let stated = numbers::stated(flow, flow * row.expanded);
    context! {
        known => true,
        percent => numbers::percent(row.expanded),
        flow => stated.value,
        uncertainty => stated.uncertainty,
        exponent => if stated.exponent == 0 { String::new() } else { numbers::fixed(f64::from(stated.exponent), 0) },
        drop => numbers::significant(row.pressure_drop, 3),
        factor => numbers::fixed(row.coverage_factor, 2),
    }
}

fn figures(calibration: &Calibration) -> Value {
    let safe = Value::from_safe_string;
    let both = |draw: fn(&Calibration, Rendition) -> String| {
        safe(draw(calibration, Rendition::Wide) + "\n" + &draw(calibration, Rendition::Narrow))
    };
    context! {
        characteristic => both(characteristic::draw),
        range => both(range::draw),
        residuals_percent => safe(residuals::draw_percent(calibration)),
        residuals_units => safe(residuals::draw_units(calibration)),
    }
}

fn provenance_values(provenance: &Provenance) -> Value {
    let pair = |(name, value): &(String, String)| context! { name => name, value => or_dash(value) };
    context! {
        version => or_dash(&provenance.tool_version),
        command => or_dash(&provenance.command),
        sensors => or_dash(&provenance.sensors),
        crc => provenance.record_crc.as_deref().map_or(MISSING, or_dash),
        element => provenance.element.iter().map(pair).collect::<Vec<Value>>(),
    }
}

fn or_dash(text: &str) -> &str {
    if text.trim().is_empty() { MISSING } else { text }
}
