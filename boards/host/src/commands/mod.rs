//! The commands, and what they share.

pub mod calibrate;
pub mod flow;
pub mod fluid;
mod fluid_build;
pub mod plan;
pub mod predict;
pub mod simulate;
pub mod size;

use clap::Args;
use evenbore::quantity::{AbsolutePressure, Temperature};
use evenbore::reading::SensorUncertainty;
use evenbore::reference::ReferenceConditions;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::input::units::Quantity;
use evenbore_bench::input::written::{parse_interval, parse_quantity, parse_reference_conditions};
use std::io::Write;

/// How a command ended.
pub enum Ended {
    /// All done.
    Done,
    /// The calibration run was refused.
    Refused,
}

/// Reads `--reference-conditions`.
pub fn reference_conditions(text: &str) -> Result<ReferenceConditions, String> {
    let given = parse_reference_conditions(text)?;
    let (t, p) = (given.temperature as f32, given.pressure as f32);
    ReferenceConditions::new(Temperature::from_kelvin(t), AbsolutePressure::from_pascals(p)).map_err(|e| e.to_string())
}

/// Standard uncertainties of the instrument's sensors.
#[derive(Debug, Args)]
#[command(next_help_heading = "Standard uncertainties of the instrument's sensors")]
pub struct SensorOptions {
    /// Pressure drop: an absolute part, a relative part, or both, as 0.2Pa,0.1pct
    #[arg(long, value_name = "U", value_parser = pressure_drop_parts)]
    u_pressure_drop: Option<UncertainParts>,
    /// Element temperature, as 0.1K
    #[arg(long, value_name = "U", value_parser = temperature_part)]
    u_temperature: Option<f64>,
    /// Line pressure: an absolute part, a relative part, or both, as 100Pa,0.1pct
    #[arg(long, value_name = "U", value_parser = line_pressure_parts)]
    u_line_pressure: Option<UncertainParts>,
}

/// An absolute part in SI and a relative part.
#[derive(Debug, Clone, Copy, Default)]
pub struct UncertainParts {
    absolute: f64,
    relative: f64,
}

impl SensorOptions {
    /// The options that were given.
    pub fn names(&self) -> String {
        let given = [
            self.u_pressure_drop.map(|_| "--u-pressure-drop"),
            self.u_temperature.map(|_| "--u-temperature"),
            self.u_line_pressure.map(|_| "--u-line-pressure"),
        ];
        given.into_iter().flatten().collect::<Vec<_>>().join(", ")
    }

    /// Where the uncertainties come from when `otherwise` fills in what no option gives.
    pub fn origin(&self, otherwise: &SensorUncertainty) -> String {
        let parts = |absolute: f32, relative: f32| match (absolute > 0.0, relative > 0.0) {
            (true, true) => format!("{absolute} Pa, {} %", 100.0 * relative),
            (true, false) => format!("{absolute} Pa"),
            _ => format!("{} %", 100.0 * relative),
        };
        let drop = parts(otherwise.pressure_drop_pa, otherwise.pressure_drop_rel);
        let line = parts(otherwise.line_pressure_pa, otherwise.line_pressure_rel);
        let all = [
            (self.u_pressure_drop.is_some(), format!("{drop} of pressure drop")),
            (self.u_temperature.is_some(), format!("{} K", otherwise.temperature_k)),
            (self.u_line_pressure.is_some(), format!("{line} of line pressure")),
        ];
        let assumed: Vec<&str> = all.iter().filter(|(given, _)| !given).map(|(_, text)| text.as_str()).collect();
        match assumed.len() {
            0 => "as stated on the command line".into(),
            3 => format!("assumed ({})", assumed.join(", ")),
            _ => format!("as stated on the command line, otherwise assumed ({})", assumed.join(", ")),
        }
    }

    /// The sensors: what the options say over what `otherwise` says.
    pub fn over(&self, otherwise: SensorUncertainty) -> SensorUncertainty {
        let mut sensors = otherwise;
        if let Some(parts) = self.u_pressure_drop {
            (sensors.pressure_drop_pa, sensors.pressure_drop_rel) = (parts.absolute as f32, parts.relative as f32);
        }
        if let Some(kelvin) = self.u_temperature {
            sensors.temperature_k = kelvin as f32;
        }
        if let Some(parts) = self.u_line_pressure {
            (sensors.line_pressure_pa, sensors.line_pressure_rel) = (parts.absolute as f32, parts.relative as f32);
        }
        sensors
    }
}

fn pressure_drop_parts(text: &str) -> Result<UncertainParts, String> {
    parts(text, Quantity::PressureDrop)
}

fn line_pressure_parts(text: &str) -> Result<UncertainParts, String> {
    parts(text, Quantity::LinePressure)
}

fn temperature_part(text: &str) -> Result<f64, String> {
    parse_interval(text, Quantity::Temperature)
}

fn parts(text: &str, quantity: Quantity) -> Result<UncertainParts, String> {
    let mut parts = UncertainParts::default();
    for part in text.split(',') {
        match parse_quantity(part, Quantity::RelativeHumidity) {
            Ok(relative) => parts.relative = relative,
            Err(_) => parts.absolute = parse_interval(part, quantity)?,
        }
    }
    if parts.absolute < 0.0 || parts.relative < 0.0 {
        return Err("an uncertainty cannot be negative".into());
    }
    Ok(parts)
}

/// Text broken into lines of at most 60 columns, the first one indented too, the further ones by `indent`.
pub fn wrapped(text: &str, indent: usize) -> String {
    let mut lines = format!("  {}", text.split(' ').next().unwrap_or_default());
    let mut column = lines.chars().count();
    for word in text.split(' ').skip(1) {
        let length = word.chars().count();
        if column + 1 + length > 60 {
            lines += &format!("\n{:indent$}{word}", "");
            column = indent + length;
        } else {
            lines += &format!(" {word}");
            column += 1 + length;
        }
    }
    lines
}

/// Prints to standard output; a reader that went away ends the command in silence.
pub fn print(text: &str) -> Result<(), Problem> {
    let mut out = std::io::stdout().lock();
    let done = out.write_all(text.as_bytes()).and_then(|()| out.flush());
    done.map_err(|error| Problem::io("standard output", "cannot write", &error))
}

/// A value as JSON text with a line end.
pub fn json(value: &impl serde::Serialize) -> Result<String, Problem> {
    serde_json::to_string_pretty(value)
        .map(|text| text + "\n")
        .map_err(|error| Problem::new("summary", error.to_string()))
}
