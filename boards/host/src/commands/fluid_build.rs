//! `evenbore fluid build`: a stored table from measured values, with its residual, and the lines to use it by.

use super::{Ended, json, print};
use clap::{Args, ValueEnum};
use evenbore::quantity::{AbsolutePressure, Temperature};
use evenbore_bench::input::problem::Problem;
use evenbore_bench::input::units::Quantity;
use evenbore_bench::input::written::{parse_molar_mass, parse_quantity, parse_share};
use evenbore_bench::output::write_whole;
use evenbore_bench::planning::fluid_build::{Built, Declaration, Residual};
use evenbore_bench::resources::fluids::Fluids;
use serde::Serialize;
use std::path::{Path, PathBuf};

/// Arguments of `evenbore fluid build`.
#[derive(Debug, Args)]
pub struct Arguments {
    /// Measured values, CSV: temperature_<unit>, viscosity_Pa_s or viscosity_mPa_s, density_kg_m3
    data: PathBuf,
    /// Name of the fluid
    #[arg(long, value_name = "NAME")]
    name: String,
    /// Phase; a gas needs a molar mass
    #[arg(long, value_enum, default_value = "liquid")]
    phase: PhaseChoice,
    /// Molar mass of a gas, as 44.01g_mol
    #[arg(long, value_name = "M", value_parser = parse_molar_mass)]
    molar_mass: Option<f64>,
    /// Absolute pressure at which a gas has these densities
    #[arg(long, value_name = "P", value_parser = pressure)]
    pressure: Option<f64>,
    /// Relative standard uncertainty of the viscosities; 1pct if not given
    #[arg(long, value_name = "U", value_parser = parse_share)]
    u_viscosity: Option<f64>,
    /// Share by which the stored table may miss a row
    #[arg(long, value_name = "SHARE", default_value = "0.1pct", value_parser = parse_share)]
    limit: f64,
    /// Fluids file to write; the lines go to standard output if not given
    #[arg(long, value_name = "TABLE.toml")]
    out: Option<PathBuf>,
    /// Print the summary as JSON
    #[arg(long)]
    json: bool,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq, ValueEnum)]
enum PhaseChoice {
    Gas,
    Liquid,
}

fn pressure(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::LinePressure)
}

/// The summary as JSON.
#[derive(Debug, Serialize)]
struct Summary<'a> {
    name: &'a str,
    phase: &'static str,
    rows: usize,
    #[serde(rename = "temperature_C")]
    temperature_c: [f32; 2],
    #[serde(rename = "pressure_kPa")]
    pressure_kpa: [f32; 2],
    residual_viscosity: Residual,
    residual_density: Residual,
    u_viscosity_rel: f32,
    stanza: &'a str,
}

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    check(arguments)?;
    let (folder, data) = place(arguments)?;
    let declaration = Declaration {
        name: &arguments.name,
        data: &data,
        molar_mass_g_mol: arguments.molar_mass.map(|kg| clean(kg * 1e3)),
        pressure_kpa: arguments.pressure.map(|pa| clean(pa / 1e3)),
        u_viscosity: arguments.u_viscosity,
        limit: arguments.limit,
    };
    let built = declaration.build(&folder)?;
    if let Some(path) = &arguments.out {
        write_whole(path, built.stanza.as_bytes())?;
    }
    report(arguments, &built)?;
    Ok(Ended::Done)
}

/// Refuses options that contradict each other, and names that the catalogue has.
fn check(arguments: &Arguments) -> Result<(), Problem> {
    let problem = |message: &str| Err(Problem::new("fluid build", message));
    match (arguments.phase, arguments.molar_mass, arguments.pressure) {
        (PhaseChoice::Gas, None, _) => problem("--phase gas needs --molar-mass, as 44.01g_mol"),
        (PhaseChoice::Liquid, Some(_), _) => problem("--molar-mass belongs to --phase gas"),
        (PhaseChoice::Liquid, _, Some(_)) => problem("--pressure belongs to --phase gas"),
        _ if Fluids::default().find(&arguments.name).is_ok() => {
            problem(&format!("{}: a fluid of the catalogue has this name: choose another", arguments.name))
        }
        _ => Ok(()),
    }
}

/// The folder of the fluids file, and how it is to name the data: by name beside it, else by whole path.
fn place(arguments: &Arguments) -> Result<(PathBuf, String), Problem> {
    let folder_of =
        |path: &Path| path.parent().filter(|p| !p.as_os_str().is_empty()).unwrap_or(Path::new(".")).to_owned();
    let data = &arguments.data;
    let shown = data.display().to_string();
    let whole = data.canonicalize().map_err(|error| Problem::io(&shown, "cannot open", &error))?;
    let folder = arguments.out.as_deref().map_or_else(|| PathBuf::from("."), folder_of);
    let beside = folder.canonicalize().is_ok_and(|folder| whole.parent() == Some(&folder));
    let named = if beside { whole.file_name().map(PathBuf::from).unwrap_or_default() } else { whole };
    match named.to_str() {
        Some(text) => Ok((folder, text.to_owned())),
        None => Err(Problem::new(shown, "the path is not UTF-8, which a fluids file is")),
    }
}

/// A number without the digits that a change of unit adds.
fn clean(value: f64) -> f64 {
    format!("{value:.12e}").parse().unwrap_or(value)
}

fn report(arguments: &Arguments, built: &Built) -> Result<(), Problem> {
    let fluid = &built.fluid;
    let [residual_viscosity, residual_density] = built.residuals;
    let summary = Summary {
        name: fluid.name(),
        phase: if arguments.phase == PhaseChoice::Gas { "gas" } else { "liquid" },
        rows: built.rows,
        temperature_c: fluid.temperature_range().map(Temperature::as_celsius),
        pressure_kpa: fluid.pressure_range().map(AbsolutePressure::as_kilopascals),
        residual_viscosity,
        residual_density,
        u_viscosity_rel: fluid.u_viscosity(),
        stanza: &built.stanza,
    };
    let text = if arguments.json { json(&summary)? } else { as_text(arguments, &summary) };
    match &arguments.out {
        Some(path) if path.as_os_str() == "-" => {
            eprint!("{text}");
            Ok(())
        }
        _ => print(&text),
    }
}

/// What a person at a terminal of 60 columns wants to know.
fn as_text(arguments: &Arguments, s: &Summary<'_>) -> String {
    let ([t_low, t_high], [p_low, p_high]) = (s.temperature_c, s.pressure_kpa);
    let mut text = format!(
        "{}: {} of {} rows, {t_low:.2} to {t_high:.2} C\n  stored for {p_low} to {p_high} kPa absolute\n  u(viscosity) {:.3} %\n",
        s.name,
        s.phase,
        s.rows,
        100.0 * s.u_viscosity_rel
    );
    for (what, residual) in [("viscosity", s.residual_viscosity), ("density", s.residual_density)] {
        text += &format!("  worst row in {what:<9} {:+.1} ppm, line {}\n", residual.ppm, residual.line);
    }
    match &arguments.out {
        Some(path) => text + &format!("use it with --fluids {}\n", path.display()),
        None => text + "\nlines for a fluids file:\n" + s.stanza,
    }
}
