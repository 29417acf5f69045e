//! `evenbore fluid`: what is stored of each fluid, and its properties at a state.

use super::{Ended, fluid_build, json, print};
use clap::{Args, Subcommand};
use evenbore::Element;
use evenbore::double::Conditions;
use evenbore::fluid::{Phase, StoredFluid, catalogue};
use evenbore::quantity::{AbsolutePressure, RelativeHumidity, Temperature};
use evenbore::status::Refusal;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::input::units::Quantity;
use evenbore_bench::input::written::parse_quantity;
use evenbore_bench::output::write_whole;
use evenbore_bench::planning::fluid_plot;
use evenbore_bench::resources::fluids::Fluids;
use serde::Serialize;
use std::fmt::Write;
use std::path::{Path, PathBuf};

/// Arguments of `evenbore fluid`.
#[derive(Debug, Subcommand)]
pub enum Arguments {
    /// List the stored fluids with range, uncertainty and source
    List(ListArguments),
    /// Print viscosity and density of one fluid at a temperature and pressure
    Show(ShowArguments),
    /// Build a stored table from measured values and say how well it meets them
    ///
    /// The lines written declare the fluid in a fluids file, which names the data and does not copy them: keep both
    /// together. A row that the stored table misses by more than the limit refuses the build.
    #[command(
        after_long_help = "Example:\n  evenbore fluid build brine.csv --name brine --u-viscosity 0.5pct --out fluids.toml"
    )]
    Build(fluid_build::Arguments),
}

/// Arguments of `evenbore fluid list`.
#[derive(Debug, Args)]
pub struct ListArguments {
    /// Fluids of your own, TOML
    #[arg(long, value_name = "FLUIDS.toml")]
    fluids: Option<PathBuf>,
    /// Print as JSON
    #[arg(long)]
    json: bool,
}

/// Arguments of `evenbore fluid show`.
#[derive(Debug, Args)]
pub struct ShowArguments {
    /// Name of the fluid
    name: String,
    /// Temperature, as 25C
    #[arg(long, value_name = "T", default_value = "25C", allow_hyphen_values = true, value_parser = temperature)]
    temperature: f64,
    /// Absolute pressure, as 101.325kPa
    #[arg(long, value_name = "P", default_value = "101.325kPa", value_parser = pressure)]
    pressure: f64,
    /// Relative humidity of air, as 50pct
    #[arg(long, value_name = "RH", value_parser = humidity)]
    relative_humidity: Option<f64>,
    /// Draw viscosity over the table's range, dry, at the pressure
    #[arg(long, value_name = "FILE.svg", conflicts_with = "relative_humidity")]
    plot: Option<PathBuf>,
    /// Fluids of your own, TOML
    #[arg(long, value_name = "FLUIDS.toml")]
    fluids: Option<PathBuf>,
    /// Print as JSON
    #[arg(long)]
    json: bool,
}

fn temperature(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::Temperature)
}

fn pressure(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::LinePressure)
}

fn humidity(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::RelativeHumidity)
}

/// A stored fluid as `list` prints it.
#[derive(Debug, Serialize)]
struct Listed {
    name: String,
    phase: &'static str,
    #[serde(rename = "temperature_C")]
    temperature_c: [f32; 2],
    #[serde(rename = "pressure_kPa")]
    pressure_kpa: [f32; 2],
    molar_mass_kg_mol: f32,
    u_viscosity_rel: f32,
    u_viscosity_ratio_rel: f32,
    #[serde(skip_serializing_if = "Option::is_none")]
    origin: Option<Origin>,
}

/// Where a catalogue fluid's numbers come from.
#[derive(Debug, Serialize)]
struct Origin {
    viscosity_source: &'static str,
    density_source: &'static str,
    viscosity_scale: f32,
    scale_basis: &'static str,
    residual_viscosity_ppm: f32,
    residual_density_ppm: f32,
    uncertainty_basis: &'static str,
}

/// Properties as `show` prints them.
#[derive(Debug, Serialize)]
struct Shown {
    fluid: String,
    #[serde(rename = "temperature_K")]
    temperature_k: f64,
    #[serde(rename = "pressure_Pa")]
    pressure_pa: f64,
    #[serde(rename = "viscosity_Pa_s")]
    viscosity: Option<f32>,
    #[serde(rename = "kinematic_viscosity_m2_s")]
    kinematic_viscosity: Option<f32>,
    #[serde(rename = "density_kg_m3")]
    density: Option<f32>,
    u_viscosity_rel: f32,
    status: String,
}

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    match arguments {
        Arguments::List(list) => run_list(list),
        Arguments::Show(show) => run_show(show),
        Arguments::Build(build) => fluid_build::run(build),
    }
}

fn run_list(arguments: &ListArguments) -> Result<Ended, Problem> {
    let fluids = Fluids::open(arguments.fluids.as_deref())?;
    let listed: Vec<Listed> = fluids.all().map(listed).collect();
    let text = if arguments.json { json(&listed)? } else { listed.iter().map(as_text).collect() };
    print(&text)?;
    Ok(Ended::Done)
}

fn listed(fluid: &StoredFluid) -> Listed {
    let entry = catalogue::find(fluid.name()).filter(|entry| entry.fluid() == fluid);
    Listed {
        name: fluid.name().into(),
        phase: match fluid.phase() {
            Phase::Gas => "gas",
            Phase::Liquid => "liquid",
        },
        temperature_c: fluid.temperature_range().map(Temperature::as_celsius),
        pressure_kpa: fluid.pressure_range().map(AbsolutePressure::as_kilopascals),
        molar_mass_kg_mol: fluid.molar_mass(),
        u_viscosity_rel: fluid.u_viscosity(),
        u_viscosity_ratio_rel: fluid.u_viscosity_ratio(),
        origin: entry.map(|entry| Origin {
            viscosity_source: entry.viscosity_source(),
            density_source: entry.density_source(),
            viscosity_scale: entry.scale(),
            scale_basis: entry.scale_basis(),
            residual_viscosity_ppm: entry.residual_viscosity_ppm(),
            residual_density_ppm: entry.residual_density_ppm(),
            uncertainty_basis: entry.uncertainty_basis(),
        }),
    }
}

