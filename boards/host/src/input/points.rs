//! The points of a calibration: readings, each beside a reference flow.

use std::path::Path;

use crate::input::{
    header::{ColumnKind, listed},
    problem::{Problem, shown},
    readings::{ReadingRow, ReadingsPlan, RowUncertainty, doubt},
    row::Row,
    table::Table,
    uncertain::{Parts, PartsColumns},
    units::{MASS_FLOW, Quantity, VOLUME_FLOW},
};

/// More points than this are no bench run.
const MOST_POINTS: usize = 1_000_000;

/// A calibration run.
#[derive(Clone, Debug, PartialEq)]
pub struct Points {
    /// Path as the user gave it.
    pub file: String,
    /// Name of the fluid, where the table has it.
    pub fluid: Option<String>,
    /// Headers of the columns that mean nothing here.
    pub extra_headers: Vec<String>,
    /// The points in the order of the file, at least one.
    pub points: Vec<Point>,
}

/// One point of a calibration, SI.
#[derive(Clone, Debug, PartialEq)]
pub struct Point {
    /// Physical line in the file, the first being 1.
    pub line: u64,
    /// Pressure drop over the element, Pa.
    pub pressure_drop: f64,
    /// Temperature of the element, K.
    pub temperature: f64,
    /// Absolute pressure at the upstream port, Pa.
    pub line_pressure: f64,
    /// Relative humidity of the air at the element's inlet, 0 to 1.
    pub relative_humidity: Option<f64>,
    /// What the reference said.
    pub reference: Reference,
    /// Standard uncertainties of the reading.
    pub u: RowUncertainty,
    /// Standard uncertainty of the reference flow, m3/s or kg/s.
    pub u_reference: Parts,
    /// Cells of the columns that mean nothing here.
    pub extra: Vec<String>,
}

/// Flow of the reference.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Reference {
    /// A mass flow, kg/s.
    Mass(f64),
    /// An actual volume flow and where it holds.
    Volume {
        /// Volume flow, m3/s.
        flow: f64,
        /// Temperature at the reference, K; the element's where not given.
        temperature: Option<f64>,
        /// Absolute pressure at the reference, Pa; the element's where not given.
        pressure: Option<f64>,
        /// Standard uncertainty of that temperature, K.
        u_temperature: Parts,
        /// Standard uncertainty of that pressure, Pa.
        u_pressure: Parts,
    },
}

impl Reference {
    /// The flow, kg/s or m3/s.
    pub fn flow(&self) -> f64 {
        match *self {
            Self::Mass(flow) | Self::Volume { flow, .. } => flow,
        }
    }
}

impl Points {
    /// Reads a calibration run.
    ///
    /// * `path`: of the CSV file, or `-` for standard input
    ///
    /// # Errors
    /// Where a column is missing, a cell is unusable or implausible, or the rows name different fluids.
    pub fn open(path: impl AsRef<Path>) -> Result<Self, Problem> {
        Self::read(Table::open(path)?)
    }

    /// Reads the rest of a table as a calibration run.
    ///
    /// * `table`: with its header read
    ///
    /// # Errors
    /// Where a column is missing, a cell is unusable or implausible, or the rows name different fluids.
    pub fn read(mut table: Table) -> Result<Self, Problem> {
        let plan = PointsPlan::bind(&table)?;
        let mut run = Self {
            file: table.file().to_owned(),
            fluid: None,
            extra_headers: plan.extra.iter().map(|&index| table.columns()[index].header.clone()).collect(),
            points: Vec::new(),
        };
        while let Some(row) = table.next_row()? {
            let reading = plan.readings.reading(&row)?;
            run.agree(&plan, &row, reading.fluid)?;
            run.points.push(plan.point(&row, &reading)?);
            run.check_size(&row)?;
        }
        Ok(run)
    }

    /// Remembers the fluid of the first row and refuses another.
    fn agree(&mut self, plan: &PointsPlan, row: &Row<'_>, fluid: Option<&str>) -> Result<(), Problem> {
        let Some(first) = self.points.first() else {
            self.fluid = fluid.map(str::to_owned);
            return Ok(());
        };
        if self.fluid.as_deref() == fluid {
            return Ok(());
        }
        let [here, there] = [fluid, self.fluid.as_deref()].map(|name| shown(name.unwrap_or_default().as_bytes()));
        let message =
            format!("the fluid is {here}, on line {} it is {there}: one calibration has one fluid", first.line);
        Err(row.problem(plan.readings.fluid_column().unwrap_or_default(), message))
    }

    /// Refuses runs that would fill the memory.
    fn check_size(&self, row: &Row<'_>) -> Result<(), Problem> {
        if self.points.len() <= MOST_POINTS {
            return Ok(());
        }
        let message = format!("there are more than {MOST_POINTS} points: average them before calibrating");
        Err(Problem::new(&self.file, message).at_line(row.line()))
    }
}

/// The columns of a table that make a point.
struct PointsPlan {
    readings: ReadingsPlan,
    flow: usize,
    is_mass: bool,
    u_flow: PartsColumns,
    temperature: Option<usize>,
    pressure: Option<usize>,
    u_temperature: PartsColumns,
    u_pressure: PartsColumns,
    extra: Vec<usize>,
}

