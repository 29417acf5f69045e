//! What the calibrated meter is worth over its range: the instrument's own statement, and where it comes from.

use crate::calibrate::fit::CommonShift;
use crate::calibrate::outcome::{BudgetRow, CommonEffect, MeanState, UncertaintyRow};
use crate::statistics::distributions::coverage_factor;
use crate::statistics::welch::{Component, effective_dof};
use evenbore::calibration::Cause;
use evenbore::double::Conditions;
use evenbore::flow::Flow;
use evenbore::quantity::{AbsolutePressure, PressureDrop, RelativeHumidity, Temperature};
use evenbore::{Reading, Record};

/// Rows over the range.
const ROWS: usize = 13;
/// Fractions of the largest pressure drop that the budget is made for.
const BUDGET_AT: [f64; 2] = [1.0, 0.1];

/// A reading of a pressure drop (Pa) at `state`.
fn reading(state: &MeanState, drop: f64) -> Reading {
    let reading = Reading::new(
        PressureDrop::from_pascals(drop as f32),
        Temperature::from_kelvin(state.temperature as f32),
        AbsolutePressure::from_pascals(state.line_pressure as f32),
    );
    match state.relative_humidity {
        Some(fraction) => reading.with_relative_humidity(RelativeHumidity::from_fraction(fraction as f32)),
        None => reading,
    }
}

/// Coverage factor for 95.45 % when the fit has `dof` degrees of freedom and everything else has infinitely many
/// (Welch-Satterthwaite, JCGM 100:2008 G.2b).
pub fn coverage(flow: &Flow, dof: f64) -> f64 {
    let u = &flow.uncertainty;
    let rest = f64::from(u.common).hypot(f64::from(u.sensors));
    let parts = [Component { uncertainty: f64::from(u.fit), dof }, Component { uncertainty: rest, dof: f64::INFINITY }];
    effective_dof(&parts).and_then(coverage_factor).unwrap_or(2.0)
}

/// Uncertainty from the smallest calibrated flow to pressure drop `full` (Pa) at `state`, by the arithmetic of the
/// instrument.
pub fn uncertainty_rows(record: &Record, state: &MeanState, full: f64, dof: f64) -> Vec<UncertaintyRow> {
    let Ok(meter) = record.meter() else { return Vec::new() };
    let MeanState { temperature, line_pressure, relative_humidity } = *state;
    let law = Conditions::new(&record.element, &record.fluid, temperature, line_pressure, relative_humidity);
    let Ok(law) = law else { return Vec::new() };
    let Ok(top) = law.flow(full) else { return Vec::new() };
    let low = (f64::from(record.quality.x_min_m) * law.viscosity(line_pressure)).min(top.mass);
    let at = |i: usize| {
        let mass = low * (top.mass / low).powf(i as f64 / (ROWS - 1) as f64);
        let drop = if i == ROWS - 1 { full } else { law.pressure_drop(mass).ok()? };
        let flow = meter.flow(&reading(state, drop)).ok()?;
        let (u, k) = (flow.uncertainty, coverage(&flow, dof));
        Some(UncertaintyRow {
            flow: f64::from(flow.volume.as_cubic_metres_per_second()),
            pressure_drop: drop,
            type_a: f64::from(u.fit),
            common: f64::from(u.common),
            sensors: f64::from(u.sensors),
            expanded: k * f64::from(u.combined()),
            coverage_factor: k,
        })
    };
    (0..ROWS).filter_map(at).collect()
}

/// The budget at full scale and at a tenth of it.
pub fn budget(record: &Record, state: &MeanState, full: f64, common: &[CommonShift], dof: f64) -> Vec<BudgetRow> {
    let Ok(meter) = record.meter() else { return Vec::new() };
    let rows = |at: f64| {
        let reading = reading(state, at * full);
        let (flow, u_viscosity) = (meter.flow(&reading).ok()?, meter.viscosity_uncertainty(&reading).ok()?);
        Some(budget_at(record, &flow, u_viscosity, at, &reading, common, dof))
    };
    BUDGET_AT.iter().filter_map(|&at| rows(at)).flatten().collect()
}

/// A source of the budget: name, part, standard uncertainty, unit, sensitivity.
type Line = (String, &'static str, f64, &'static str, f64);

fn budget_at(
    record: &Record,
    flow: &Flow,
    u_viscosity: [f32; 2],
    at: f64,
    reading: &Reading,
    common: &[CommonShift],
    dof: f64,
) -> Vec<BudgetRow> {
    let s = &flow.sensitivities;
    let (drop, p) = (f64::from(reading.pressure_drop.as_pascals()), f64::from(reading.line_pressure.as_pascals()));
    let [drop_s, t_s, p_s, mu_s, x] =
        [s.pressure_drop, s.temperature, s.line_pressure, s.viscosity, s.x].map(f64::from);
    let sensors = &record.sensors;
    let u = |value: f32| f64::from(value);
    let mut lines: Vec<Line> = vec![("fit of A and B".into(), "fit", u(flow.uncertainty.fit), "rel", 1.0)];
    // The calibration's viscosity part cancels on the fluid it was made with.
    for shift in common.iter().filter(|shift| shift.cause != Cause::Viscosity && shift.u > 0.0) {
        let a = f64::from(record.element.a());
        let effect = (shift.shift[0] / a + shift.shift[1] / a * x) * mu_s;
        let unit = if shift.cause == Cause::Temperature { "K" } else { "rel" };
        lines.push((
            format!("{} (bench)", shift.cause.name().replace('-', " ")),
            "common",
            shift.u,
            unit,
            effect / shift.u,
        ));
    }
    let water = if reading.relative_humidity.is_some() { "viscosity of moist air" } else { "humidity not stated" };
    lines.push(("viscosity ratio over temperature".into(), "common", u(u_viscosity[0]), "rel", mu_s));
    lines.push((water.into(), "common", u(u_viscosity[1]), "rel", mu_s));
    lines.push(("pressure drop, zero and noise".into(), "sensors", u(sensors.pressure_drop_pa), "Pa", drop_s / drop));
    lines.push(("pressure drop, gain".into(), "sensors", u(sensors.pressure_drop_rel), "rel", drop_s));
    lines.push(("temperature".into(), "sensors", u(sensors.temperature_k), "K", t_s));
    lines.push(("line pressure, zero".into(), "sensors", u(sensors.line_pressure_pa), "Pa", p_s / p));
    lines.push(("line pressure, gain".into(), "sensors", u(sensors.line_pressure_rel), "rel", p_s));
    if reading.relative_humidity.is_some() {
        lines.push(("humidity".into(), "sensors", u(sensors.relative_humidity), "1", u(s.relative_humidity)));
    }
    let row = |(source, part, u, unit, sensitivity): Line| BudgetRow {
        at,
        source,
        part: part.into(),
        u,
        unit: unit.into(),
        sensitivity,
        contribution: (u * sensitivity).abs(),
        degrees_of_freedom: (part == "fit" && dof.is_finite()).then_some(dof),
    };
    lines.into_iter().filter(|line| line.2 > 0.0).map(row).collect()
}

/// A cause's name and unit for people and files.
pub fn effect(shift: &CommonShift) -> CommonEffect {
    CommonEffect {
        name: shift.cause.name().into(),
        u: shift.u,
        unit: unit_of(shift.cause).into(),
        effect_a: shift.shift[0],
        effect_b: shift.shift[1],
    }
}

/// Unit of a common cause's uncertainty.
fn unit_of(cause: Cause) -> &'static str {
    match cause {
        Cause::Temperature => "K",
        Cause::PressureDropZero => "Pa",
        _ => "rel",
    }
}