fn as_text(fluid: &Listed) -> String {
    let ([t_low, t_high], [p_low, p_high]) = (fluid.temperature_c, fluid.pressure_kpa);
    let mut text = format!(
        "{}: {}, {t_low:.1} to {t_high:.1} C, {p_low} to {p_high} kPa, u(viscosity) {:.2} %\n",
        fluid.name,
        fluid.phase,
        100.0 * fluid.u_viscosity_rel
    );
    if let Some(origin) = &fluid.origin {
        let _ = write!(
            text,
            "  viscosity: {}\n    scaled by {:.5} ({}); table within {} ppm\n  density: {}; table within {} ppm\n",
            origin.viscosity_source,
            origin.viscosity_scale,
            origin.scale_basis,
            origin.residual_viscosity_ppm,
            origin.density_source,
            origin.residual_density_ppm
        );
    }
    text
}

fn run_show(arguments: &ShowArguments) -> Result<Ended, Problem> {
    let fluids = Fluids::open(arguments.fluids.as_deref())?;
    let fluid = fluids.find(&arguments.name).map_err(|message| Problem::new("fluid", message))?;
    let shown = properties(arguments, fluid);
    if let Some(path) = &arguments.plot {
        write_plot(path, fluid, arguments.pressure)?;
    }
    if arguments.json {
        print(&json(&shown)?)?;
    } else {
        print(&show_text(&shown))?;
    }
    if shown.viscosity.is_some() { Ok(Ended::Done) } else { Err(outside(fluid, &shown.status)) }
}

/// Draws the viscosity at a pressure (Pa) that the table has.
fn write_plot(path: &Path, fluid: &StoredFluid, pressure: f64) -> Result<(), Problem> {
    let [low, high] = fluid.pressure_range().map(|p| f64::from(p.as_pascals()));
    if !(low..=high).contains(&pressure) {
        return Err(outside(fluid, &Refusal::PRESSURE_OUTSIDE_TABLE.to_string()));
    }
    write_whole(path, fluid_plot::draw(fluid, pressure).as_bytes())
}

fn properties(arguments: &ShowArguments, fluid: &StoredFluid) -> Shown {
    let t = Temperature::from_kelvin(arguments.temperature as f32);
    let p = AbsolutePressure::from_pascals(arguments.pressure as f32);
    let humidity = arguments.relative_humidity.map(|fraction| RelativeHumidity::from_fraction(fraction as f32));
    let found: Result<_, Refusal> = fluid.properties(t, p, humidity);
    let (viscosity, density) = found.map_or((None, None), |(mu, rho)| (Some(mu), Some(rho)));
    Shown {
        fluid: fluid.name().into(),
        temperature_k: arguments.temperature,
        pressure_pa: arguments.pressure,
        viscosity: viscosity.map(|mu| mu.as_pascal_seconds()),
        kinematic_viscosity: viscosity.zip(density).map(|(mu, rho)| mu.kinematic(rho).as_square_metres_per_second()),
        density: density.map(|rho| rho.as_kilograms_per_cubic_metre()),
        u_viscosity_rel: fluid.u_viscosity_at(t).hypot(u_of_water(arguments, fluid)),
        status: found.map_or_else(|refusal| refusal.to_string(), |_| "good".into()),
    }
}

/// Relative standard uncertainty of viscosity from the water of air whose humidity is given.
fn u_of_water(arguments: &ShowArguments, fluid: &StoredFluid) -> f32 {
    let at = |humidity: f64| {
        let any = Element::other(1.0, 0.0).ok()?;
        Conditions::new(&any, fluid, arguments.temperature, arguments.pressure, Some(humidity)).ok()
    };
    arguments.relative_humidity.and_then(at).map_or(0.0, |conditions| conditions.u_viscosity_of_water() as f32)
}

fn show_text(shown: &Shown) -> String {
    let number = |value: Option<f32>| value.map_or("-".into(), |value| format!("{value:.6e}"));
    format!(
        "{} at {:.2} C, {} kPa absolute\n  viscosity            {} Pa s (standard uncertainty {:.2} %)\n  \
         kinematic viscosity  {} m2/s\n  density              {} kg/m3\n",
        shown.fluid,
        shown.temperature_k - 273.15,
        shown.pressure_pa / 1e3,
        number(shown.viscosity),
        100.0 * shown.u_viscosity_rel,
        number(shown.kinematic_viscosity),
        number(shown.density)
    )
}

fn outside(fluid: &StoredFluid, status: &str) -> Problem {
    let [t_low, t_high] = fluid.temperature_range().map(Temperature::as_celsius);
    let [p_low, p_high] = fluid.pressure_range().map(AbsolutePressure::as_kilopascals);
    if status == Refusal::HUMIDITY_INVALID.to_string() {
        let message = format!(
            "{status}: a relative humidity belongs to air and lies within 0 to 100 % at -20 to 60 C, the fluid is {}",
            fluid.name()
        );
        return Problem::new("fluid show", message);
    }
    let message = format!(
        "{status}: {} is stored for {t_low:.2} to {t_high:.2} C and {p_low} to {p_high} kPa absolute",
        fluid.name()
    );
    Problem::new("fluid show", message)
}
