//! Standard uncertainties that a table states beside its values.

use crate::input::{
    header::{ColumnKind, UncertaintyUnit},
    problem::Problem,
    row::Row,
    table::Table,
    units::Quantity,
};

/// Standard uncertainty of one value, in the value's SI unit, in two parts; `None` where the table states nothing.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Parts {
    /// Part that varies independently from row to row.
    pub independent: Option<f64>,
    /// Part whose deviation all rows share.
    pub common: Option<f64>,
}

impl Parts {
    /// Both parts together.
    ///
    /// ```
    /// use evenbore_bench::input::uncertain::Parts;
    /// let parts = Parts { independent: Some(3.0), common: Some(4.0) };
    /// assert_eq!(parts.combined(), Some(5.0));
    /// ```
    pub fn combined(&self) -> Option<f64> {
        quadrature(self.independent, self.common)
    }

    /// Uncertainty of the sum of two values with deviations of their own.
    ///
    /// * `other`: of the second value
    #[must_use]
    pub fn of_sum(self, other: Self) -> Self {
        Self {
            independent: quadrature(self.independent, other.independent),
            common: quadrature(self.common, other.common),
        }
    }
}

/// Square root of the sum of squares of what is stated.
fn quadrature(a: Option<f64>, b: Option<f64>) -> Option<f64> {
    match (a, b) {
        (Some(a), Some(b)) => Some(a.hypot(b)),
        (a, b) => a.or(b),
    }
}

/// Columns that hold the two parts of a quantity's standard uncertainty.
#[derive(Clone, Copy, Debug)]
pub struct PartsColumns {
    independent: Option<Stated>,
    common: Option<Stated>,
}

/// A column of standard uncertainties.
#[derive(Clone, Copy, Debug)]
struct Stated {
    index: usize,
    relative: bool,
}

impl PartsColumns {
    /// Finds the columns of a quantity.
    ///
    /// * `table`: with its header read
    /// * `quantity`: whose uncertainty is looked for
    pub fn bind(table: &Table, quantity: Quantity) -> Self {
        let find = |common| table.uncertainty_of(quantity, common).map(|index| Stated::new(table, index));
        Self { independent: find(false), common: find(true) }
    }

    /// First of the columns, the first column of the table being 0.
    pub fn first(&self) -> Option<usize> {
        self.independent.or(self.common).map(|stated| stated.index)
    }

    /// Reads both parts of a row.
    ///
    /// * `row`: the row
    /// * `value`: of the quantity in that row, SI; relative uncertainties are parts of its size
    ///
    /// # Errors
    /// Where a cell is no finite number or is negative.
    pub fn read(&self, row: &Row<'_>, value: f64) -> Result<Parts, Problem> {
        let part = |stated: Option<Stated>| stated.map_or(Ok(None), |stated| stated.read(row, value));
        Ok(Parts { independent: part(self.independent)?, common: part(self.common)? })
    }
}

impl Stated {
    /// Remembers a column and how it is stated.
    fn new(table: &Table, index: usize) -> Self {
        let kind = table.columns().get(index).map(|column| column.kind);
        let relative = matches!(kind, Some(ColumnKind::Uncertainty { unit: UncertaintyUnit::Relative(_), .. }));
        Self { index, relative }
    }

    /// Reads a cell, in the SI unit of the value.
    fn read(self, row: &Row<'_>, value: f64) -> Result<Option<f64>, Problem> {
        match row.number(self.index)? {
            Some(u) if u < 0.0 => {
                let message = format!("{} is negative: a standard uncertainty is 0 or more", row.shown(self.index));
                Err(row.problem(self.index, message))
            }
            Some(u) if self.relative => Ok(Some(u * value.abs())),
            u => Ok(u),
        }
    }
}