impl PointsPlan {
    /// Finds the columns of a table.
    fn bind(table: &Table) -> Result<Self, Problem> {
        let readings = ReadingsPlan::bind(table)?;
        let (flow, is_mass) = flow_column(table)?;
        check_orphans(table)?;
        let quantity = if is_mass { Quantity::ReferenceMassFlow } else { Quantity::ReferenceFlow };
        let unknown = table.columns().iter().filter(|column| column.kind == ColumnKind::Unknown);
        Ok(Self {
            readings,
            flow,
            is_mass,
            u_flow: PartsColumns::bind(table, quantity),
            temperature: table.column_of(Quantity::ReferenceTemperature),
            pressure: table.column_of(Quantity::ReferencePressure),
            u_temperature: PartsColumns::bind(table, Quantity::ReferenceTemperature),
            u_pressure: PartsColumns::bind(table, Quantity::ReferencePressure),
            extra: unknown.map(|column| column.index).collect(),
        })
    }

    /// Takes a row and its reading as a point.
    fn point(&self, row: &Row<'_>, reading: &ReadingRow<'_>) -> Result<Point, Problem> {
        let reference = self.reference(row)?;
        self.check(row, reading, &reference)?;
        Ok(Point {
            line: row.line(),
            pressure_drop: reading.pressure_drop,
            temperature: reading.temperature,
            line_pressure: reading.line_pressure,
            relative_humidity: reading.relative_humidity,
            u: reading.u,
            u_reference: self.u_flow.read(row, reference.flow())?,
            reference,
            extra: self.extra.iter().map(|&index| extra(row, index)).collect(),
        })
    }

    /// Reads what the reference said.
    fn reference(&self, row: &Row<'_>) -> Result<Reference, Problem> {
        let flow = row.required(self.flow)?;
        if self.is_mass {
            return Ok(Reference::Mass(flow));
        }
        let temperature = optional(row, self.temperature, Quantity::ReferenceTemperature)?;
        let pressure = optional(row, self.pressure, Quantity::ReferencePressure)?;
        Ok(Reference::Volume {
            flow,
            temperature,
            pressure,
            u_temperature: self.u_temperature.read(row, temperature.unwrap_or_default())?,
            u_pressure: self.u_pressure.read(row, pressure.unwrap_or_default())?,
        })
    }

    /// Refuses values that cannot belong together or stand in the wrong unit.
    fn check(&self, row: &Row<'_>, reading: &ReadingRow<'_>, reference: &Reference) -> Result<(), Problem> {
        if let Some(problem) = self.readings.doubt(row, reading) {
            return Err(problem);
        }
        let (flow, cell) = (reference.flow(), row.shown(self.flow));
        if flow == 0.0 {
            return Err(row.problem(self.flow, format!("{cell} is no flow: a point needs one other than 0")));
        }
        if flow * reading.pressure_drop.signum() < 0.0 && reading.pressure_drop != 0.0 {
            let drop = row.shown(self.readings.pressure_drop_column());
            let message =
                format!("{cell} and the pressure drop {drop} disagree in sign: forward flow is positive in both");
            return Err(row.problem(self.flow, message));
        }
        Ok(())
    }
}

/// Finds the one column of reference flow and whether it is a mass flow.
fn flow_column(table: &Table) -> Result<(usize, bool), Problem> {
    match (table.column_of(Quantity::ReferenceFlow), table.column_of(Quantity::ReferenceMassFlow)) {
        (Some(volume), None) => Ok((volume, false)),
        (None, Some(mass)) => Ok((mass, true)),
        (Some(_), Some(mass)) => {
            Err(table.column_problem(mass, "reference_mass_flow stands beside reference_flow: give one of them"))
        }
        (None, None) => {
            let (volume, mass) = (listed(VOLUME_FLOW), listed(MASS_FLOW));
            Err(table.header_problem(format!(
                "the reference is missing: a column reference_flow_<unit> with one of {volume}, or \
                 reference_mass_flow_<unit> with one of {mass}, was expected"
            )))
        }
    }
}

/// Refuses standard uncertainties of values that the table does not have.
fn check_orphans(table: &Table) -> Result<(), Problem> {
    for column in table.columns() {
        if let ColumnKind::Uncertainty { quantity, .. } = column.kind
            && table.column_of(quantity).is_none()
        {
            let message = format!("there is no {} column for it to belong to", quantity.name());
            return Err(table.column_problem(column.index, message));
        }
    }
    Ok(())
}

/// Reads a cell that may be empty and refuses one that stands in the wrong unit.
fn optional(row: &Row<'_>, index: Option<usize>, quantity: Quantity) -> Result<Option<f64>, Problem> {
    let Some(index) = index else {
        return Ok(None);
    };
    let value = row.number(index)?;
    match value.and_then(|value| doubt(row, index, quantity, value)) {
        Some(problem) => Err(problem),
        None => Ok(value),
    }
}

/// A cell that means nothing here, with whatever is not UTF-8 replaced.
fn extra(row: &Row<'_>, index: usize) -> String {
    String::from_utf8_lossy(row.raw().get(index).unwrap_or_default()).into_owned()
}
