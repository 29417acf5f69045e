//! `evenbore size`: elements for a flow and a pressure drop, as a designer would weigh them.

use super::{Ended, SensorOptions, json, print, wrapped};
use clap::{Args, ValueEnum};
use evenbore::reading::SensorUncertainty;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::input::units::Quantity;
use evenbore_bench::input::written::{parse_quantity, parse_share, parse_span};
use evenbore_bench::output::write_whole;
use evenbore_bench::planning::design::Design;
use evenbore_bench::planning::sizing::{ORDER, Shortlist, shortlist};
use evenbore_bench::planning::state::State;
use evenbore_bench::planning::task::{Shapes, Task};
use evenbore_bench::resources::elements::as_toml;
use evenbore_bench::resources::fluids::Fluids;
use serde::Serialize;
use std::fmt::Write;
use std::path::PathBuf;

/// Arguments of `evenbore size`.
#[derive(Debug, Args)]
pub struct Arguments {
    /// Fluid to measure
    #[arg(long, value_name = "NAME")]
    fluid: String,
    /// Largest volume flow, at line temperature and pressure, as 20L_min
    #[arg(long, value_name = "FLOW", value_parser = flow)]
    full_scale: f64,
    /// Pressure drop that full scale may need, as 2kPa
    #[arg(long, value_name = "P", default_value = "2kPa", value_parser = pressure_drop)]
    pressure_drop: f64,
    /// Temperature, or range of temperature as 10C..40C
    #[arg(long, value_name = "T", default_value = "20C", allow_hyphen_values = true, value_parser = temperatures)]
    temperature: Span,
    /// Absolute pressure at the upstream port
    #[arg(long, value_name = "P", default_value = "101.325kPa", value_parser = line_pressure)]
    line_pressure: f64,
    /// Shape of the channels
    #[arg(long, value_enum, default_value = "both")]
    shape: ShapeChoice,
    /// Most tubes or slots in parallel
    #[arg(long, value_name = "N", default_value = "500", value_parser = clap::value_parser!(u32).range(1..=1_000_000))]
    most_channels: u32,
    /// Most designs of each shape to show
    #[arg(long, value_name = "N", default_value = "5", value_parser = clap::value_parser!(u32).range(1..=1000))]
    most: u32,
    /// Reference flow of the calibration to come: standard uncertainty that all points share
    #[arg(long, value_name = "U", default_value = "0.15pct", value_parser = parse_share)]
    u_reference_flow_common: f64,
    /// Standard uncertainty that the fit of the calibration is expected to leave (type A)
    #[arg(long, value_name = "U", default_value = "0.05pct", value_parser = parse_share)]
    u_fit: f64,
    /// Fluids of your own, TOML
    #[arg(long, value_name = "FLUIDS.toml")]
    fluids: Option<PathBuf>,
    /// Write a design as an element file
    #[arg(long, value_name = "FILE.toml")]
    element_out: Option<PathBuf>,
    /// Which design to write, as numbered in the list
    #[arg(long, value_name = "N", default_value = "1", value_parser = clap::value_parser!(u32).range(1..=1000))]
    pick: u32,
    /// Print as JSON
    #[arg(long)]
    json: bool,
    #[command(flatten)]
    sensors: SensorOptions,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum ShapeChoice {
    RoundTubes,
    ParallelPlates,
    Both,
}

type Span = [f64; 2];

fn flow(text: &str) -> Result<f64, String> {
    positive(parse_quantity(text, Quantity::ReferenceFlow)?, "a flow")
}

fn pressure_drop(text: &str) -> Result<f64, String> {
    positive(parse_quantity(text, Quantity::PressureDrop)?, "a pressure drop")
}

fn positive(value: f64, what: &str) -> Result<f64, String> {
    if value > 0.0 { Ok(value) } else { Err(format!("{what} above 0 was expected")) }
}

fn line_pressure(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::LinePressure)
}

fn temperatures(text: &str) -> Result<Span, String> {
    parse_span(text, |text| parse_quantity(text, Quantity::Temperature))
}

/// The shortlist as JSON.
#[derive(Debug, Serialize)]
struct Summary<'a> {
    fluid: &'a str,
    #[serde(rename = "full_scale_m3_s")]
    full_scale: f64,
    #[serde(rename = "temperature_C")]
    temperature: [f64; 2],
    #[serde(rename = "line_pressure_Pa")]
    line_pressure: f64,
    order: &'static str,
    candidates: usize,
    accepted: usize,
    rejected: Vec<Rejected>,
    designs: &'a [Design],
}

#[derive(Debug, Serialize)]
struct Rejected {
    reason: &'static str,
    count: usize,
}

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    let fluids = Fluids::open(arguments.fluids.as_deref())?;
    let fluid = fluids.find(&arguments.fluid).map_err(|message| Problem::new("size", message))?;
    let task = Task {
        fluid,
        flow: arguments.full_scale,
        pressure_drop: arguments.pressure_drop,
        range: arguments.temperature,
        line_pressure: arguments.line_pressure,
        shapes: Shapes {
            tubes: !matches!(arguments.shape, ShapeChoice::ParallelPlates),
            plates: !matches!(arguments.shape, ShapeChoice::RoundTubes),
        },
        sensors: arguments.sensors.over(SensorUncertainty::COMMON),
        u_common: arguments.u_reference_flow_common,
        u_fit: arguments.u_fit,
        most_channels: arguments.most_channels,
    };
    check(&task)?;
    let mut list = shortlist(&task);
    if list.designs.is_empty() {
        return Err(none(&list));
    }
    list.keep(arguments.most as usize);
    let picked = picked(arguments, &list)?;
    if let Some(path) = &arguments.element_out {
        write_whole(path, as_toml(&picked.file).as_bytes())?;
    }
    let text = if arguments.json { json(&summary(&task, &list))? } else { as_text(arguments, &task, &list) };
    let to_stdout = arguments.element_out.as_deref().is_some_and(|path| path.as_os_str() == "-");
    if to_stdout {
        eprint!("{text}")
    } else {
        print(&text)?
    }
    Ok(Ended::Done)
}

