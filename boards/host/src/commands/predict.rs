//! `evenbore predict`: what a calibrated element is worth on another fluid, at another temperature and pressure.

use super::{Ended, SensorOptions, json, print, wrapped};
use clap::Args;
use evenbore::Record;
use evenbore::fluid::StoredFluid;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::input::units::Quantity;
use evenbore_bench::input::written::parse_quantity;
use evenbore_bench::output::write_whole;
use evenbore_bench::planning::budget::{Budget, Source};
use evenbore_bench::planning::prediction::{Prediction, Question, RowSummary};
use evenbore_bench::planning::prediction_page::{render, table};
use evenbore_bench::planning::state::State;
use evenbore_bench::record_file;
use evenbore_bench::resources::fluids::Fluids;
use serde::Serialize;
use std::fmt::Write;
use std::path::{Path, PathBuf};

/// Arguments of `evenbore predict`.
#[derive(Debug, Args)]
pub struct Arguments {
    /// Calibration record, record.toml or record.bin
    #[arg(long, value_name = "RECORD.toml")]
    record: PathBuf,
    /// Fluid in use; that of the calibration if not given
    #[arg(long, value_name = "NAME")]
    fluid: Option<String>,
    /// Temperature in use, as 40C
    #[arg(long, value_name = "T", default_value = "20C", allow_hyphen_values = true, value_parser = temperature)]
    temperature: f64,
    /// Absolute pressure at the upstream port, as 150kPa
    #[arg(long, value_name = "P", default_value = "101.325kPa", value_parser = line_pressure)]
    line_pressure: f64,
    /// Relative humidity of air, as 50pct
    #[arg(long, value_name = "RH", value_parser = humidity)]
    relative_humidity: Option<f64>,
    /// Largest pressure drop of interest; if not given, that of the largest calibrated flow, on this fluid or on that
    /// of the calibration, whichever is less
    #[arg(long, value_name = "P", value_parser = pressure_drop)]
    pressure_drop: Option<f64>,
    /// Points of the curve
    #[arg(long, value_name = "N", default_value = "9", value_parser = clap::value_parser!(u32).range(2..=1000))]
    points: u32,
    /// Fluids of your own, TOML
    #[arg(long, value_name = "FLUIDS.toml")]
    fluids: Option<PathBuf>,
    /// Folder for prediction.csv and prediction.html; made if it is not there
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
    /// Print as JSON
    #[arg(long)]
    json: bool,
    #[command(flatten)]
    sensors: SensorOptions,
}

fn temperature(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::Temperature)
}

fn line_pressure(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::LinePressure)
}

fn humidity(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::RelativeHumidity)
}

fn pressure_drop(text: &str) -> Result<f64, String> {
    match parse_quantity(text, Quantity::PressureDrop)? {
        drop if drop > 0.0 => Ok(drop),
        _ => Err("a pressure drop above 0 was expected".into()),
    }
}

/// The prediction as JSON.
#[derive(Debug, Serialize)]
struct Summary<'a> {
    serial: &'a str,
    fluid: &'a str,
    calibrated_on: &'a str,
    #[serde(rename = "temperature_K")]
    temperature: f64,
    #[serde(rename = "line_pressure_Pa")]
    line_pressure: f64,
    relative_humidity: Option<f64>,
    flows: Vec<RowSummary>,
    budgets: &'a [Budget],
}

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    let record = record_file::open(&arguments.record)?;
    let fluids = Fluids::open(arguments.fluids.as_deref())?;
    let question = question(arguments, &record, &fluids)?;
    let prediction = question.answer().map_err(|message| Problem::new("predict", message))?;
    if let Some(folder) = &arguments.out {
        write_results(folder, &question, &prediction)?;
    }
    let text = if arguments.json {
        json(&summary(&question, &prediction))?
    } else {
        as_text(arguments, &question, &prediction)
    };
    print(&text)?;
    Ok(Ended::Done)
}

fn question<'a>(arguments: &Arguments, record: &'a Record, fluids: &'a Fluids) -> Result<Question<'a>, Problem> {
    let name = arguments.fluid.as_deref().unwrap_or(record.fluid.name());
    // The record's own table stands for the fluid it was calibrated with.
    let fluid: &StoredFluid = if name == record.fluid.name() {
        &record.fluid
    } else {
        fluids.find(name).map_err(|message| Problem::new("predict", message))?
    };
    Ok(Question {
        record,
        fluid,
        state: State {
            temperature: arguments.temperature,
            line_pressure: arguments.line_pressure,
            humidity: arguments.relative_humidity,
        },
        sensors: arguments.sensors.over(record.sensors),
        full_scale: arguments.pressure_drop,
        points: arguments.points as usize,
    })
}

