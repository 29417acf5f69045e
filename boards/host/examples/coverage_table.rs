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
    let rows = table(&CASES, runs)?;
    print!("{}", markdown(&rows));
    for row in rows {
        if let Some(share) = row.covered_standing {
            let share = share.map(|share| format!("{:.1}", 100.0 * share)).join(", ");
            eprintln!("{}: of the runs that stand {share} %", row.case.name);
        }
    }
    Ok(())
}
