//! `evenbore simulate`: a scenario into readings, the truth beside them.

use super::Ended;
use clap::Args;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::output::write_whole;
use evenbore_bench::virtual_bench::run::{as_csv, simulate};
use evenbore_bench::virtual_bench::scenario::Scenario;
use std::io::{IsTerminal, Write};
use std::path::PathBuf;

/// Arguments of `evenbore simulate`.
#[derive(Debug, Args)]
pub struct Arguments {
    /// Scenario, TOML
    #[arg(value_name = "SCENARIO.toml")]
    scenario: PathBuf,
    /// Readings to write; - for standard output
    #[arg(long, value_name = "READINGS.csv", default_value = "-")]
    out: PathBuf,
    /// Another seed than the scenario's
    #[arg(long, value_name = "N")]
    seed: Option<u64>,
}

/// Tells a terminal how far the segments are; nobody else.
fn progress(done: usize, all: usize) {
    let mut terminal = std::io::stderr();
    if terminal.is_terminal() {
        let line = if done < all { format!("\rsegment {} of {all}", done + 1) } else { "\r\x1b[K".into() };
        let _ = terminal.write_all(line.as_bytes()).and_then(|()| terminal.flush());
    }
}

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    let mut scenario = Scenario::open(&arguments.scenario)?;
    scenario.seed = arguments.seed.unwrap_or(scenario.seed);
    let simulated = simulate(&scenario, &progress)?;
    write_whole(&arguments.out, as_csv(&simulated).as_bytes())?;
    if arguments.out.as_os_str() != "-" {
        let (rows, error) = (simulated.rows.len(), 1e6 * simulated.interpolation_error);
        println!("{rows} readings; flows interpolated within {error:.1} ppm: {}", arguments.out.display());
    }
    Ok(Ended::Done)
}
