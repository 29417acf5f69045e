//! A record as files: the instrument's bytes, and the same record as text that a person can read.
//!
//! The text carries the checksum of the bytes, so an edited text is noticed.

use crate::input::problem::Problem;
use crate::input::toml_text::TomlText;
use evenbore::Record;
use evenbore::record::RECORD_LENGTH;
use serde::{Deserialize, Serialize};
use std::io::Read;
use std::path::Path;

/// A record's text.
#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct RecordText {
    /// CRC-32 at the end of the record's bytes, as 8 hexadecimal digits.
    checksum: String,
    record: Record,
}

/// Heading of the text form.
const HEADING: &str = "# Calibration record of a laminar flow element, SI units; the checksum is that of record.bin.\n";

/// The record's bytes.
pub fn to_bytes(record: &Record) -> [u8; RECORD_LENGTH] {
    let mut bytes = [0; RECORD_LENGTH];
    record.encode(&mut bytes);
    bytes
}

/// The record's text.
///
/// # Errors
/// What the text form cannot hold; no valid record is such.
pub fn to_text(record: &Record) -> Result<String, toml::ser::Error> {
    let checksum = format!("{:08x}", record.checksum());
    let text = toml::to_string(&RecordText { checksum, record: record.clone() })?;
    Ok(format!("{HEADING}{text}"))
}

/// Reads a record, text or bytes, whichever the file holds.
///
/// # Errors
/// Where the file cannot be read, is neither form, is damaged, or was edited.
pub fn open(path: &Path) -> Result<Record, Problem> {
    let name = path.display().to_string();
    let mut bytes = Vec::new();
    let file = std::fs::File::open(path).map_err(|error| Problem::io(&name, "cannot open", &error))?;
    file.take(1 << 20).read_to_end(&mut bytes).map_err(|error| Problem::io(&name, "cannot read", &error))?;
    match std::str::from_utf8(&bytes) {
        Ok(text) if !bytes.starts_with(b"EVBR") => from_text(&name, text),
        _ => Record::decode(&bytes).map_err(|error| Problem::new(&name, error.to_string())),
    }
}

fn from_text(name: &str, text: &str) -> Result<Record, Problem> {
    let source = TomlText::new(name, text);
    let RecordText { checksum, record } = toml::from_str(text).map_err(|error| {
        // An element file is the likeliest thing to be taken for a record.
        let keys = text.parse::<toml::Table>().unwrap_or_default();
        if keys.contains_key("shape") && !keys.contains_key("record") {
            return Problem::new(name, "not a calibration record: this looks like an element file");
        }
        source.syntax(&error)
    })?;
    record.check().map_err(|error| Problem::new(name, error.to_string()))?;
    let computed = format!("{:08x}", record.checksum());
    if computed == checksum {
        Ok(record)
    } else {
        let message = format!(
            "the text was edited: its checksum is {checksum}, that of its content {computed}; a record is changed by \
             calibrating again"
        );
        Err(Problem::new(name, message))
    }
}
