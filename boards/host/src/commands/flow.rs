//! `evenbore flow`: readings into compensated flows, row by row, by the instrument's own arithmetic.

use super::{Ended, SensorOptions, json, reference_conditions};
use clap::{ArgGroup, Args};
use csv::ByteRecord;
use evenbore::flow::Flow;
use evenbore::fluid::StoredFluid;
use evenbore::quantity::{AbsolutePressure, PressureDrop, RelativeHumidity, Temperature};
use evenbore::reading::SensorUncertainty;
use evenbore::reference::ReferenceConditions;
use evenbore::status::{Refusal, Status};
use evenbore::{Meter, Reading, Record};
use evenbore_bench::input::element_file::ElementFile;
use evenbore_bench::input::problem::Problem;
use evenbore_bench::input::readings::{ReadingRow, ReadingsPlan};
use evenbore_bench::input::row::Row;
use evenbore_bench::input::table::Table;
use evenbore_bench::input::units::{Unit, mass_unit_beside};
use evenbore_bench::input::written::parse_flow_unit;
use evenbore_bench::output::Sink;
use evenbore_bench::record_file;
use evenbore_bench::resources::elements::{has_nominal_coefficients, nominal};
use evenbore_bench::resources::fluids::Fluids;
use serde::Serialize;
use std::io::{IsTerminal, Write};
use std::path::PathBuf;

/// Arguments of `evenbore flow`.
#[derive(Debug, Args)]
#[command(group(ArgGroup::new("meter").required(true).args(["record", "element"])))]
pub struct Arguments {
    /// Readings, CSV with units in the column names; - for standard input
    readings: PathBuf,
    /// Calibration record, record.toml or record.bin
    #[arg(long, value_name = "RECORD.toml")]
    record: Option<PathBuf>,
    /// Element file: nominal geometry, every flow flagged uncalibrated
    #[arg(long, value_name = "ELEMENT.toml")]
    element: Option<PathBuf>,
    /// Fluid of readings that name none; otherwise the record's fluid
    #[arg(long, value_name = "NAME")]
    fluid: Option<String>,
    /// Fluids of your own, TOML
    #[arg(long, value_name = "FLUIDS.toml")]
    fluids: Option<PathBuf>,
    /// Where the flows go; - for standard output
    #[arg(long, value_name = "FILE.csv", default_value = "-")]
    out: PathBuf,
    /// Unit of volume flow: m3_s, m3_h, L_s, L_min or mL_min
    #[arg(long, value_name = "UNIT", default_value = "L_min", value_parser = parse_flow_unit)]
    flow_unit: Unit,
    /// Conditions at which standard flow is quoted; the record's if not given
    #[arg(long, value_name = "T,P", value_parser = reference_conditions)]
    reference_conditions: Option<ReferenceConditions>,
    /// Print a summary as JSON (to standard error when the flows go to standard output)
    #[arg(long)]
    json: bool,
    #[command(flatten)]
    sensors: SensorOptions,
}

/// Where the meters come from: a record, or nominal geometry.
struct Origin {
    record: Option<Record>,
    element: Option<evenbore::Element>,
}

/// What a run of the command did.
#[derive(Debug, Default, Serialize)]
struct Summary {
    readings: u64,
    good: u64,
    flagged: u64,
    refused: u64,
    /// Every status that occurred, with its count.
    status: std::collections::BTreeMap<String, u64>,
}

/// Readings between two signs of life on a terminal.
const PROGRESS: u64 = 200_000;

