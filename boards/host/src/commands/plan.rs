//! `evenbore plan`: the points of a calibration that reach a target, before anyone goes to the bench.

use super::{Ended, SensorOptions, json, print};
use clap::{Args, ValueEnum};
use evenbore::reading::SensorUncertainty;
use evenbore::regime::LAMINAR_LIMIT;
use evenbore_bench::input::element_file::ElementFile;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::input::units::Quantity;
use evenbore_bench::input::written::{parse_quantity, parse_share, parse_span};
use evenbore_bench::output::write_whole;
use evenbore_bench::planning::bench::Bench;
use evenbore_bench::planning::planner::plan;
use evenbore_bench::planning::points_file::skeleton;
use evenbore_bench::planning::schedule::{Counting, Goal, Plan, Reached, SetPoint};
use evenbore_bench::planning::spacing::Spacing;
use evenbore_bench::planning::state::State;
use evenbore_bench::resources::elements::{has_nominal_coefficients, nominal};
use evenbore_bench::resources::fluids::Fluids;
use serde::Serialize;
use std::fmt::Write;
use std::path::PathBuf;

/// Arguments of `evenbore plan`.
#[derive(Debug, Args)]
pub struct Arguments {
    /// Element file, TOML
    #[arg(long, value_name = "ELEMENT.toml")]
    element: PathBuf,
    /// Fluid of the calibration
    #[arg(long, value_name = "NAME")]
    fluid: String,
    /// Expanded uncertainty (k = 2) to reach, as 0.5pct
    #[arg(long, value_name = "U", value_parser = target)]
    target: f64,
    /// Flows over which to reach it, as shares of full scale
    #[arg(long, value_name = "LOW..HIGH", default_value = "10pct..100pct", value_parser = shares)]
    over: Span,
    /// What counts against the target: the flow with the sensors in use, or the calibration alone
    #[arg(long, value_enum, value_name = "WHAT", default_value = "flow")]
    counting: CountingChoice,
    /// Pressure drop at full scale
    #[arg(long, value_name = "P", default_value = "2.5kPa", value_parser = pressure_drop)]
    full_scale_pressure_drop: f64,
    /// Temperature of the bench
    #[arg(long, value_name = "T", default_value = "20C", allow_hyphen_values = true, value_parser = temperature)]
    temperature: f64,
    /// Absolute pressure at the upstream port
    #[arg(long, value_name = "P", default_value = "101.325kPa", value_parser = line_pressure)]
    line_pressure: f64,
    /// Reference flow: standard uncertainty that varies from point to point
    #[arg(long, value_name = "U", default_value = "0.1pct", value_parser = parse_share)]
    u_reference_flow: f64,
    /// Reference flow: standard uncertainty that all points share
    #[arg(long, value_name = "U", default_value = "0.15pct", value_parser = parse_share)]
    u_reference_flow_common: f64,
    /// Most points, repeats included
    #[arg(long, value_name = "N", default_value = "40", value_parser = clap::value_parser!(u32).range(1..=400))]
    max_points: u32,
    /// Fluids of your own, TOML
    #[arg(long, value_name = "FLUIDS.toml")]
    fluids: Option<PathBuf>,
    /// Write a points file to fill in; - for standard output
    #[arg(long, value_name = "PLAN.csv")]
    out: Option<PathBuf>,
    /// Print as JSON
    #[arg(long)]
    json: bool,
    #[command(flatten)]
    sensors: SensorOptions,
}

#[derive(Debug, Clone, Copy, ValueEnum)]
enum CountingChoice {
    Flow,
    Calibration,
}

type Span = [f64; 2];

fn target(text: &str) -> Result<f64, String> {
    match parse_share(text)? {
        share if share > 0.0 && share < 1.0 => Ok(share),
        _ => Err("a target above 0 and below 100 pct was expected".into()),
    }
}

fn shares(text: &str) -> Result<Span, String> {
    let [low, high] = parse_span(text, parse_share)?;
    if low >= 0.001 && high <= 1.0 && high >= 1.2 * low {
        return Ok([low, high]);
    }
    Err("a range within 0.1pct..100pct was expected, its upper end 1.2 times the lower or more".into())
}

fn pressure_drop(text: &str) -> Result<f64, String> {
    match parse_quantity(text, Quantity::PressureDrop)? {
        drop if drop > 0.0 => Ok(drop),
        _ => Err("a pressure drop above 0 was expected".into()),
    }
}

fn temperature(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::Temperature)
}

fn line_pressure(text: &str) -> Result<f64, String> {
    parse_quantity(text, Quantity::LinePressure)
}

