//! The one error of every file: where it is, what was found there and what was expected.

use std::{fmt, io};

use thiserror::Error;

/// Longest piece of a user's file that a message repeats, in characters.
const LONGEST_QUOTE: usize = 60;

/// Something wrong with a file, told so that the user can go there and put it right.
///
/// ```
/// use evenbore_bench::input::problem::Problem;
/// let problem = Problem::new("bench.csv", "\"x\" is not a number").at_line(7).at_column(3, "pressure_drop_kPa");
/// assert_eq!(problem.to_string(), "bench.csv:7, column 3 (pressure_drop_kPa): \"x\" is not a number");
/// ```
#[derive(Debug, Error)]
#[error("{}: {}", Place(self), self.message)]
pub struct Problem {
    /// Path as the user gave it, or `standard input`.
    pub file: String,
    /// Physical line, the first being 1.
    pub line: Option<u64>,
    /// Column number, the first being 1, with the column's header (in a table) or the key (in TOML).
    pub column: Option<(usize, String)>,
    /// The value found, and the limit or what was expected.
    pub message: String,
    /// Whether the reader at the other end of a pipe went away.
    closed_pipe: bool,
}

impl Problem {
    /// States a problem of a whole file.
    ///
    /// * `file`: path as the user gave it
    /// * `message`: the value found and what was expected
    pub fn new(file: impl Into<String>, message: impl Into<String>) -> Self {
        Self { file: file.into(), line: None, column: None, message: message.into(), closed_pipe: false }
    }

    /// States that the operating system refused something.
    ///
    /// * `file`: path as the user gave it
    /// * `action`: what was being done, such as `cannot read`
    /// * `error`: the system's answer
    pub fn io(file: impl Into<String>, action: &str, error: &io::Error) -> Self {
        let closed_pipe = error.kind() == io::ErrorKind::BrokenPipe;
        Self { closed_pipe, ..Self::new(file, format!("{action}: {error}")) }
    }

    /// Adds the line.
    ///
    /// * `line`: physical line, the first being 1
    #[must_use]
    pub fn at_line(mut self, line: u64) -> Self {
        self.line = Some(line);
        self
    }

    /// Adds the column.
    ///
    /// * `number`: the first being 1
    /// * `name`: header or key
    #[must_use]
    pub fn at_column(mut self, number: usize, name: impl Into<String>) -> Self {
        self.column = Some((number, name.into()));
        self
    }

    /// Whether the reader of a pipe went away, so that the command should end quietly.
    pub fn is_closed_pipe(&self) -> bool {
        self.closed_pipe
    }
}

/// The place of a problem, as compilers write it.
struct Place<'a>(&'a Problem);

impl fmt::Display for Place<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0.file)?;
        if let Some(line) = self.0.line {
            write!(f, ":{line}")?;
        }
        match &self.0.column {
            Some((number, name)) if name.is_empty() => write!(f, ", column {number}"),
            Some((number, name)) => write!(f, ", column {number} ({})", tamed(name)),
            None => Ok(()),
        }
    }
}

/// Puts a piece of a user's file between quotes, shortened and without control characters.
///
/// * `text`: the bytes as found, in whatever encoding
///
/// ```
/// assert_eq!(evenbore_bench::input::problem::shown(b"4,98"), "\"4,98\"");
/// ```
pub fn shown(text: &[u8]) -> String {
    // Four bytes hold any character, so the cut never costs a visible one.
    let head = &text[..text.len().min(4 * (LONGEST_QUOTE + 1))];
    format!("\"{}\"", tamed(&String::from_utf8_lossy(head)))
}

/// Shortens a text and makes its control characters visible.
fn tamed(text: &str) -> String {
    let mut out: String = text.chars().take(LONGEST_QUOTE).map(visible).collect();
    if text.chars().nth(LONGEST_QUOTE).is_some() {
        out.push_str("...");
    }
    out
}

/// Stands in for a character that would upset a terminal.
fn visible(c: char) -> char {
    match c {
        '\n' | '\r' => '\u{23ce}',
        '\t' => ' ',
        c if c.is_control() => '\u{fffd}',
        c => c,
    }
}
