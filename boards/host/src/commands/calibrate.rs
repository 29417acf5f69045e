//! `evenbore calibrate`: bench points into a record, a report and a verdict.

use super::{Ended, SensorOptions, json, print, reference_conditions};
use clap::Args;
use evenbore::flow_curve::Arithmetic;
use evenbore::reading::SensorUncertainty;
use evenbore::record::REASON_LENGTH;
use evenbore::reference::ReferenceConditions;
use evenbore::{Element, Record};
use evenbore_bench::calibrate::outcome::Calibration;
use evenbore_bench::calibrate::verdict::{Order, Verdict, calibrate};
use evenbore_bench::input::element_file::ElementFile;
use evenbore_bench::input::points::Points;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::output::write_together;
use evenbore_bench::record_file;
use evenbore_bench::report::{Provenance, render};
use evenbore_bench::resources::elements::{describe, has_nominal_coefficients, nominal};
use evenbore_bench::resources::fluids::Fluids;
use std::fmt::Write;
use std::path::{Path, PathBuf};

/// Arguments of `evenbore calibrate`.
#[derive(Debug, Args)]
pub struct Arguments {
    /// Bench points, CSV with units in the column names; - for standard input
    points: PathBuf,
    /// Element file, TOML
    #[arg(long, value_name = "ELEMENT.toml")]
    element: PathBuf,
    /// Folder for calibration.json, record.toml, record.bin and report.html; made if it is not there. A refused run
    /// renames a record that lies there to record.toml.earlier and record.bin.earlier
    #[arg(long, value_name = "DIR")]
    out: PathBuf,
    /// Fluid of the run, where the points name none
    #[arg(long, value_name = "NAME")]
    fluid: Option<String>,
    /// Fluids of your own, TOML
    #[arg(long, value_name = "FLUIDS.toml")]
    fluids: Option<PathBuf>,
    /// Leave out the points on these lines of the file
    #[arg(long, value_name = "LINE,...", value_delimiter = ',')]
    without: Vec<u64>,
    /// Write the record although the run is refused; the reason is kept in it
    #[arg(long, value_name = "REASON", value_parser = reason)]
    accept_anyway: Option<String>,
    /// Date of the calibration, YYYY-MM-DD; today if not given
    #[arg(long, value_name = "DATE", value_parser = date)]
    date: Option<jiff::civil::Date>,
    /// Arithmetic of the instrument: single (the law per sample) or curve (a curve per temperature and line pressure)
    #[arg(long, value_name = "NAME", default_value = "single", value_parser = arithmetic)]
    arithmetic: Arithmetic,
    /// Conditions at which the instrument quotes standard flow
    #[arg(long, value_name = "T,P", default_value = "0C,101.325kPa", value_parser = reference_conditions)]
    reference_conditions: ReferenceConditions,
    /// Print the outcome as JSON
    #[arg(long)]
    json: bool,
    #[command(flatten)]
    sensors: SensorOptions,
}

fn arithmetic(text: &str) -> Result<Arithmetic, String> {
    match text {
        "single" => Ok(Arithmetic::Single),
        "curve" => Ok(Arithmetic::Curve),
        _ => Err("single and curve are known".into()),
    }
}

fn reason(text: &str) -> Result<String, String> {
    let fits = (1..=REASON_LENGTH).contains(&text.len()) && text.bytes().all(|c| (b' '..=b'~').contains(&c));
    if fits { Ok(text.into()) } else { Err(format!("1 to {REASON_LENGTH} printable ASCII characters are kept")) }
}

