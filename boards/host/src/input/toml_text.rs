//! A TOML file's text, and problems with places in it.

use std::path::Path;

use crate::input::{
    problem::{Problem, shown},
    source,
};

/// A TOML file's text.
pub struct TomlText {
    file: String,
    text: String,
}

impl TomlText {
    /// Reads a file.
    ///
    /// * `path`: as the user gave it, `-` for standard input
    ///
    /// # Errors
    /// Where the system refuses, the file is larger than 1 MiB or is not UTF-8.
    pub fn open(path: &Path) -> Result<Self, Problem> {
        Ok(Self::new(&source::display_name(path), &source::read_text(path)?))
    }

    /// Takes a text.
    ///
    /// * `file`: name in messages
    /// * `text`: the TOML
    pub fn new(file: &str, text: &str) -> Self {
        Self { file: file.to_owned(), text: text.to_owned() }
    }

    /// The whole text.
    pub fn as_str(&self) -> &str {
        &self.text
    }

    /// States a problem at a byte of the text.
    ///
    /// * `at`: offset of the byte, the first being 0
    /// * `key`: whose value it concerns
    /// * `message`: the value found and what was expected
    pub fn problem(&self, at: usize, key: &str, message: impl Into<String>) -> Problem {
        let before = self.text.get(..at).unwrap_or(&self.text);
        let line = before.matches('\n').count() as u64 + 1;
        let column = before.rsplit('\n').next().unwrap_or_default().chars().count() + 1;
        Problem::new(&self.file, message).at_line(line).at_column(column, key)
    }

    /// States that the text is not TOML.
    ///
    /// * `error`: of the parser
    pub fn syntax(&self, error: &toml::de::Error) -> Problem {
        let at = error.span().map_or(0, |span| span.start);
        let line = self.text.get(at..).unwrap_or_default().lines().next().unwrap_or_default();
        let before = self.text.get(..at).and_then(|before| before.rsplit('\n').next()).unwrap_or_default();
        let key = format!("{before}{line}").split('=').next().unwrap_or_default().trim().to_owned();
        let hint = if line.starts_with(',') { "; a decimal comma? Write a point" } else { "" };
        let message = error.message().trim().replace('\n', ", ");
        self.problem(at, &key, format!("{} is not TOML here: {message}{hint}", shown(line.as_bytes())))
    }
}
