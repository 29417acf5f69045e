//! One row of a table: its line, its cells, and its numbers turned into SI.

use csv::ByteRecord;

use crate::input::{
    header::{ColumnKind, UncertaintyUnit},
    number::number,
    problem::{Problem, shown},
};

/// A column of a table.
#[derive(Clone, Debug)]
pub struct Column {
    /// Position, the first being 0.
    pub index: usize,
    /// Header without the blanks around it.
    pub header: String,
    /// What the header says.
    pub kind: ColumnKind,
}

/// A row, valid until the next one is read.
#[derive(Clone, Copy)]
pub struct Row<'a> {
    file: &'a str,
    columns: &'a [Column],
    record: &'a ByteRecord,
    line: u64,
}

impl<'a> Row<'a> {
    /// Looks at a record.
    ///
    /// * `file`: name in messages
    /// * `columns`: of the table
    /// * `record`: the cells
    /// * `line`: physical line on which the record starts
    pub(crate) fn new(file: &'a str, columns: &'a [Column], record: &'a ByteRecord, line: u64) -> Self {
        Self { file, columns, record, line }
    }

    /// Physical line on which the row starts, the first being 1.
    pub fn line(&self) -> u64 {
        self.line
    }

    /// Cells as they stand in the file, without the quotes.
    pub fn raw(&self) -> &'a ByteRecord {
        self.record
    }

    /// Number in a column, in SI; uncertainties as differences or parts of 1; columns without a known unit as written.
    ///
    /// * `index`: of the column, the first being 0
    ///
    /// Returns `None` for an empty cell.
    ///
    /// # Errors
    /// Where the cell is no finite number.
    pub fn number(&self, index: usize) -> Result<Option<f64>, Problem> {
        let cell = self.cell(index);
        if cell.trim_ascii().is_empty() {
            return Ok(None);
        }
        let value = number(cell).map_err(|message| self.problem(index, message))?;
        let si = self.columns.get(index).map_or(value, |column| to_si(&column.kind, value));
        if si.is_finite() { Ok(Some(si)) } else { Err(self.problem(index, format!("{value} is too large"))) }
    }

    /// Number in a column that must not be empty, in SI.
    ///
    /// * `index`: of the column, the first being 0
    ///
    /// # Errors
    /// Where the cell is empty or no finite number.
    pub fn required(&self, index: usize) -> Result<f64, Problem> {
        self.number(index)?.ok_or_else(|| self.problem(index, "the cell is empty: a number was expected"))
    }

    /// Text in a column, without the blanks around it.
    ///
    /// * `index`: of the column, the first being 0
    ///
    /// # Errors
    /// Where the cell is not UTF-8.
    pub fn text(&self, index: usize) -> Result<&'a str, Problem> {
        let cell = self.cell(index);
        let text = std::str::from_utf8(cell);
        text.map(str::trim).map_err(|_| self.problem(index, format!("{} is not UTF-8 text", shown(cell))))
    }

    /// States a problem with a cell of this row.
    ///
    /// * `index`: of the column, the first being 0
    /// * `message`: the value found and what was expected
    pub fn problem(&self, index: usize, message: impl Into<String>) -> Problem {
        let name = self.columns.get(index).map_or("", |column| column.header.as_str());
        Problem::new(self.file, message).at_line(self.line).at_column(index + 1, name)
    }

    /// The cell as it stands in the file, for messages.
    ///
    /// * `index`: of the column, the first being 0
    pub fn shown(&self, index: usize) -> String {
        shown(self.cell(index))
    }

    /// Bytes of a cell.
    fn cell(&self, index: usize) -> &'a [u8] {
        self.record.get(index).unwrap_or_default()
    }
}

/// Converts a cell's number according to its column.
fn to_si(kind: &ColumnKind, value: f64) -> f64 {
    match kind {
        ColumnKind::Measured(_, unit) => unit.to_si(value),
        ColumnKind::Uncertainty { unit: UncertaintyUnit::Absolute(unit) | UncertaintyUnit::Relative(unit), .. } => {
            unit.interval_to_si(value)
        }
        ColumnKind::Fluid | ColumnKind::Unknown => value,
    }
}
