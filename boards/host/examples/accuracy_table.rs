//! The accuracy table of the README: calibrated elements against the virtual element.
//!
//! `cargo run --release -p evenbore-bench --example accuracy_table` (a few minutes)

use evenbore_bench::proof::accuracy::{Extent, markdown, table};

fn main() -> Result<(), String> {
    print!("{}", markdown(&table(Extent::All)?));
    Ok(())
}
