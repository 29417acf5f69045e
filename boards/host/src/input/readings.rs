//! Which columns make a reading, and the readings of a table.

use crate::input::{
    header::{listed, resembles},
    plausible::plausibility,
    problem::{Problem, shown},
    row::Row,
    table::Table,
    uncertain::{Parts, PartsColumns},
    units::Quantity,
};

/// What the sensors said in one row, SI.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ReadingRow<'a> {
    /// Pressure drop over the element, positive for forward flow, Pa.
    pub pressure_drop: f64,
    /// Temperature of the element, K.
    pub temperature: f64,
    /// Absolute pressure at the upstream port, Pa.
    pub line_pressure: f64,
    /// Relative humidity of the air at the element's inlet, 0 to 1.
    pub relative_humidity: Option<f64>,
    /// Name of the fluid.
    pub fluid: Option<&'a str>,
    /// Standard uncertainties stated in the row.
    pub u: RowUncertainty,
}

/// Standard uncertainties stated in one row, each in the SI unit of its value.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct RowUncertainty {
    /// Of the pressure drop, Pa.
    pub pressure_drop: Parts,
    /// Of the temperature, K.
    pub temperature: Parts,
    /// Of the absolute line pressure, Pa; of gauge and barometer together where these give it.
    pub line_pressure: Parts,
    /// Of the relative humidity, 1.
    pub relative_humidity: Parts,
}

/// The columns of a table that make a reading.
///
/// ```
/// use evenbore_bench::input::{readings::ReadingsPlan, table::Table};
/// let text = "pressure_drop_kPa,temperature_C,line_pressure_bar\n4.98,20,1\n";
/// let mut table = Table::from_reader("bench.csv", text.as_bytes())?;
/// let plan = ReadingsPlan::bind(&table)?;
/// let row = table.next_row()?.ok_or("a row")?;
/// assert_eq!(plan.reading(&row)?.pressure_drop, 4980.0);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Clone, Copy, Debug)]
pub struct ReadingsPlan {
    pressure_drop: usize,
    temperature: usize,
    line: LineColumns,
    relative_humidity: Option<usize>,
    fluid: Option<usize>,
    u_pressure_drop: PartsColumns,
    u_temperature: PartsColumns,
    u_relative_humidity: PartsColumns,
}

/// The columns that give the absolute line pressure.
#[derive(Clone, Copy, Debug)]
enum LineColumns {
    Absolute { index: usize, u: PartsColumns },
    Gauge { gauge: usize, barometric: usize, u_gauge: PartsColumns, u_barometric: PartsColumns },
}

impl ReadingsPlan {
    /// Finds the columns of a table.
    ///
    /// * `table`: with its header read
    ///
    /// # Errors
    /// Lists every missing column with its accepted units; also where the line pressure is given twice.
    pub fn bind(table: &Table) -> Result<Self, Problem> {
        let wanted = wanted(table);
        let missing: Vec<String> = wanted.iter().filter_map(|&quantity| missing(table, quantity)).collect();
        if !missing.is_empty() {
            return Err(table.header_problem(missing.join("; ")));
        }
        Ok(Self {
            pressure_drop: need(table, Quantity::PressureDrop)?,
            temperature: need(table, Quantity::Temperature)?,
            line: LineColumns::bind(table)?,
            relative_humidity: table.column_of(Quantity::RelativeHumidity),
            fluid: table.fluid_column(),
            u_pressure_drop: PartsColumns::bind(table, Quantity::PressureDrop),
            u_temperature: PartsColumns::bind(table, Quantity::Temperature),
            u_relative_humidity: PartsColumns::bind(table, Quantity::RelativeHumidity),
        })
    }

    /// Column of fluid names, the first column being 0.
    pub fn fluid_column(&self) -> Option<usize> {
        self.fluid
    }

    /// Column of pressure drops, the first column being 0.
    pub fn pressure_drop_column(&self) -> usize {
        self.pressure_drop
    }

    /// Takes a row as a reading.
    ///
    /// * `row`: of the table this plan was made for
    ///
    /// # Errors
    /// Where a cell is no finite number, a needed one is empty, or an uncertainty is negative.
    pub fn reading<'a>(&self, row: &Row<'a>) -> Result<ReadingRow<'a>, Problem> {
        let pressure_drop = row.required(self.pressure_drop)?;
        let temperature = row.required(self.temperature)?;
        let relative_humidity = self.relative_humidity.map_or(Ok(None), |index| row.number(index))?;
        let (line_pressure, u_line_pressure) = self.line.read(row)?;
        let u = RowUncertainty {
            pressure_drop: self.u_pressure_drop.read(row, pressure_drop)?,
            temperature: self.u_temperature.read(row, temperature)?,
            line_pressure: u_line_pressure,
            relative_humidity: self.u_relative_humidity.read(row, relative_humidity.unwrap_or_default())?,
        };
        Ok(ReadingRow { pressure_drop, temperature, line_pressure, relative_humidity, fluid: self.fluid(row)?, u })
    }

    /// Whether a cell without which there is no reading is empty: a sensor that said nothing.
    ///
    /// * `row`: of the table this plan was made for
    pub fn is_silent(&self, row: &Row<'_>) -> bool {
        let line = match self.line {
            LineColumns::Absolute { index, .. } => [index, index],
            LineColumns::Gauge { gauge, barometric, .. } => [gauge, barometric],
        };
        let empty = |index: usize| row.raw().get(index).is_none_or(|cell| cell.trim_ascii().is_empty());
        [self.pressure_drop, self.temperature].into_iter().chain(line).any(empty)
    }

    /// States the first value of a reading that probably stands in the wrong unit.
    ///
    /// * `row`: the row
    /// * `reading`: what [`Self::reading`] made of it
    pub fn doubt(&self, row: &Row<'_>, reading: &ReadingRow<'_>) -> Option<Problem> {
        let humidity = self.relative_humidity.zip(reading.relative_humidity);
        doubt(row, self.temperature, Quantity::Temperature, reading.temperature)
            .or_else(|| self.line.doubt(row, reading.line_pressure))
            .or_else(|| humidity.and_then(|(index, value)| doubt(row, index, Quantity::RelativeHumidity, value)))
    }

    /// Name of the fluid; an empty cell names none.
    fn fluid<'a>(&self, row: &Row<'a>) -> Result<Option<&'a str>, Problem> {
        let name = self.fluid.map_or(Ok(""), |index| row.text(index))?;
        Ok(Some(name).filter(|name| !name.is_empty()))
    }
}

