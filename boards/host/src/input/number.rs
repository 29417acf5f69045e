//! One cell read as a number, with a guess at what went wrong.

use crate::input::problem::shown;

/// Reads a finite decimal number.
///
/// * `cell`: the bytes of the cell, in the column's own unit; blanks around it do not matter
///
/// # Errors
/// A message that repeats the cell and says what was expected, for text, `NaN`, `inf` and numbers beyond double precision.
///
/// ```
/// use evenbore_bench::input::number::number;
/// assert_eq!(number(b" 4.98 "), Ok(4.98));
/// assert_eq!(number(b"4,98").unwrap_err(), "\"4,98\" is not a number: a decimal comma? Write 4.98");
/// ```
pub fn number(cell: &[u8]) -> Result<f64, String> {
    match parsed(cell) {
        Some(value) if value.is_finite() => Ok(value),
        Some(_) => Err(format!("{} is not a finite number; leave a cell empty where there is no reading", shown(cell))),
        None => Err(format!("{} is not a number{}", shown(cell), guess(cell))),
    }
}

/// The number written in a cell, finite or not.
fn parsed(cell: &[u8]) -> Option<f64> {
    std::str::from_utf8(cell.trim_ascii()).ok()?.parse().ok()
}

/// Guesses what a cell that is no number was meant to be.
fn guess(cell: &[u8]) -> String {
    let Ok(text) = std::str::from_utf8(cell) else {
        return ": the bytes are not UTF-8 text".to_owned();
    };
    let text = text.trim();
    if text.is_empty() {
        return ": the cell is empty".to_owned();
    }
    comma(text).or_else(|| minus(text)).or_else(|| unit(text)).unwrap_or_default()
}

/// Recognises decimal commas and thousands separators.
fn comma(text: &str) -> Option<String> {
    let (point, gone) = (text.replace(',', "."), text.replace(',', ""));
    match text.matches(',').count() {
        0 => None,
        1 if is_number(&point) => Some(format!(": a decimal comma? Write {point}")),
        _ if is_number(&gone) => Some(format!(": a thousands separator? Write {gone}")),
        _ => None,
    }
}

/// Recognises typographic minus signs.
fn minus(text: &str) -> Option<String> {
    let plain = text.replace(['\u{2212}', '\u{2013}'], "-");
    (plain != text && is_number(&plain)).then(|| format!(": a typographic minus sign? Write {plain}"))
}

/// Recognises a number with its unit in the cell.
fn unit(text: &str) -> Option<String> {
    let digits = text.trim_end_matches(|c: char| !c.is_ascii_digit()).trim_end();
    is_number(digits).then(|| ": the unit belongs into the header".to_owned())
}

/// Whether a text is a number as this project writes them.
fn is_number(text: &str) -> bool {
    text.parse::<f64>().is_ok_and(f64::is_finite)
}
