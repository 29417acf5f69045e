//! The `evenbore` command: parses the command line, runs one command, turns its end into an exit code.

mod commands;

use clap::{Parser, Subcommand};
use commands::{Ended, calibrate, flow, fluid, plan, predict, simulate, size};
use std::process::ExitCode;

/// Calibrates laminar flow elements and computes viscosity-compensated flow from their readings.
///
/// Files are CSV and TOML with the units in their column names and keys; a minus sign in place of a file is standard
/// input or output. The help of each command says what its files hold.
///
/// Exit codes: 0 done, 2 bad input, 3 calibration run refused.
#[derive(Debug, Parser)]
#[command(name = "evenbore", version, max_term_width = 100)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Fit an element to bench points, judge the run, write record and report
    ///
    /// A point needs the columns pressure_drop_<unit>, temperature_<unit>, line_pressure_<unit> (absolute, at the port
    /// marked upstream) and reference_flow_<unit> or reference_mass_flow_<unit>. A volume flow holds at
    /// reference_temperature_<unit> and reference_pressure_<unit>, or at the element's inlet without them. Beside each,
    /// u_<quantity>_<unit> states the standard uncertainty that varies from point to point, u_<quantity>_common_<unit>
    /// the one that all points share and that does not average away. Without any of the former the scatter of the
    /// points is taken, with fewer degrees of freedom and a larger coverage factor.
    ///
    /// The record states uncertainties for an instrument whose sensors have standard uncertainties of 0.2 Pa and 0.1 %
    /// of pressure drop, 0.1 K, and 0.1 % of line pressure, unless the options below say otherwise.
    ///
    /// The run is refused (exit code 3, no record) when the points do not fit the laminar law within their stated
    /// uncertainties, when one stands out, or when A and B are not those of the drawing; the findings say why.
    #[command(after_long_help = "Example:\n  evenbore calibrate bench.csv --element element.toml --out EB-0042")]
    Calibrate(calibrate::Arguments),
    /// Compensate readings with the instrument's own arithmetic
    ///
    /// A reading needs the columns pressure_drop_<unit>, temperature_<unit> and line_pressure_<unit> (absolute, at the
    /// port marked upstream whichever way the flow goes), or line_gauge_pressure_<unit> with
    /// barometric_pressure_<unit>; relative_humidity_<unit> makes air moist, and its cell stays empty for other fluids.
    /// All columns are carried through. Added are volume_flow (at the line's temperature and pressure), mass_flow,
    /// standard_flow (dry, at the reference conditions), reynolds, u_volume_flow_rel, u_mass_flow_rel,
    /// u_standard_flow_rel (standard, relative) and status: good, or what a flow is flagged with, or why there is none,
    /// in which case its cells are empty. A reading whose pressure drop, temperature or line pressure cell is empty is
    /// such a row; text that is no number, NaN too, stops the file.
    #[command(after_long_help = "Example:\n  evenbore flow day.csv --record EB-0042/record.toml --out flows.csv")]
    Flow(flow::Arguments),
    /// Propose elements for a flow and a pressure drop
    ///
    /// Stock bores or gaps are counted and cut to length by the law until full-scale flow needs the pressure drop at
    /// the worst temperature; each is judged by Reynolds number, kinetic loss, L/D, slip and expansion, and by the
    /// uncertainty that the instrument would state after a calibration of the stated quality.
    #[command(after_long_help = "Example:\n  evenbore size --fluid air --full-scale 20L_min --temperature 10C..40C")]
    Size(size::Arguments),
    /// Plan a calibration: the fewest points that reach a target
    ///
    /// Trial runs go through the fit that a real run goes through. The target is an expanded uncertainty (k = 2) and
    /// holds at every flow of the range, by default with the sensors in use, which are those of the bench. Errors of
    /// the sensors and the first part of the reference's are taken as independent from point to point.
    #[command(
        after_long_help = "Example:\n  evenbore plan --element element.toml --fluid nitrogen --target 0.6pct --out plan.csv"
    )]
    Plan(plan::Arguments),
    /// Predict what a calibrated element is worth on another fluid or at another temperature
    ///
    /// Flows, status and uncertainty are the instrument's own. The budget names each source with its share; its sum is
    /// the uncertainty that the instrument states.
    #[command(
        after_long_help = "Example:\n  evenbore predict --record EB-0042/record.toml --fluid helium --temperature 40C --out there"
    )]
    Predict(predict::Arguments),
    /// Make readings with the true flow beside them, by a virtual element and virtual sensors
    ///
    /// The flow is that of a numerical solution along the channels, which shares no formula with the instrument's law.
    /// A scenario names an element, its sensors with their errors, segments in which pressure drop or flow, temperature
    /// and line pressure hold or move, and faults. The columns are those of a readings file; true_volume_flow_L_min,
    /// true_mass_flow_g_min and faults stand beside them. The same seed gives the same file. A scenario that cannot be
    /// (two phases, vacuum at the outlet, Mach above 0.3) is refused with the physical reason.
    #[command(
        after_long_help = "Example:\n  evenbore simulate examples/workshop/scenarios/gas-bench.toml --out readings.csv"
    )]
    Simulate(simulate::Arguments),
    /// Show the stored fluids, build tables of your own
    #[command(subcommand)]
    Fluid(fluid::Arguments),
}

fn main() -> ExitCode {
    let ended = match Arguments::parse().command {
        Command::Calibrate(arguments) => calibrate::run(&arguments),
        Command::Flow(arguments) => flow::run(&arguments),
        Command::Size(arguments) => size::run(&arguments),
        Command::Plan(arguments) => plan::run(&arguments),
        Command::Predict(arguments) => predict::run(&arguments),
        Command::Simulate(arguments) => simulate::run(&arguments),
        Command::Fluid(arguments) => fluid::run(&arguments),
    };
    match ended {
        Ok(Ended::Done) => ExitCode::SUCCESS,
        Ok(Ended::Refused) => ExitCode::from(3),
        // Whoever reads our output has had enough: nothing to report.
        Err(problem) if problem.is_closed_pipe() => ExitCode::SUCCESS,
        Err(problem) => {
            eprintln!("evenbore: {problem}");
            ExitCode::from(2)
        }
    }
}