/// Runs the command.
pub fn run(arguments: &Arguments) -> Result<Ended, Problem> {
    let origin = Origin::open(arguments)?;
    let fluids = Fluids::open(arguments.fluids.as_deref())?;
    let mut table = Table::open(&arguments.readings)?;
    let plan = ReadingsPlan::bind(&table)?;
    let mut meters = Meters::new(arguments, &origin, &fluids);
    meters.check_options()?;
    let mut results = Results::create(arguments, &table)?;
    let mut first = true;
    let watched = std::io::stderr().is_terminal() && arguments.out.as_os_str() != "-";
    while let Some(row) = table.next_row()? {
        if plan.is_silent(&row) {
            results.write(row.raw(), &Err(Refusal::NOT_FINITE))?;
            continue;
        }
        let reading = plan.reading(&row)?;
        // A wrong unit shows in the first row; later ones are a sensor's own affair, and have their status.
        if std::mem::take(&mut first)
            && let Some(doubt) = plan.doubt(&row, &reading)
        {
            eprintln!("evenbore: {doubt}");
        }
        let meter = meters.of(&row, &plan, reading.fluid)?;
        let sensors = stated(&reading, meter.sensors());
        let flow = meter.flow_with(&as_reading(&reading), &sensors);
        results.write(row.raw(), &flow)?;
        if watched && results.summary.readings % PROGRESS == 0 {
            eprint!("\r{} readings", results.summary.readings);
        }
    }
    results.finish(arguments)?;
    Ok(Ended::Done)
}

impl Origin {
    fn open(arguments: &Arguments) -> Result<Self, Problem> {
        let record = arguments.record.as_deref().map(record_file::open).transpose()?;
        let Some(path) = &arguments.element else { return Ok(Self { record, element: None }) };
        let file = ElementFile::open(path)?;
        let problem = |message: String| Problem::new(path.display().to_string(), message);
        if !has_nominal_coefficients(&file) {
            return Err(problem("an element of shape \"other\" has no nominal flow: calibrate it".into()));
        }
        Ok(Self { record, element: Some(nominal(&file).map_err(|error| problem(error.to_string()))?) })
    }

    /// Name of the fluid when neither command line nor row names one.
    fn fluid(&self) -> Option<&StoredFluid> {
        self.record.as_ref().map(|record| &record.fluid)
    }

    fn meter<'a>(&'a self, fluid: &'a StoredFluid) -> Result<Meter<'a>, evenbore::error::Error> {
        match (&self.record, self.element) {
            (Some(record), _) => record.meter()?.with_fluid(fluid),
            (None, Some(element)) => Meter::nominal(element, fluid),
            (None, None) => Err(evenbore::error::Error::NotARecord), // the command line does not allow it
        }
    }
}

/// A meter per fluid, made when first asked for.
struct Meters<'a> {
    arguments: &'a Arguments,
    origin: &'a Origin,
    fluids: &'a Fluids,
    made: Vec<(String, Meter<'a>)>,
}

impl<'a> Meters<'a> {
    fn new(arguments: &'a Arguments, origin: &'a Origin, fluids: &'a Fluids) -> Self {
        Self { arguments, origin, fluids, made: Vec::new() }
    }

    /// Finds fault with the options before anything is written.
    fn check_options(&mut self) -> Result<(), Problem> {
        let stated = self.origin.record.as_ref().map_or(SensorUncertainty::COMMON, |record| record.sensors);
        let sensors = self.arguments.sensors.over(stated);
        sensors.check().map_err(|error| Problem::new(self.arguments.sensors.names(), error.to_string()))?;
        let Some(name) = self.arguments.fluid.as_deref() else { return Ok(()) };
        let meter = self.make(name).map_err(|message| Problem::new("--fluid", message))?;
        self.made.push((name.to_owned(), meter));
        Ok(())
    }

