//! The tables of the report: points, budget and shared effects, as rows of finished text.

use super::characteristic::limits;
use super::numbers::{self, MISSING};
use super::residuals::LITRES_PER_MINUTE;
use super::words;
use crate::calibrate::outcome::{BudgetRow, Calibration, CommonEffect, ResidualRow};
use minijinja::{Value, context};

/// Zero of the Celsius scale, K.
const CELSIUS_ZERO: f64 = 273.15;

/// Rows of the point table; every column keeps one number of decimals.
pub fn points(calibration: &Calibration) -> Vec<Value> {
    let rows = &calibration.residuals;
    let drop = numbers::decimals_for(rows.iter().map(|row| row.pressure_drop), 4);
    let flow = numbers::decimals_for(rows.iter().map(|row| row.reference_flow * LITRES_PER_MINUTE), 4);
    let error = residual_decimals(rows);
    let row = |row: &ResidualRow| {
        context! {
            line => row.line,
            pressure_drop => numbers::fixed(row.pressure_drop, drop),
            temperature => numbers::fixed(row.temperature - CELSIUS_ZERO, 2),
            pressure => numbers::fixed(row.line_pressure / 1000.0, 2),
            flow => numbers::fixed(row.reference_flow * LITRES_PER_MINUTE, flow),
            reynolds => row.reynolds.map_or_else(|| MISSING.to_string(), |re| numbers::fixed(re, 0)),
            residual => numbers::signed(row.residual_rel * 100.0, error),
            units => numbers::signed(row.residual_u, 2),
            leave_one_out => numbers::signed(row.leave_one_out, 2),
            used => row.used,
        }
    };
    rows.iter().map(row).collect()
}

/// Decimals of residuals in percent: the place of two significant digits of the smallest of their uncertainties.
fn residual_decimals(rows: &[ResidualRow]) -> i32 {
    let u = |row: &ResidualRow| (row.residual_rel / row.residual_u * 100.0).abs();
    let smallest = rows.iter().filter(|row| row.used).map(u).filter(|u| u.is_finite() && *u > 0.0).reduce(f64::min);
    smallest.and_then(numbers::place_of_uncertainty).map_or(3, |place| (-place).clamp(1, 5))
}

/// The budget, one group for each flow it is made for, largest first.
pub fn budget(calibration: &Calibration) -> Vec<Value> {
    let mut places: Vec<f64> = calibration.budget.iter().map(|row| row.at).collect();
    places.sort_by(|a, b| b.total_cmp(a));
    places.dedup();
    places.into_iter().map(|at| budget_group(&calibration.budget, at)).collect()
}

fn budget_group(rows: &[BudgetRow], at: f64) -> Value {
    let members: Vec<&BudgetRow> = rows.iter().filter(|row| row.at.total_cmp(&at).is_eq()).collect();
    let variance: f64 = members.iter().map(|row| row.contribution * row.contribution).sum();
    let smallest = members.iter().map(|row| row.contribution.abs()).chain([variance.sqrt()]);
    let (_, largest) = limits(smallest);
    let decimals = numbers::place_of_uncertainty(largest * 100.0).map_or(2, |place| (1 - place).clamp(1, 9));
    let rows: Vec<Value> = members.iter().map(|row| budget_row(row, variance, decimals)).collect();
    context! {
        heading => budget_heading(at),
        rows => rows,
        combined => numbers::fixed(variance.sqrt() * 100.0, decimals),
    }
}

fn budget_heading(at: f64) -> String {
    if at == 1.0 {
        return "At the largest calibrated pressure drop (full scale)".to_string();
    }
    format!("At {} % of the largest calibrated pressure drop", numbers::freedom(at * 100.0))
}

fn budget_row(row: &BudgetRow, variance: f64, decimals: i32) -> Value {
    let share = if variance > 0.0 { row.contribution * row.contribution / variance * 100.0 } else { 0.0 };
    let (u, unit) = with_unit(row.u, &row.unit);
    // A relative source is shown in percent, so its sensitivity is in percent per percent.
    let per_percent = if row.unit == "rel" { 1.0 } else { 100.0 };
    context! {
        source => words::capitalised(&row.source),
        part => &row.part,
        u => u,
        unit => unit,
        sensitivity => numbers::significant(row.sensitivity * per_percent, 3),
        sensitivity_unit => if row.unit == "rel" { "%/%".to_string() } else { format!("%/{}", printed_unit(&row.unit)) },
        contribution => numbers::fixed(row.contribution.abs() * 100.0, decimals),
        share => numbers::fixed(share, 0),
        bar => format!("{:.1}", if share.is_finite() { share.clamp(0.0, 100.0) } else { 0.0 }),
        freedom => row.degrees_of_freedom.map_or_else(|| "∞".to_string(), numbers::freedom),
    }
}

/// Rows of the table of effects shared by all points.
pub fn common(calibration: &Calibration) -> Vec<Value> {
    let relative = |effect: f64, whole: f64| numbers::significant(effect / whole * 100.0, 2);
    let row = |effect: &CommonEffect| {
        let (u, unit) = with_unit(effect.u, &effect.unit);
        context! {
            name => words::capitalised(&effect.name.replace('-', " ")),
            u => u,
            unit => unit,
            effect_a => relative(effect.effect_a, calibration.a),
            effect_b => relative(effect.effect_b, calibration.b),
        }
    };
    calibration.common.iter().map(row).collect()
}

/// An uncertainty and its unit as printed: relative ones in percent.
fn with_unit(u: f64, unit: &str) -> (String, String) {
    if unit == "rel" {
        return (numbers::percent(u), "%".to_string());
    }
    (numbers::significant(u, 2), printed_unit(unit))
}

/// A unit with its exponents raised.
fn printed_unit(unit: &str) -> String {
    match unit {
        "1/m3" => "m⁻³".to_string(),
        "1/m4" => "m⁻⁴".to_string(),
        "m3/s" => "m³/s".to_string(),
        other => other.to_string(),
    }
}