impl LineColumns {
    /// Finds either the absolute pressure or gauge and barometer.
    fn bind(table: &Table) -> Result<Self, Problem> {
        let gauge = table.column_of(Quantity::LineGaugePressure);
        match (table.column_of(Quantity::LinePressure), gauge) {
            (Some(index), Some(_)) => {
                let message = "line_pressure stands beside line_gauge_pressure: give one of them";
                Err(table.column_problem(index, message))
            }
            (None, Some(gauge)) => Self::with_barometer(table, gauge),
            _ => Ok(Self::Absolute {
                index: need(table, Quantity::LinePressure)?,
                u: PartsColumns::bind(table, Quantity::LinePressure),
            }),
        }
    }

    /// Finds the barometer beside a gauge.
    fn with_barometer(table: &Table, gauge: usize) -> Result<Self, Problem> {
        if let Some(index) = PartsColumns::bind(table, Quantity::LinePressure).first() {
            let message =
                "no line_pressure column belongs to it: state u_line_gauge_pressure and u_barometric_pressure";
            return Err(table.column_problem(index, message));
        }
        Ok(Self::Gauge {
            gauge,
            barometric: need(table, Quantity::BarometricPressure)?,
            u_gauge: PartsColumns::bind(table, Quantity::LineGaugePressure),
            u_barometric: PartsColumns::bind(table, Quantity::BarometricPressure),
        })
    }

    /// Reads the absolute pressure and its uncertainty, Pa.
    fn read(&self, row: &Row<'_>) -> Result<(f64, Parts), Problem> {
        match self {
            Self::Absolute { index, u } => {
                let pressure = row.required(*index)?;
                Ok((pressure, u.read(row, pressure)?))
            }
            Self::Gauge { gauge, barometric, u_gauge, u_barometric } => {
                let (above, air) = (row.required(*gauge)?, row.required(*barometric)?);
                let u = u_gauge.read(row, above)?.of_sum(u_barometric.read(row, air)?);
                Ok((above + air, u))
            }
        }
    }

    /// States a pressure that probably stands in the wrong unit.
    fn doubt(&self, row: &Row<'_>, line_pressure: f64) -> Option<Problem> {
        match *self {
            Self::Absolute { index, .. } => doubt(row, index, Quantity::LinePressure, line_pressure),
            Self::Gauge { gauge, barometric, .. } => {
                let air = row.number(barometric).ok().flatten();
                air.and_then(|air| doubt(row, barometric, Quantity::BarometricPressure, air))
                    .or_else(|| doubt(row, gauge, Quantity::LinePressure, line_pressure))
            }
        }
    }
}

/// States a value that probably stands in the wrong unit.
///
/// * `row`: the row
/// * `index`: of the column, the first being 0
/// * `quantity`: of the value
/// * `value`: in SI
pub fn doubt(row: &Row<'_>, index: usize, quantity: Quantity, value: f64) -> Option<Problem> {
    plausibility(quantity, value).map(|hint| row.problem(index, format!("{}: {hint}", row.shown(index))))
}

/// The quantities a reading cannot do without, given what the table has.
fn wanted(table: &Table) -> [Quantity; 3] {
    let gauge = table.column_of(Quantity::LineGaugePressure).is_some();
    let line = if gauge { Quantity::BarometricPressure } else { Quantity::LinePressure };
    [Quantity::PressureDrop, Quantity::Temperature, line]
}

/// The column of a quantity that must be there.
fn need(table: &Table, quantity: Quantity) -> Result<usize, Problem> {
    table.column_of(quantity).ok_or_else(|| table.header_problem(missing(table, quantity).unwrap_or_default()))
}

/// Says that a column is missing, what it would be called, and which one was probably meant for it.
fn missing(table: &Table, quantity: Quantity) -> Option<String> {
    if table.column_of(quantity).is_some() {
        return None;
    }
    let mut columns = table.columns().iter().filter(|column| resembles(&column.header, quantity));
    let hint = columns.next().map_or_else(String::new, |column| {
        format!("; is it column {} ({})?", column.index + 1, shown(column.header.as_bytes()))
    });
    let name = quantity.name();
    Some(format!("column {name}_<unit> is missing, the unit being one of {}{hint}", listed(quantity.units())))
}