    fn of(&mut self, row: &Row<'_>, plan: &ReadingsPlan, named: Option<&str>) -> Result<&Meter<'a>, Problem> {
        let column = plan.fluid_column().unwrap_or(0);
        let asked = self.arguments.fluid.as_deref();
        if let (Some(asked), Some(said)) = (asked, named.filter(|&said| asked.is_some_and(|asked| asked != said))) {
            return Err(row.problem(column, format!("the reading is on {said}, --fluid says {asked}")));
        }
        let wanted = named.or(asked).or(self.origin.fluid().map(StoredFluid::name));
        let Some(name) = wanted else {
            return Err(row.problem(column, "no fluid: add a column fluid, or name it with --fluid"));
        };
        if let Some(i) = self.made.iter().position(|(made, _)| made == name) {
            return Ok(&self.made[i].1);
        }
        let meter = self.make(name).map_err(|message| row.problem(column, message))?;
        self.made.push((name.to_owned(), meter));
        Ok(&self.made[self.made.len() - 1].1)
    }

    fn make(&self, name: &str) -> Result<Meter<'a>, String> {
        // The record's own table stands for the fluid it was calibrated with.
        let own = self.origin.fluid().filter(|fluid| fluid.name() == name);
        let fluid = match own {
            Some(fluid) => fluid,
            None => self.fluids.find(name)?,
        };
        let meter = self.origin.meter(fluid).map_err(|error| error.to_string())?;
        let reference = self.arguments.reference_conditions.unwrap_or(*meter.reference());
        let sensors = self.arguments.sensors.over(*meter.sensors());
        meter.with_reference(reference).with_sensor_uncertainty(sensors).map_err(|error| error.to_string())
    }
}

fn as_reading(row: &ReadingRow<'_>) -> Reading {
    let reading = Reading::new(
        PressureDrop::from_pascals(row.pressure_drop as f32),
        Temperature::from_kelvin(row.temperature as f32),
        AbsolutePressure::from_pascals(row.line_pressure as f32),
    );
    match row.relative_humidity {
        Some(fraction) => reading.with_relative_humidity(RelativeHumidity::from_fraction(fraction as f32)),
        None => reading,
    }
}

/// The uncertainties that a row states, over those of the meter.
fn stated(row: &ReadingRow<'_>, meter: &SensorUncertainty) -> SensorUncertainty {
    let mut sensors = *meter;
    if let Some(u) = row.u.pressure_drop.combined() {
        (sensors.pressure_drop_pa, sensors.pressure_drop_rel) = (u as f32, 0.0);
    }
    if let Some(u) = row.u.temperature.combined() {
        sensors.temperature_k = u as f32;
    }
    if let Some(u) = row.u.line_pressure.combined() {
        (sensors.line_pressure_pa, sensors.line_pressure_rel) = (u as f32, 0.0);
    }
    if let Some(u) = row.u.relative_humidity.combined() {
        sensors.relative_humidity = u as f32;
    }
    sensors
}

/// The output table.
struct Results {
    writer: csv::Writer<Sink>,
    record: ByteRecord,
    flow_unit: Unit,
    mass_unit: Unit,
    summary: Summary,
    number: Vec<u8>,
}

impl Results {
    fn create(arguments: &Arguments, table: &Table) -> Result<Self, Problem> {
        let (flow_unit, mass_unit) = (arguments.flow_unit, mass_unit_beside(arguments.flow_unit));
        let added = [
            format!("volume_flow_{}", flow_unit.name()),
            format!("mass_flow_{}", mass_unit.name()),
            format!("standard_flow_{}", flow_unit.name()),
            "reynolds".into(),
            "u_volume_flow_rel".into(),
            "u_mass_flow_rel".into(),
            "u_standard_flow_rel".into(),
            "status".into(),
        ];
        let headers: Vec<&str> = table.columns().iter().map(|column| column.header.as_str()).collect();
        if let Some(i) = headers.iter().position(|header| added.iter().any(|name| name == header)) {
            return Err(table.column_problem(i, "this column is a result already: take it out of the readings"));
        }
        let sink = Sink::create(&arguments.out)?;
        // A first cell that starts like a comment is quoted, or it would be lost on the way back in.
        let writer = csv::WriterBuilder::new().comment(Some(b'#')).from_writer(sink);
        let mut results = Self {
            writer,
            record: ByteRecord::new(),
            flow_unit,
            mass_unit,
            summary: Summary::default(),
            number: Vec::new(),
        };
        headers.into_iter().for_each(|header| results.record.push_field(header.as_bytes()));
        added.iter().for_each(|name| results.record.push_field(name.as_bytes()));
        results.write_record()?;
        Ok(results)
    }

