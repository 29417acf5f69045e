//! A table read row by row in constant memory, and its header row.

use std::{
    collections::HashSet,
    io::{self, Read},
    path::Path,
};

use csv::{ByteRecord, ReaderBuilder, Terminator};

use crate::input::{
    header::{ColumnKind, recognise},
    lines::RecordLines,
    problem::{Problem, shown},
    row::{Column, Row},
    source,
    units::Quantity,
};

/// A table being read; rows are handed out one after the other.
///
/// ```
/// use evenbore_bench::input::table::Table;
/// let text = "# morning run\ntemperature_C,operator\n20,KL\n";
/// let mut table = Table::from_reader("bench.csv", text.as_bytes())?;
/// let row = table.next_row()?.ok_or("a row")?;
/// assert_eq!((row.line(), row.number(0)?, row.text(1)?), (3, Some(293.15), "KL"));
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
pub struct Table {
    lines: RecordLines,
    csv: csv::Reader<Pending>,
    record: ByteRecord,
    columns: Vec<Column>,
    header_line: u64,
    rows: u64,
}

impl Table {
    /// Opens a file and reads its header row.
    ///
    /// * `path`: of the CSV file, or `-` for standard input
    ///
    /// # Errors
    /// Where the file cannot be opened, is empty, or has a header that is not accepted.
    pub fn open(path: impl AsRef<Path>) -> Result<Self, Problem> {
        let path = path.as_ref();
        Self::start(source::display_name(path), source::open(path)?)
    }

    /// Reads a table from any stream.
    ///
    /// * `file`: name in messages
    /// * `input`: the bytes
    ///
    /// # Errors
    /// Where the stream is empty or has a header that is not accepted.
    pub fn from_reader(file: &str, input: impl Read + Send + 'static) -> Result<Self, Problem> {
        Self::start(file.to_owned(), Box::new(input))
    }

    /// Columns from left to right.
    pub fn columns(&self) -> &[Column] {
        &self.columns
    }

    /// Name of the file in messages.
    pub fn file(&self) -> &str {
        self.lines.file()
    }

    /// States a problem with the header row as a whole.
    ///
    /// * `message`: what was found and what was expected
    pub fn header_problem(&self, message: impl Into<String>) -> Problem {
        Problem::new(self.file(), message).at_line(self.header_line)
    }

    /// States a problem with one header.
    ///
    /// * `index`: of the column, the first being 0
    /// * `message`: what was found and what was expected
    pub fn column_problem(&self, index: usize, message: impl Into<String>) -> Problem {
        let name = self.columns.get(index).map_or("", |column| column.header.as_str());
        self.header_problem(message).at_column(index + 1, name)
    }

    /// Column of a quantity's values.
    ///
    /// * `quantity`: the quantity looked for
    pub fn column_of(&self, quantity: Quantity) -> Option<usize> {
        self.position(|kind| matches!(kind, ColumnKind::Measured(q, _) if *q == quantity))
    }

    /// Column of a quantity's standard uncertainty.
    ///
    /// * `quantity`: the quantity looked for
    /// * `common`: the part shared by all rows, or the independent one
    pub fn uncertainty_of(&self, quantity: Quantity, common: bool) -> Option<usize> {
        self.position(
            |kind| matches!(kind, ColumnKind::Uncertainty { quantity: q, common: c, .. } if *q == quantity && *c == common),
        )
    }

    /// Column of fluid names.
    pub fn fluid_column(&self) -> Option<usize> {
        self.position(|kind| *kind == ColumnKind::Fluid)
    }

