//! The coverage table of the README: simulated calibrations and what their stated intervals hold.
//!
//! `cargo run --release -p evenbore-bench --example coverage_table` draws 20 000 runs of each case; a number behind `--`
//! draws that many.

use evenbore_bench::proof::coverage::{CASES, markdown, table};

fn main() -> Result<(), String> {
    let runs = match std::env::args().nth(1) {
        None => 20_000,
        Some(text) => text.parse().map_err(|_| format!("{text:?} is not a number of runs"))?,
    };
    print!("{}", markdown(&table(&CASES, runs)?));
    Ok(())
}
