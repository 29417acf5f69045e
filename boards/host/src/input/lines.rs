//! The records of a table as text: comments and blank lines left out, physical lines counted, length limited.

use std::io::{BufRead, BufReader, Read};

use crate::input::problem::Problem;

/// Longest record, in bytes; a file without line ends must not fill the memory.
pub const LONGEST_RECORD: usize = 1 << 20;

/// Bytes asked from the system at a time.
const CHUNK: usize = 1 << 16;

/// Cuts a stream into records of one physical line, or of several where a quoted cell goes on.
pub struct RecordLines {
    file: String,
    input: BufReader<Box<dyn Read + Send>>,
    line: u64,
}

impl RecordLines {
    /// Starts at the beginning of a stream.
    ///
    /// * `file`: name in messages
    /// * `input`: the bytes
    pub fn new(file: String, input: Box<dyn Read + Send>) -> Self {
        Self { file, input: BufReader::with_capacity(CHUNK, input), line: 0 }
    }

    /// Name in messages.
    pub fn file(&self) -> &str {
        &self.file
    }

    /// Physical lines read so far.
    pub fn lines_read(&self) -> u64 {
        self.line
    }

    /// Reads the next record, ending in one line feed, and tells the physical line on which it starts.
    ///
    /// * `record`: receives the text; its memory is used again
    ///
    /// Returns `None` at the end of the stream.
    ///
    /// # Errors
    /// Where the system refuses, a record exceeds 1 MiB, a quote stays open, or the text is UTF-16.
    pub fn next(&mut self, record: &mut Vec<u8>) -> Result<Option<u64>, Problem> {
        loop {
            record.clear();
            if self.append_line(record)? == 0 {
                return Ok(None);
            }
            if !is_skipped(record) {
                break;
            }
        }
        let first = self.line;
        self.close_quotes(record, first)?;
        end_with_line_feed(record);
        Ok(Some(first))
    }

    /// Appends one physical line and counts it; the first loses its byte order mark.
    fn append_line(&mut self, record: &mut Vec<u8>) -> Result<usize, Problem> {
        let room = (LONGEST_RECORD + 1).saturating_sub(record.len());
        let read = (&mut self.input).take(room as u64).read_until(b'\n', record);
        let count = read.map_err(|error| Problem::io(&self.file, "cannot read", &error).at_line(self.line + 1))?;
        self.line += u64::from(count > 0);
        if record.len() > LONGEST_RECORD {
            return Err(self.too_long());
        }
        if self.line == 1 {
            self.strip_mark(record)?;
        }
        Ok(count)
    }

    /// Removes a UTF-8 byte order mark and refuses those of UTF-16.
    fn strip_mark(&self, record: &mut Vec<u8>) -> Result<(), Problem> {
        if record.starts_with(&[0xff, 0xfe]) || record.starts_with(&[0xfe, 0xff]) {
            return Err(Problem::new(&self.file, "the text is UTF-16; save the file as UTF-8").at_line(1));
        }
        if record.starts_with(b"\xef\xbb\xbf") {
            record.drain(..3);
        }
        Ok(())
    }

    /// Appends physical lines until every quoted cell is closed.
    fn close_quotes(&mut self, record: &mut Vec<u8>, first: u64) -> Result<(), Problem> {
        let mut quotes = Quotes::default();
        let mut seen = 0;
        while quotes.stay_open(&record[seen..]) {
            seen = record.len();
            if self.append_line(record)? == 0 {
                let message = "a cell that starts with a quotation mark is never closed: expected a second one";
                return Err(Problem::new(&self.file, message).at_line(first));
            }
        }
        Ok(())
    }

    /// Says that a record exceeds the limit.
    fn too_long(&self) -> Problem {
        let message = format!("the line is longer than the limit of {LONGEST_RECORD} bytes: is this a text file?");
        Problem::new(&self.file, message).at_line(self.line)
    }
}

/// Whether a line is a comment or blank.
fn is_skipped(line: &[u8]) -> bool {
    line.first() == Some(&b'#') || line.trim_ascii().is_empty()
}

/// Gives the last record its line feed and takes the carriage return off a line from Windows.
fn end_with_line_feed(record: &mut Vec<u8>) {
    if record.last() == Some(&b'\n') {
        record.pop();
    }
    if record.last() == Some(&b'\r') {
        record.pop();
    }
    record.push(b'\n');
}

/// Follows quotation marks the way a CSV reader does: only one at the start of a cell opens it.
#[derive(Default)]
enum Quotes {
    #[default]
    CellStart,
    Plain,
    Quoted,
    /// After a mark inside a quoted cell: its end, or the first half of a doubled mark.
    Mark,
}

impl Quotes {
    /// Follows more text and tells whether a quoted cell is still open at its end.
    fn stay_open(&mut self, text: &[u8]) -> bool {
        if matches!(self, Self::CellStart) && !text.contains(&b'"') {
            return false;
        }
        text.iter().for_each(|&byte| self.step(byte));
        matches!(self, Self::Quoted)
    }

    /// Follows one byte.
    fn step(&mut self, byte: u8) {
        *self = match (&self, byte) {
            (Self::Quoted, b'"') => Self::Mark,
            (Self::Quoted, _) | (Self::CellStart | Self::Mark, b'"') => Self::Quoted,
            (_, b',') => Self::CellStart,
            _ => Self::Plain,
        };
    }
}
