//! What the calibrated meter is worth over its range: the instrument's own statement, and where it comes from.

use crate::calibrate::fit::CommonShift;
use crate::calibrate::outcome::{BudgetRow, UncertaintyRow};
use crate::statistics::distributions::coverage_factor;
use crate::statistics::welch::{Component, effective_dof};
use evenbore::calibration::Cause;
use evenbore::flow::Flow;
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
use evenbore::{Meter, Reading, Record};

/// Rows over the range.
const ROWS: usize = 13;
/// Fractions of the largest pressure drop that the budget is made for.
const BUDGET_AT: [f64; 2] = [1.0, 0.1];

/// The instrument's flow at a pressure drop (Pa) and `state` (temperature K, line pressure Pa).
fn flow_at(meter: &Meter<'_>, [t, p]: [f64; 2], drop: f64) -> Option<Flow> {
    let reading = Reading::new(
        PressureDrop::from_pascals(drop as f32),
        Temperature::from_kelvin(t as f32),
        AbsolutePressure::from_pascals(p as f32),
    );
    meter.flow(&reading).ok()
}

/// Coverage factor for 95.45 % when the fit has `dof` degrees of freedom and everything else has infinitely many
/// (Welch-Satterthwaite, JCGM 100:2008 G.2b).
pub fn coverage(flow: &Flow, dof: f64) -> f64 {
    let u = &flow.uncertainty;
    let rest = f64::from(u.common).hypot(f64::from(u.sensors));
    let parts = [Component { uncertainty: f64::from(u.fit), dof }, Component { uncertainty: rest, dof: f64::INFINITY }];
    effective_dof(&parts).and_then(coverage_factor).unwrap_or(2.0)
}

/// Uncertainty over the calibrated range at `state`, by the arithmetic of the instrument.
pub fn uncertainty_rows(record: &Record, state: [f64; 2], dof: f64) -> Vec<UncertaintyRow> {
    let Ok(meter) = record.meter() else { return Vec::new() };
    let [t, p] = state;
    let law = evenbore::double::Conditions::new(&record.element, &record.fluid, t, p, None);
    let Ok(law) = law else { return Vec::new() };
    let (low, high) = (f64::from(record.quality.x_min_m), f64::from(record.quality.x_max_m));
    let viscosity = law.viscosity(p);
    let at = |i: usize| {
        let x = low * (high / low).powf(i as f64 / (ROWS - 1) as f64);
        let drop = law.pressure_drop(x * viscosity).ok()?;
        let flow = flow_at(&meter, state, drop)?;
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
pub fn budget(record: &Record, state: [f64; 2], full: f64, common: &[CommonShift], dof: f64) -> Vec<BudgetRow> {
    let Ok(meter) = record.meter() else { return Vec::new() };
    let rows = |at: f64| {
        let drop = at * full;
        flow_at(&meter, state, drop).map(|flow| budget_at(record, &flow, at, drop, common, dof, state))
    };
    BUDGET_AT.iter().filter_map(|&at| rows(at)).flatten().collect()
}

/// A source of the budget: name, part, standard uncertainty, unit, sensitivity.
type Line = (String, &'static str, f64, &'static str, f64);

fn budget_at(
    record: &Record,
    flow: &Flow,
    at: f64,
    drop: f64,
    common: &[CommonShift],
    dof: f64,
    [_, p]: [f64; 2],
) -> Vec<BudgetRow> {
    let s = &flow.sensitivities;
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
    lines.push(("pressure drop, zero and noise".into(), "sensors", u(sensors.pressure_drop_pa), "Pa", drop_s / drop));
    lines.push(("pressure drop, gain".into(), "sensors", u(sensors.pressure_drop_rel), "rel", drop_s));
    lines.push(("temperature".into(), "sensors", u(sensors.temperature_k), "K", t_s));
    lines.push(("line pressure, zero".into(), "sensors", u(sensors.line_pressure_pa), "Pa", p_s / p));
    lines.push(("line pressure, gain".into(), "sensors", u(sensors.line_pressure_rel), "rel", p_s));
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