    fn write(&mut self, raw: &ByteRecord, flow: &Result<Flow, Refusal>) -> Result<(), Problem> {
        self.record.clone_from(raw);
        match flow {
            Ok(flow) => self.push_flow(flow),
            Err(refusal) => self.push_refusal(*refusal),
        }
        self.write_record()
    }

    fn push_flow(&mut self, flow: &Flow) {
        let unit = self.flow_unit;
        let volume =
            |flow: evenbore::quantity::VolumeFlow| unit.from_si(f64::from(flow.as_cubic_metres_per_second())) as f32;
        let mass = self.mass_unit.from_si(f64::from(flow.mass.as_kilograms_per_second())) as f32;
        self.push(Some(volume(flow.volume)));
        self.push(Some(mass));
        self.push(flow.standard.map(volume));
        self.push((flow.reynolds > 0.0 || flow.mass.as_kilograms_per_second() == 0.0).then_some(flow.reynolds));
        self.push(Some(flow.uncertainty.combined()));
        self.push(Some(flow.mass_uncertainty.combined()));
        self.push(flow.standard.map(|_| flow.standard_uncertainty.combined()));
        self.push_text(&flow.status.to_string());
        let good = flow.status == Status::empty();
        self.summary.count(flow.status.to_string());
        *(if good { &mut self.summary.good } else { &mut self.summary.flagged }) += 1;
    }

    fn push_refusal(&mut self, refusal: Refusal) {
        (0..7).for_each(|_| self.push(None));
        self.push_text(&refusal.to_string());
        self.summary.count(refusal.to_string());
        self.summary.refused += 1;
    }

    /// A number in the fewest digits that give its bits back; nothing for an absent one.
    fn push(&mut self, value: Option<f32>) {
        self.number.clear();
        if let Some(value) = value {
            // Writing to memory does not fail.
            let _ = if (1e-4..1e7).contains(&value.abs()) || value == 0.0 {
                write!(self.number, "{value}")
            } else {
                write!(self.number, "{value:e}")
            };
        }
        self.record.push_field(&self.number);
    }

    fn push_text(&mut self, text: &str) {
        self.record.push_field(text.as_bytes());
    }

    fn write_record(&mut self) -> Result<(), Problem> {
        match self.writer.write_byte_record(&self.record) {
            Ok(()) => {
                self.record.clear();
                Ok(())
            }
            Err(error) => Err(self.explain(error)),
        }
    }

    /// The system's own error, which says whether a pipe was closed, out of its wrapping.
    fn explain(&self, error: csv::Error) -> Problem {
        let message = error.to_string();
        let error = match error.into_kind() {
            csv::ErrorKind::Io(error) => error,
            _ => std::io::Error::other(message),
        };
        self.writer.get_ref().problem(&error)
    }

    fn finish(self, arguments: &Arguments) -> Result<(), Problem> {
        let sink = match self.writer.into_inner() {
            Ok(sink) => sink,
            Err(error) => return Err(Problem::io(arguments.out.display().to_string(), "cannot write", error.error())),
        };
        sink.finish()?;
        let to_stdout = arguments.out.as_os_str() == "-";
        let text = if arguments.json { json(&self.summary)? } else { self.summary.to_string() };
        match (to_stdout, arguments.json) {
            (true, _) => eprint!("{text}"),
            (false, _) => super::print(&text)?,
        }
        Ok(())
    }
}

impl Summary {
    fn count(&mut self, status: String) {
        self.readings += 1;
        *self.status.entry(status).or_default() += 1;
    }
}

impl std::fmt::Display for Summary {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{} readings: {} good", self.readings, self.good)?;
        for (status, count) in self.status.iter().filter(|(status, _)| *status != "good") {
            write!(f, ", {count} {status}")?;
        }
        writeln!(f)
    }
}