/// The plan as JSON.
#[derive(Debug, Serialize)]
struct Summary<'a> {
    serial: &'a str,
    fluid: &'a str,
    target: f64,
    over: Span,
    counting: Counting,
    spacing: Spacing,
    points: usize,
    set_points: &'a [SetPoint],
    worst_expanded: f64,
    reached: &'a [Reached],
}

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    let name = arguments.element.display().to_string();
    let file = ElementFile::open(&arguments.element)?;
    if !has_nominal_coefficients(&file) {
        return Err(Problem::new(name, "an element of shape \"other\" has no nominal flow to plan with"));
    }
    let element = nominal(&file).map_err(|error| Problem::new(&name, error.to_string()))?;
    let fluids = Fluids::open(arguments.fluids.as_deref())?;
    let problem = |message: String| Problem::new("plan", message);
    let bench = Bench {
        element: &element,
        fluid: fluids.find(&arguments.fluid).map_err(problem)?,
        state: State::dry(arguments.temperature, arguments.line_pressure),
        sensors: arguments.sensors.over(SensorUncertainty::COMMON),
        u_reference: arguments.u_reference_flow,
        u_reference_common: arguments.u_reference_flow_common,
    };
    let goal = Goal {
        target: arguments.target,
        over: arguments.over,
        full_scale: arguments.full_scale_pressure_drop,
        counting: match arguments.counting {
            CountingChoice::Flow => Counting::Flow,
            CountingChoice::Calibration => Counting::Calibration,
        },
        most_points: arguments.max_points as usize,
    };
    check(&bench, &goal).map_err(problem)?;
    let plan = plan(&bench, &goal).map_err(problem)?;
    if let Some(path) = &arguments.out {
        write_whole(path, skeleton(&bench, &plan).as_bytes())?;
    }
    let text = if arguments.json {
        json(&summary(&file, &bench, &goal, &plan))?
    } else {
        as_text(arguments, &file, &bench, &goal, &plan)
    };
    let to_stdout = arguments.out.as_deref().is_some_and(|path| path.as_os_str() == "-");
    if to_stdout {
        eprint!("{text}")
    } else {
        print(&text)?
    }
    Ok(Ended::Done)
}

/// Refuses a bench that no plan could serve: nothing to weigh, or a full scale that is not laminar.
fn check(bench: &Bench<'_>, goal: &Goal) -> Result<(), String> {
    if bench.uncertainties(goal.full_scale).iter().all(|&u| u == 0.0) {
        return Err("every uncertainty that varies from point to point is 0: there is nothing to plan".into());
    }
    let law = bench.state.law(bench.element, bench.fluid);
    let flow = law.and_then(|law| law.flow(goal.full_scale));
    let flow = flow.map_err(|refusal| bench.state.refused(bench.fluid, refusal))?;
    let reynolds = bench.element.reynolds(flow.x as f32);
    if reynolds > LAMINAR_LIMIT {
        return Err(format!(
            "--full-scale-pressure-drop {} Pa drives Re {reynolds:.0}, the law holds to {LAMINAR_LIMIT}: give less",
            goal.full_scale
        ));
    }
    Ok(())
}

fn summary<'a>(file: &'a ElementFile, bench: &Bench<'a>, goal: &Goal, plan: &'a Plan) -> Summary<'a> {
    Summary {
        serial: &file.serial,
        fluid: bench.fluid.name(),
        target: goal.target,
        over: goal.over,
        counting: goal.counting,
        spacing: plan.spacing,
        points: plan.points(),
        set_points: &plan.set_points,
        worst_expanded: plan.worst,
        reached: &plan.reached,
    }
}

/// What a person at a terminal of 60 columns wants to know.
fn as_text(arguments: &Arguments, file: &ElementFile, bench: &Bench<'_>, goal: &Goal, plan: &Plan) -> String {
    let mut text = String::new();
    let mut line = |words: String| writeln!(text, "{words}").unwrap_or_default();
    let [low, high] = goal.over.map(|share| 100.0 * share);
    line(format!(
        "{} on {} at {:.2} C, {:.3} kPa",
        file.serial,
        bench.fluid.name(),
        bench.state.temperature - 273.15,
        bench.state.line_pressure / 1e3
    ));
    line(format!("{} points at {} set-points, {}", plan.points(), plan.set_points.len(), plan.spacing.words()));
    line(format!(
        "reach {:.3} % over {low:.3} to {high:.0} % of flow (target {:.3} %)\n",
        100.0 * plan.worst,
        100.0 * goal.target
    ));
    line(format!("{:>14} {:>16} {:>8}", "set Pa", "expect L/min", "repeats"));
    for point in &plan.set_points {
        line(format!("{:>14} {:>16.5} {:>8}", point.pressure_drop, point.flow * 6e4, point.repeats));
    }
    line("\nStandard uncertainties, and U (k = 2), % of flow:".into());
    line(format!("{:>8} {:>8} {:>8} {:>8} {:>8} {:>10}", "at flow", "fit", "common", "sensors", "U", "without s."));
    for row in &plan.reached {
        let below = if row.share < goal.over[0] * (1.0 - 1e-9) { "*" } else { " " };
        line(format!(
            "{:>6.0} %{below}{:>8.3} {:>8.3} {:>8.3} {:>8.3} {:>10.3}",
            100.0 * row.share,
            100.0 * row.fit,
            100.0 * row.common,
            100.0 * row.sensors,
            100.0 * row.expanded,
            100.0 * row.expanded_calibration
        ));
    }
    if plan.reached.iter().any(|row| row.share < goal.over[0] * (1.0 - 1e-9)) {
        line("* below the lowest set-point".into());
    }
    line("Without s.: fit and common parts alone. Errors of the\nbench's sensors are taken as independent.".into());
    if let Some(path) = &arguments.out {
        line(format!("Points file to fill in: {}", path.display()));
    }
    text
}