/// Reads `--date`.
fn date(text: &str) -> Result<jiff::civil::Date, String> {
    let date: jiff::civil::Date = text.parse().map_err(|_| "a date as 2026-12-01 was expected".to_string())?;
    if (1970..=9999).contains(&date.year()) { Ok(date) } else { Err("years 1970 to 9999 are kept".into()) }
}

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    let file = ElementFile::open(&arguments.element)?;
    let element = nominal(&file).map_err(|e| Problem::new(arguments.element.display().to_string(), e.to_string()))?;
    let fluids = Fluids::open(arguments.fluids.as_deref())?;
    let points = Points::open(&arguments.points)?;
    check_lines(arguments, &points)?;
    let order = order(arguments, &file, element, &fluids, &points)?;
    let mut verdict = calibrate(&points, &order)?;
    if let Some(record) = &mut verdict.record {
        record.arithmetic = arguments.arithmetic;
        if !verdict.calibration.accepted {
            let reason = arguments.accept_anyway.as_deref().unwrap_or_default();
            record.reason = reason.try_into().unwrap_or_default();
        }
    }
    write_results(arguments, &file, &verdict)?;
    if arguments.json {
        print(&json(&verdict.calibration)?)?;
    } else {
        print(&summary(&verdict, &arguments.out))?;
    }
    Ok(if verdict.record.is_some() { Ended::Done } else { Ended::Refused })
}

fn check_lines(arguments: &Arguments, points: &Points) -> Result<(), Problem> {
    let unknown = |line: &&u64| !points.points.iter().any(|point| point.line == **line);
    match arguments.without.iter().find(unknown) {
        Some(line) => Err(Problem::new(&points.file, format!("--without {line}: no point stands on that line"))),
        None => Ok(()),
    }
}

fn order<'a>(
    arguments: &Arguments,
    file: &'a ElementFile,
    element: Element,
    fluids: &'a Fluids,
    points: &Points,
) -> Result<Order<'a>, Problem> {
    let name = match (arguments.fluid.as_deref(), points.fluid.as_deref()) {
        (Some(asked), Some(said)) if asked != said => {
            return Err(Problem::new(&points.file, format!("the points are on {said}, --fluid says {asked}")));
        }
        (asked, said) => asked
            .or(said)
            .ok_or_else(|| Problem::new(&points.file, "no fluid: add a column fluid, or name it with --fluid"))?,
    };
    let fluid = fluids.find(name).map_err(|message| Problem::new(&points.file, message))?;
    let date = arguments.date.unwrap_or_else(|| jiff::Timestamp::now().to_zoned(jiff::tz::TimeZone::UTC).date());
    Ok(Order {
        serial: &file.serial,
        element,
        has_nominal: has_nominal_coefficients(file),
        fluid,
        alternatives: fluids.all().filter(|other| other.phase() == fluid.phase()).collect(),
        without: arguments.without.clone(),
        accept_anyway: arguments.accept_anyway.clone(),
        date: (date.year(), date.month(), date.day()),
        sensors: arguments.sensors.over(SensorUncertainty::COMMON),
        reference: arguments.reference_conditions,
    })
}

/// Writes the files, all or none; the record gets its name last.
fn write_results(arguments: &Arguments, file: &ElementFile, verdict: &Verdict) -> Result<(), Problem> {
    let folder = &arguments.out;
    let name = folder.display().to_string();
    std::fs::create_dir_all(folder).map_err(|error| Problem::io(&name, "cannot make the folder", &error))?;
    let provenance = Provenance {
        tool_version: env!("CARGO_PKG_VERSION").into(),
        command: std::env::args_os().skip(1).fold("evenbore".into(), |line, word| line + " " + &word.to_string_lossy()),
        record_crc: verdict.record.as_ref().map(|record| format!("{:08x}", record.checksum())),
        sensors: arguments.sensors.origin(&SensorUncertainty::COMMON),
        element: describe(file),
    };
    let page = render(&verdict.calibration, &provenance)
        .map_err(|error| Problem::new("report.html", format!("cannot be made: {error}")))?;
    let outcome = json(&verdict.calibration)?;
    let record = verdict.record.as_ref().map(record_forms).transpose()?;
    let mut files =
        vec![(folder.join("calibration.json"), outcome.as_bytes()), (folder.join("report.html"), page.as_bytes())];
    if let Some((bytes, text)) = &record {
        files.extend([(folder.join("record.bin"), bytes.as_slice()), (folder.join("record.toml"), text.as_bytes())]);
    }
    write_together(&files, || if record.is_some() { Ok(()) } else { set_old_record_aside(folder) })
}