    /// Reads the next row; `None` after the last.
    ///
    /// # Errors
    /// Where the system refuses, a row has more or fewer cells than the header, or there is no row at all.
    pub fn next_row(&mut self) -> Result<Option<Row<'_>>, Problem> {
        let Some(line) = self.advance()? else {
            return self.end();
        };
        self.rows += 1;
        self.check_width(line)?;
        Ok(Some(Row::new(self.lines.file(), &self.columns, &self.record, line)))
    }

    /// Reads the header row of a stream.
    fn start(file: String, input: Box<dyn Read + Send>) -> Result<Self, Problem> {
        let csv = ReaderBuilder::new()
            .has_headers(false)
            .flexible(true)
            .terminator(Terminator::Any(b'\n'))
            .from_reader(Pending::default());
        let lines = RecordLines::new(file, input);
        let mut table = Self { lines, csv, record: ByteRecord::new(), columns: Vec::new(), header_line: 0, rows: 0 };
        let Some(line) = table.advance()? else {
            let message = "the file is empty: a header row such as pressure_drop_kPa,temperature_C was expected";
            return Err(Problem::new(table.file(), message).at_line(table.lines.lines_read().max(1)));
        };
        table.header_line = line;
        table.columns = Header { file: table.lines.file(), line }.columns(&table.record)?;
        Ok(table)
    }

    /// Reads the next record and tells its first line.
    fn advance(&mut self) -> Result<Option<u64>, Problem> {
        let pending = self.csv.get_mut();
        pending.at = 0;
        let Some(line) = self.lines.next(&mut pending.text)? else {
            return Ok(None);
        };
        match self.csv.read_byte_record(&mut self.record) {
            Ok(true) => Ok(Some(line)),
            Ok(false) => Err(Problem::new(self.file(), "the row cannot be split into cells").at_line(line)),
            Err(error) => Err(Problem::new(self.file(), error.to_string()).at_line(line)),
        }
    }

    /// Ends the table, which must have had a row.
    fn end(&self) -> Result<Option<Row<'_>>, Problem> {
        if self.rows > 0 {
            return Ok(None);
        }
        let message = "the file ends after its header: at least one row was expected";
        Err(Problem::new(self.file(), message).at_line(self.lines.lines_read().max(1)))
    }

    /// Refuses a row whose cells do not match the header.
    fn check_width(&self, line: u64) -> Result<(), Problem> {
        let (found, expected) = (self.record.len(), self.columns.len());
        if found == expected {
            return Ok(());
        }
        let hint = if found > expected { "; a decimal comma splits a number in two" } else { "" };
        let message = format!("the row has {found} cells, the header has {expected}{hint}");
        Err(Problem::new(self.file(), message).at_line(line))
    }

    /// Position of the first column of a kind.
    fn position(&self, fits: impl Fn(&ColumnKind) -> bool) -> Option<usize> {
        self.columns.iter().position(|column| fits(&column.kind))
    }
}

/// The header row being recognised.
struct Header<'a> {
    file: &'a str,
    line: u64,
}

impl Header<'_> {
    /// Recognises every column and refuses repeated ones.
    fn columns(&self, record: &ByteRecord) -> Result<Vec<Column>, Problem> {
        self.check_separator(record)?;
        let columns: Vec<Column> =
            record.iter().enumerate().map(|(index, cell)| self.column(index, cell)).collect::<Result<_, _>>()?;
        self.check_repeats(&columns)?;
        Ok(columns)
    }

    /// Recognises one column.
    fn column(&self, index: usize, cell: &[u8]) -> Result<Column, Problem> {
        let Ok(text) = std::str::from_utf8(cell) else {
            return Err(self.problem(index, "", format!("{} is not UTF-8 text; save the file as UTF-8", shown(cell))));
        };
        let header = text.trim().to_owned();
        match recognise(&header) {
            Ok(kind) => Ok(Column { index, header, kind }),
            Err(message) => Err(self.problem(index, &header, message)),
        }
    }

    /// Refuses files whose columns or lines are separated in another way.
    fn check_separator(&self, record: &ByteRecord) -> Result<(), Problem> {
        let only = if record.len() == 1 { record.get(0).unwrap_or_default() } else { b"" };
        let message = if only.contains(&b';') {
            "the columns are separated by semicolons, as in exports with decimal commas: write commas between the \
             columns and points in the numbers"
        } else if only.contains(&b'\t') {
            "the columns are separated by tabs: write commas between them"
        } else if record.as_slice().contains(&b'\r') {
            "the lines end in carriage returns alone: end them in line feeds"
        } else {
            return Ok(());
        };
        Err(Problem::new(self.file, format!("{message} (found {})", shown(record.as_slice()))).at_line(self.line))
    }

    /// Refuses two columns of the same header, or of the same quantity in two units.
    fn check_repeats(&self, columns: &[Column]) -> Result<(), Problem> {
        let mut seen = HashSet::new();
        for column in columns {
            let meaning = meaning(column);
            if !column.header.is_empty() && !seen.insert(meaning) {
                let message = format!("a second column of {}: each may appear once", shown(column.header.as_bytes()));
                return Err(self.problem(column.index, &column.header, message));
            }
        }
        Ok(())
    }

    /// States a problem with a header.
    fn problem(&self, index: usize, name: &str, message: impl Into<String>) -> Problem {
        Problem::new(self.file, message).at_line(self.line).at_column(index + 1, name)
    }
}

/// What must be unique among the columns: the quantity whatever its unit, else the header.
fn meaning(column: &Column) -> (String, bool) {
    match column.kind {
        ColumnKind::Measured(quantity, _) => (quantity.name().to_owned(), false),
        ColumnKind::Uncertainty { quantity, common, .. } => (format!("u_{}", quantity.name()), common),
        ColumnKind::Fluid | ColumnKind::Unknown => (column.header.clone(), false),
    }
}

/// The text of one record, handed to the CSV reader and to nothing else.
#[derive(Default)]
struct Pending {
    text: Vec<u8>,
    at: usize,
}

impl Read for Pending {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        let count = (&self.text[self.at..]).read(buffer)?;
        self.at += count;
        Ok(count)
    }
}
