//! Where the uncertainty of one flow comes from: a row per source, which add in squares to the instrument's statement.

use crate::planning::state::State;
use crate::statistics::distributions::coverage_factor;
use crate::statistics::welch::{Component, effective_dof};
use evenbore::Meter;
use evenbore::calibration::{Cause, CommonPart, Quality};
use evenbore::flow::Flow;
use evenbore::reading::Trims;
use evenbore::status::Refusal;
use serde::Serialize;

/// One source of uncertainty.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Source {
    /// What it is, for a person.
    pub source: String,
    /// `fit`, `common` or `sensors`.
    pub part: &'static str,
    /// Standard uncertainty of the source.
    pub u: f64,
    /// Unit of `u`; `rel` is relative.
    pub unit: &'static str,
    /// `normal` or `rectangular`: the distribution the source is taken to have.
    pub distribution: &'static str,
    /// Relative change of flow per unit of the source.
    pub sensitivity: f64,
    /// What the source contributes to the relative standard uncertainty of flow.
    pub contribution: f64,
    /// Share of the variance, percent.
    pub share_pct: f64,
    /// Degrees of freedom; absent means infinitely many.
    pub degrees_of_freedom: Option<f64>,
}

/// The budget of one flow.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Budget {
    /// Share of full scale in pressure drop that the budget is for.
    pub at: f64,
    /// Pressure drop, Pa.
    #[serde(rename = "pressure_drop_Pa")]
    pub pressure_drop: f64,
    /// The sources, in the order of the walk.
    pub sources: Vec<Source>,
    /// Combined relative standard uncertainty: root of the sum of squares of the contributions.
    pub combined_rel: f64,
    /// Coverage factor for 95.45 %.
    pub coverage_factor: f64,
    /// Expanded relative uncertainty.
    pub expanded_rel: f64,
    /// The largest source, in words.
    pub dominant: String,
}

/// What a budget is made of beside the meter: the calibration's quality and the trims of the record.
#[derive(Debug, Clone, Copy)]
pub struct Known<'a> {
    /// Quality of the calibration.
    pub quality: &'a Quality,
    /// Whether the fluid in use is that of the calibration.
    pub same_fluid: bool,
    /// Corrections of the sensors.
    pub trims: Trims,
}

/// Coverage factor for 95.45 % (Welch-Satterthwaite): the fit may have few degrees of freedom, all else has many.
pub fn coverage(flow: &Flow, quality: &Quality) -> f64 {
    let u = &flow.uncertainty;
    let dof = degrees(quality).unwrap_or(f64::INFINITY);
    let rest = f64::from(u.common).hypot(f64::from(u.sensors));
    let parts = [Component { uncertainty: f64::from(u.fit), dof }, Component { uncertainty: rest, dof: f64::INFINITY }];
    effective_dof(&parts).and_then(coverage_factor).unwrap_or(2.0)
}

fn degrees(quality: &Quality) -> Option<f64> {
    (quality.degrees_of_freedom > 0.0).then_some(f64::from(quality.degrees_of_freedom))
}

/// The budget at a pressure drop (Pa) that is the share `at` of full scale.
///
/// # Errors
/// Refuses what the instrument refuses.
pub fn budget(meter: &Meter<'_>, known: &Known<'_>, state: &State, at: f64, drop: f64) -> Result<Budget, Refusal> {
    let reading = state.reading(drop);
    let flow = meter.flow(&reading)?;
    let [u_fluid, u_water] = meter.viscosity_uncertainty(&reading)?.map(f64::from);
    let mut sources = vec![Source { degrees_of_freedom: degrees(known.quality), ..fit(&flow) }];
    let counts = |part: &&CommonPart| !(known.same_fluid && part.cause == Cause::Viscosity);
    sources.extend(known.quality.common.iter().filter(counts).map(|part| shared(part, &flow)));
    let mu = f64::from(flow.sensitivities.viscosity);
    let of_fluid = if known.same_fluid {
        "viscosity ratio over temperature".into()
    } else {
        format!("viscosity data of {}", meter.fluid().name())
    };
    sources.push(source(of_fluid, "common", (u_fluid, "rel"), mu));
    sources.push(source("viscosity of moist air", "common", (u_water, "rel"), mu));
    sources.extend(sensors(meter, known, state, &flow, drop));
    sources.retain(|row| row.contribution > 0.0);
    let k = coverage(&flow, known.quality);
    Ok(put_together(sources, at, drop, k))
}

