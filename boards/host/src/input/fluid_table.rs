//! A fluid's measured viscosity and density over temperature, from a CSV file.

use std::path::Path;

use crate::input::{
    header::{ColumnKind, listed},
    plausible::plausibility,
    problem::Problem,
    row::Row,
    table::Table,
    units::Quantity,
};

/// Fewer rows than this cannot carry a curve.
const FEWEST_ROWS: usize = 4;
/// More rows than this are no table of a fluid.
const MOST_ROWS: usize = 100_000;
/// Dynamic viscosities a fluid may have, Pa s.
const VISCOSITY: (f64, f64) = (1e-7, 1e3);
/// Densities a fluid may have, kg/m3.
const DENSITY: (f64, f64) = (1e-4, 3e4);
/// Viscosity columns and the factor that turns each into Pa s.
const VISCOSITY_COLUMNS: [(&str, f64); 2] = [("viscosity_Pa_s", 1.0), ("viscosity_mPa_s", 1e3)];
const DENSITY_COLUMN: &str = "density_kg_m3";

/// What is known of a fluid at one temperature, SI.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FluidRow {
    /// Physical line in the file, the first being 1.
    pub line: u64,
    /// Temperature, K.
    pub temperature: f64,
    /// Dynamic viscosity, Pa s.
    pub viscosity: f64,
    /// Density, kg/m3.
    pub density: f64,
}

/// Reads a fluid's table and sorts it by temperature.
///
/// * `path`: of the CSV file with `temperature_*`, `viscosity_Pa_s` or `viscosity_mPa_s`, and `density_kg_m3`
///
/// # Errors
/// Where a column is missing, a value is out of range, a temperature appears twice, or there are fewer than four rows.
pub fn read_rows(path: &Path) -> Result<Vec<FluidRow>, Problem> {
    let mut table = Table::open(path)?;
    let columns = Columns::bind(&table)?;
    let mut rows = Vec::new();
    while let Some(row) = table.next_row()? {
        rows.push(columns.read(&row)?);
        if rows.len() > MOST_ROWS {
            return Err(row.problem(columns.temperature, format!("there are more than {MOST_ROWS} rows")));
        }
    }
    if rows.len() < FEWEST_ROWS {
        let message = format!("{} rows were found: at least {FEWEST_ROWS} were expected", rows.len());
        return Err(table.header_problem(message));
    }
    rows.sort_by(|a, b| a.temperature.total_cmp(&b.temperature));
    check_repeats(&table, &columns, &rows)?;
    Ok(rows)
}

/// The columns of a fluid's table.
struct Columns {
    temperature: usize,
    viscosity: usize,
    per_pascal_second: f64,
    density: usize,
}

impl Columns {
    /// Finds the columns of a table.
    fn bind(table: &Table) -> Result<Self, Problem> {
        let temperature = table.column_of(Quantity::Temperature).ok_or_else(|| {
            let units = listed(Quantity::Temperature.units());
            table.header_problem(format!("column temperature_<unit> is missing, the unit being one of {units}"))
        })?;
        let (viscosity, per_pascal_second) = viscosity(table)?;
        let density = position(table, DENSITY_COLUMN);
        let density = density.ok_or_else(|| table.header_problem(format!("column {DENSITY_COLUMN} is missing")))?;
        Ok(Self { temperature, viscosity, per_pascal_second, density })
    }

    /// Reads one row.
    fn read(&self, row: &Row<'_>) -> Result<FluidRow, Problem> {
        let temperature = row.required(self.temperature)?;
        if let Some(hint) = plausibility(Quantity::Temperature, temperature) {
            return Err(row.problem(self.temperature, format!("{}: {hint}", row.shown(self.temperature))));
        }
        let viscosity = row.required(self.viscosity)? / self.per_pascal_second;
        within(row, self.viscosity, viscosity, VISCOSITY, "Pa s")?;
        let density = row.required(self.density)?;
        within(row, self.density, density, DENSITY, "kg/m3")?;
        Ok(FluidRow { line: row.line(), temperature, viscosity, density })
    }
}

/// Finds the one viscosity column and its factor.
fn viscosity(table: &Table) -> Result<(usize, f64), Problem> {
    let mut found = VISCOSITY_COLUMNS.iter().filter_map(|&(name, per)| position(table, name).map(|index| (index, per)));
    match (found.next(), found.next()) {
        (Some(only), None) => Ok(only),
        (Some(_), Some((index, _))) => Err(table.column_problem(index, "a second column of viscosity: give one")),
        _ => {
            let names = VISCOSITY_COLUMNS.map(|(name, _)| name).join(" or ");
            Err(table.header_problem(format!("column {names} is missing")))
        }
    }
}

/// Position of a column that has no quantity of its own.
fn position(table: &Table, header: &str) -> Option<usize> {
    let mut columns = table.columns().iter().filter(|column| column.kind == ColumnKind::Unknown);
    columns.find(|column| column.header == header).map(|column| column.index)
}

/// Refuses a value outside its range.
fn within(row: &Row<'_>, index: usize, value: f64, (low, high): (f64, f64), unit: &str) -> Result<(), Problem> {
    if (low..=high).contains(&value) {
        return Ok(());
    }
    let cell = row.shown(index);
    Err(row.problem(index, format!("{cell}: {value} {unit} is outside {low} {unit} to {high} {unit}")))
}

/// Refuses two rows of one temperature.
fn check_repeats(table: &Table, columns: &Columns, rows: &[FluidRow]) -> Result<(), Problem> {
    let Some(pair) = rows.windows(2).find(|pair| pair[0].temperature >= pair[1].temperature) else {
        return Ok(());
    };
    let (first, again) = (pair[0].line.min(pair[1].line), pair[0].line.max(pair[1].line));
    let message = format!("{} K stands on line {first} already: each temperature once", pair[0].temperature);
    Err(table.column_problem(columns.temperature, message).at_line(again))
}