/// A record as bytes and as text.
fn record_forms(record: &Record) -> Result<(Vec<u8>, String), Problem> {
    let text = record_file::to_text(record).map_err(|error| Problem::new("record.toml", error.to_string()))?;
    Ok((record_file::to_bytes(record).to_vec(), text))
}

/// Gives the record of an earlier run another name, since a refused run has none.
fn set_old_record_aside(folder: &Path) -> Result<(), Problem> {
    for name in ["record.toml", "record.bin"] {
        let (path, aside) = (folder.join(name), folder.join(format!("{name}.earlier")));
        if path.exists() {
            std::fs::rename(&path, &aside)
                .map_err(|error| Problem::io(path.display().to_string(), "cannot rename", &error))?;
            eprintln!("evenbore: {} is of an earlier run and is now {}", path.display(), aside.display());
        }
    }
    Ok(())
}

/// What a person at a terminal wants to know.
fn summary(verdict: &Verdict, folder: &Path) -> String {
    let c = &verdict.calibration;
    let mut text = String::new();
    let mut line = |words: String| writeln!(text, "{words}").unwrap_or_default();
    line(format!("{} on {}: {}", c.serial, c.fluid, sentence(c)));
    line(format!("  A = {:.6e} 1/m3, standard uncertainty {:.3} %", c.a, 100.0 * c.u_a / c.a));
    let u_b = if c.b == 0.0 { "held".into() } else { format!("{:.2} %", 100.0 * c.u_b / c.b.abs()) };
    line(format!("  B = {:.4e} 1/m4, standard uncertainty {u_b}", c.b));
    if let (Some(a), Some(b)) = (c.geometry.a_ratio, c.geometry.b_ratio) {
        line(format!("  against the drawing: A {a:.4}, B {b:.3}"));
    }
    line(format!("  {} of {} points; {}", c.points_used, c.points, agreement(c)));
    if let (Some(low), Some(high)) = (c.uncertainty.first(), c.uncertainty.last()) {
        for row in [low, high] {
            line(format!(
                "  at {:.4} L/min: expanded uncertainty {:.2} % (k = {:.2}, about 95 %)",
                row.flow * 6e4,
                100.0 * row.expanded,
                row.coverage_factor
            ));
        }
    }
    for finding in &c.findings {
        let points: Vec<String> = finding.points.iter().map(u64::to_string).collect();
        let place = match points.len() {
            0 => String::new(),
            1 => format!(" (line {})", points[0]),
            _ => format!(" (lines {})", points.join(", ")),
        };
        line(format!("  {}{place}: {}", finding.kind, finding.message));
    }
    let files = if verdict.record.is_some() { "record.toml, record.bin, " } else { "no record; " };
    line(format!("  in {}: {files}calibration.json, report.html", folder.display()));
    text
}

/// How points and fit agree.
fn agreement(c: &Calibration) -> String {
    if c.uncertainty_basis == "residuals" {
        return format!("no independent uncertainty stated, scatter {:.3} % about the fit", 100.0 * scatter(c));
    }
    let p = if c.p_value < 0.001 { "p < 0.001".into() } else { format!("p = {:.3}", c.p_value) };
    format!("chi-squared {:.1} for {} degrees of freedom, {p}", c.chi_squared, c.degrees_of_freedom)
}

/// Relative standard uncertainty of a point when the residuals are the basis; it is one for all.
fn scatter(c: &Calibration) -> f64 {
    c.residuals.iter().find(|row| row.used).map_or(0.0, |row| row.u_y / row.y.abs())
}

fn sentence(c: &Calibration) -> &'static str {
    match (c.accepted, &c.accepted_anyway) {
        (true, _) => "run accepted",
        (false, Some(_)) => "run refused, record written all the same",
        (false, None) => "run refused",
    }
}