fn write_results(folder: &Path, question: &Question<'_>, prediction: &Prediction) -> Result<(), Problem> {
    let name = folder.display().to_string();
    std::fs::create_dir_all(folder).map_err(|error| Problem::io(&name, "cannot make the folder", &error))?;
    let command = std::env::args().skip(1).fold("evenbore".to_string(), |line, word| line + " " + &word);
    let page = render(question, prediction, &command)
        .map_err(|error| Problem::new("prediction.html", format!("cannot be made: {error}")))?;
    write_whole(folder.join("prediction.csv"), table(question, prediction).as_bytes())?;
    write_whole(folder.join("prediction.html"), page.as_bytes())
}

fn summary<'a>(question: &Question<'a>, prediction: &'a Prediction) -> Summary<'a> {
    Summary {
        serial: &question.record.serial,
        fluid: question.fluid.name(),
        calibrated_on: question.record.fluid.name(),
        temperature: question.state.temperature,
        line_pressure: question.state.line_pressure,
        relative_humidity: question.state.humidity,
        flows: prediction.rows.iter().map(RowSummary::from).collect(),
        budgets: &prediction.budgets,
    }
}

/// What a person at a terminal of 60 columns wants to know.
fn as_text(arguments: &Arguments, question: &Question<'_>, prediction: &Prediction) -> String {
    let (record, state) = (question.record, &question.state);
    let mut text = String::new();
    let mut line = |words: String| writeln!(text, "{words}").unwrap_or_default();
    let humid = state.humidity.map_or_else(String::new, |h| format!(", {:.0} % RH", 100.0 * h));
    line(format!(
        "{} on {} at {:.2} C, {:.3} kPa{humid}",
        record.serial,
        question.fluid.name(),
        state.temperature - 273.15,
        state.line_pressure / 1e3
    ));
    line(format!("calibrated on {} at {:.2} C\n", record.fluid.name(), record.quality.temperature_k.as_celsius()));
    line(format!("{:>10} {:>12} {:>7} {:>8}  status", "drop Pa", "flow L/min", "Re", "U %"));
    for row in &prediction.rows {
        line(format!(
            "{:>10.2} {:>12.5} {:>7.1} {:>8.3}  {}",
            row.pressure_drop,
            row.volume() * 6e4,
            row.flow.reynolds,
            100.0 * row.expanded(),
            row.flow.status
        ));
    }
    for budget in &prediction.budgets {
        line(budget_text(budget));
    }
    if let Some(folder) = &arguments.out {
        line(format!("\nIn {}: prediction.csv, prediction.html", folder.display()));
    }
    text
}

fn budget_text(budget: &Budget) -> String {
    let heading = if budget.at == 1.0 { "full scale".to_string() } else { "10 % of that drop".to_string() };
    let mut text = format!(
        "\nAt {heading}, {:.2} Pa: U = {:.3} % (k = {:.2})\n  {:<40}{:>8}{:>7}\n",
        budget.pressure_drop,
        100.0 * budget.expanded_rel,
        budget.coverage_factor,
        "",
        "% flow",
        "share"
    );
    let row = |row: &Source| {
        let (u, unit) = if row.unit == "rel" { (100.0 * row.u, "%") } else { (row.u, row.unit) };
        let per = if row.unit == "rel" { row.sensitivity } else { 100.0 * row.sensitivity };
        let free = row.degrees_of_freedom.map_or_else(String::new, |dof| format!(", {dof:.0} degrees of freedom"));
        format!(
            "  {:<40}{:>8.4}{:>5.0} %\n      u = {u:.3} {unit}, {}, x {per:.3} %/{unit}{free}\n",
            row.source,
            100.0 * row.contribution,
            row.share_pct,
            row.distribution
        )
    };
    budget.sources.iter().for_each(|source| text.push_str(&row(source)));
    let words = "combined (root of the sum of squares)";
    let _ = writeln!(text, "  {words:<40}{:>8.4}", 100.0 * budget.combined_rel);
    text += &wrapped(&format!("Largest: {}", budget.dominant), 4);
    text
}