fn put_together(mut sources: Vec<Source>, at: f64, drop: f64, k: f64) -> Budget {
    let variance: f64 = sources.iter().map(|row| row.contribution.powi(2)).sum();
    for row in &mut sources {
        row.share_pct = if variance > 0.0 { 100.0 * row.contribution.powi(2) / variance } else { 0.0 };
    }
    let largest = sources.iter().max_by(|p, q| p.contribution.total_cmp(&q.contribution));
    let dominant = largest.map_or_else(
        || "no source states any uncertainty".into(),
        |row| format!("{}, {:.0} % of the variance", row.source, row.share_pct),
    );
    let combined = variance.sqrt();
    Budget {
        at,
        pressure_drop: drop,
        sources,
        combined_rel: combined,
        coverage_factor: k,
        expanded_rel: k * combined,
        dominant,
    }
}

fn source(name: impl Into<String>, part: &'static str, (u, unit): (f64, &'static str), sensitivity: f64) -> Source {
    Source {
        source: name.into(),
        part,
        u,
        unit,
        distribution: "normal",
        sensitivity,
        contribution: (u * sensitivity).abs(),
        share_pct: 0.0,
        degrees_of_freedom: None,
    }
}

fn fit(flow: &Flow) -> Source {
    source("fit of A and B", "fit", (f64::from(flow.uncertainty.fit), "rel"), 1.0)
}

/// A part that the calibration's points shared; its uncertainty is the change of A + B x over A that it stands for.
fn shared(part: &CommonPart, flow: &Flow) -> Source {
    let s = &flow.sensitivities;
    let name = match part.cause {
        Cause::ReferenceFlow => "reference flow of the calibration",
        Cause::Viscosity => "viscosity data of the calibration fluid",
        Cause::PressureDrop => "pressure-drop gain of the bench",
        Cause::Density => "line pressure of the bench",
        Cause::Temperature => "thermometer of the bench",
        Cause::PressureDropZero => "pressure-drop zero of the bench",
        Cause::Geometry => "nominal geometry",
        Cause::Moisture => "water in the air of the bench",
    };
    let u = f64::from(part.effect_a) + f64::from(part.effect_b_m) * f64::from(s.x);
    let rectangular = part.cause == Cause::Geometry;
    Source {
        distribution: if rectangular { "rectangular" } else { "normal" },
        ..source(name, "common", (u.abs(), "rel"), f64::from(s.viscosity))
    }
}

/// The sensors in use; absolute parts act on the trimmed values, as in the instrument.
fn sensors(meter: &Meter<'_>, known: &Known<'_>, state: &State, flow: &Flow, drop: f64) -> Vec<Source> {
    let trimmed = known.trims.apply(&state.reading(drop));
    let (drop, p) = (trimmed.pressure_drop.as_pascals(), trimmed.line_pressure.as_pascals());
    let (s, u) = (&flow.sensitivities, meter.sensors());
    let row = |name: &str, u: f32, unit: &'static str, sensitivity: f32| {
        source(name, "sensors", (f64::from(u), unit), f64::from(sensitivity))
    };
    vec![
        row("pressure-drop sensor, zero and noise", u.pressure_drop_pa, "Pa", s.pressure_drop / drop),
        row("pressure-drop sensor, gain", u.pressure_drop_rel, "rel", s.pressure_drop),
        row("thermometer in use", u.temperature_k, "K", s.temperature),
        row("line-pressure sensor, zero", u.line_pressure_pa, "Pa", s.line_pressure / p),
        row("line-pressure sensor, gain", u.line_pressure_rel, "rel", s.line_pressure),
        row("humidity sensor", u.relative_humidity, "1", s.relative_humidity),
    ]
}