/// Refuses a state that the fluid's table does not reach.
fn check(task: &Task<'_>) -> Result<(), Problem> {
    let refused = |state: State, refusal| Problem::new("size", state.refused(task.fluid, refusal));
    for t in task.temperatures() {
        let state = State::dry(t, task.line_pressure);
        let (t, p) = (
            evenbore::quantity::Temperature::from_kelvin(t as f32),
            evenbore::quantity::AbsolutePressure::from_pascals(task.line_pressure as f32),
        );
        task.fluid.properties(t, p, None).map_err(|refusal| refused(state, refusal))?;
    }
    Ok(())
}

fn picked<'a>(arguments: &Arguments, list: &'a Shortlist) -> Result<&'a Design, Problem> {
    let found = list.designs.get(arguments.pick as usize - 1);
    found.ok_or_else(|| {
        let message = format!("--pick {}: the list has {} designs", arguments.pick, list.designs.len());
        Problem::new("size", message)
    })
}

fn rejected(list: &Shortlist) -> Vec<Rejected> {
    let mut rejected: Vec<Rejected> =
        list.rejected.iter().map(|(reason, &count)| Rejected { reason: reason.words(), count }).collect();
    rejected.sort_by_key(|row| std::cmp::Reverse(row.count));
    rejected
}

fn none(list: &Shortlist) -> Problem {
    let reasons: Vec<String> =
        rejected(list).iter().map(|row| format!("\n  {} rejected: {}", row.count, row.reason)).collect();
    let message = format!("no design of {} candidates serves{}", list.candidates, reasons.concat());
    Problem::new("size", message)
}

fn summary<'a>(task: &Task<'a>, list: &'a Shortlist) -> Summary<'a> {
    Summary {
        fluid: task.fluid.name(),
        full_scale: task.flow,
        temperature: task.range.map(|t| (1e6 * (t - 273.15)).round() / 1e6),
        line_pressure: task.line_pressure,
        order: ORDER,
        candidates: list.candidates,
        accepted: list.accepted,
        rejected: rejected(list),
        designs: &list.designs,
    }
}

/// What a person at a terminal of 60 columns wants to know.
fn as_text(arguments: &Arguments, task: &Task<'_>, list: &Shortlist) -> String {
    let mut text = String::new();
    let mut line = |words: String| writeln!(text, "{words}").unwrap_or_default();
    let [low, high] = task.range.map(|t| format!("{:.1}", t - 273.15));
    let range = if low == high { format!("{low} C") } else { format!("{low} to {high} C") };
    line(format!("{:.4} L/min of {}, {range}", task.flow * 6e4, task.fluid.name()));
    line(format!("line pressure {:.3} kPa, full scale at {:.1} Pa\n", task.line_pressure / 1e3, task.pressure_drop));
    for (i, design) in list.designs.iter().enumerate() {
        line(block(i + 1, design));
    }
    line(format!("{} candidates, {} accepted; the best of each bore or gap,", list.candidates, list.accepted));
    line("by shape; U at 10 % of flow in steps of 0.05 %; fewer\nchannels; shorter length.".into());
    line("Rejected:".into());
    for row in rejected(list) {
        line(wrapped(&format!("{} {}", row.count, row.reason), 4));
    }
    line("Bores, gaps, walls and widths are common practice. U is\nexpanded (k = 2), after a calibration, sensors included.\nReading %/K: error per kelvin if not compensated.".into());
    if let Some(path) = &arguments.element_out {
        line(format!("Design {} is in {}", arguments.pick, path.display()));
    }
    text
}

fn block(number: usize, d: &Design) -> String {
    let sizes = match (d.bore_mm, d.gap_mm, d.width_mm) {
        (Some(bore), _, _) => {
            let tubes = if d.count == 1 { "tube" } else { "tubes" };
            format!("{} {tubes}, bore {bore} mm, length {} mm", d.count, d.length_mm)
        }
        (_, Some(gap), Some(width)) => {
            let slots = if d.count == 1 { "slot" } else { "slots" };
            let one = width / f64::from(d.count);
            format!("{} {slots} of {one} mm, gap {gap} mm, length {} mm", d.count, d.length_mm)
        }
        _ => String::new(),
    };
    let percent = |share: f64| 100.0 * share;
    let u: Vec<String> = d.uncertainty.iter().map(|at| format!("{:.2}", percent(at.expanded_rel))).collect();
    let envelope: Vec<String> = d.envelope_mm.iter().map(|mm| format!("{mm:.1}")).collect();
    let about = if d.bore_mm.is_some() { "bundle, diameter x length" } else { "stack" };
    format!(
        "{number:>2}  {sizes}\n    Re {:.0} (margin {:.0} %), kinetic loss {:.1} %, L/D {:.0}\n    slip {:.2} %, ln(p1/p2) \
         {:.4}, reading {:+.3} %/K\n    U at 100/30/10/3 % of flow: {} %\n    open area {:.2} mm2\n    {about}: {} mm\n",
        d.reynolds,
        percent(d.reynolds_margin),
        percent(d.kinetic_share),
        d.length_over_diameter,
        percent(d.slip_share),
        d.log_pressure_ratio,
        percent(d.per_kelvin),
        u.join(" / "),
        d.open_area_mm2,
        envelope.join(" x ")
    )
}
