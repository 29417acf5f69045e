//! How long the bench takes: a calibration of 1000 points, and a million readings through `evenbore flow`.
//!
//! `cargo build --release && cargo run --release -p evenbore-bench --example speed` prints both; nothing is asserted,
//! since a shared machine's seconds say little. The readings are made here and are not a day of anything.

use std::error::Error;
use std::fmt::Write as _;
use std::fs;
use std::io::{BufWriter, Write as _};
use std::path::Path;
use std::process::{Command, Stdio};
use std::time::Instant;

const POINTS: usize = 1000;
const READINGS: usize = 1_000_000;

fn main() -> Result<(), Box<dyn Error>> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("../..");
    let tool = root.join("target/release/evenbore");
    let folder = tempfile::tempdir()?;
    let file = |name: &str| folder.path().join(name);
    fs::write(file("points.csv"), points(&root)?)?;
    let started = Instant::now();
    let element = root.join("examples/workshop/element.toml");
    let calibration = Command::new(&tool)
        .arg("calibrate")
        .arg(file("points.csv"))
        .args(["--accept-anyway", "timing only"])
        .arg("--element")
        .arg(element)
        .arg("--out")
        .arg(file("out"))
        .stdout(Stdio::null())
        .status()?;
    println!("{POINTS} points calibrated in {:.2} s ({calibration})", started.elapsed().as_secs_f64());
    write_readings(&file("readings.csv"))?;
    let started = Instant::now();
    let flow = Command::new(&tool)
        .arg("flow")
        .arg(file("readings.csv"))
        .arg("--record")
        .arg(file("out/record.toml"))
        .arg("--out")
        .arg(file("flows.csv"))
        .status()?;
    println!("{READINGS} readings compensated in {:.2} s ({flow})", started.elapsed().as_secs_f64());
    Ok(())
}

/// The demo's points, over and over.
fn points(root: &Path) -> Result<String, Box<dyn Error>> {
    let demo = fs::read_to_string(root.join("examples/workshop/bench-nitrogen.csv"))?;
    let mut lines = demo.lines().filter(|line| !line.starts_with('#'));
    let mut text = format!("{}\n", lines.next().ok_or("no header")?);
    let rows: Vec<&str> = lines.collect();
    for row in rows.iter().cycle().take(POINTS) {
        writeln!(text, "{row}")?;
    }
    Ok(text)
}

fn write_readings(path: &Path) -> Result<(), Box<dyn Error>> {
    let mut out = BufWriter::new(fs::File::create(path)?);
    writeln!(out, "pressure_drop_Pa,temperature_C,line_pressure_kPa")?;
    for i in 0..READINGS {
        let (drop, t) = (10 + i % 2400, 15.0 + (i % 200) as f64 * 0.1);
        writeln!(out, "{drop},{t:.1},{:.2}", 110.0 + (i % 1000) as f64 * 0.01)?;
    }
    out.flush()?;
    Ok(())
}
