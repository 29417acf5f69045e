//! The `evenbore` command: parses the command line, runs one command, turns its end into an exit code.

mod commands;

use clap::{Parser, Subcommand};
use commands::{Ended, calibrate, flow, fluid};
use std::process::ExitCode;

/// Calibrates laminar flow elements and computes viscosity-compensated flow from their readings.
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
    Calibrate(calibrate::Arguments),
    /// Compensate readings with the instrument's own arithmetic
    Flow(flow::Arguments),
    /// Show the stored fluids
    #[command(subcommand)]
    Fluid(fluid::Arguments),
}

fn main() -> ExitCode {
    let ended = match Arguments::parse().command {
        Command::Calibrate(arguments) => calibrate::run(&arguments),
        Command::Flow(arguments) => flow::run(&arguments),
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
