//! Opening what a path names: a file, or standard input for `-`.

use std::{fs::File, io, io::Read, path::Path};

use crate::input::problem::Problem;

/// Largest text file that is read whole, in bytes; larger ones are no element or fluids file.
const LARGEST_TEXT: u64 = 1 << 20;

/// Name of a path in messages.
///
/// * `path`: as the user gave it
pub fn display_name(path: &Path) -> String {
    if is_dash(path) { "standard input".to_owned() } else { path.display().to_string() }
}

/// Whether a path stands for standard input or output.
///
/// * `path`: as the user gave it
pub fn is_dash(path: &Path) -> bool {
    path.as_os_str() == "-"
}

/// Opens a file, or standard input for `-`.
///
/// * `path`: as the user gave it
///
/// # Errors
/// Names the path and the system's reason.
pub fn open(path: &Path) -> Result<Box<dyn Read + Send>, Problem> {
    if is_dash(path) {
        return Ok(Box::new(io::stdin()));
    }
    match File::open(path) {
        Ok(file) => Ok(Box::new(file)),
        Err(error) => Err(Problem::io(display_name(path), "cannot open", &error)),
    }
}

/// Reads a small text file whole.
///
/// * `path`: as the user gave it, `-` for standard input
///
/// # Errors
/// Names the path where the system refuses or the file is larger than 1 MiB, and the line where it is not UTF-8.
pub fn read_text(path: &Path) -> Result<String, Problem> {
    let name = display_name(path);
    let mut bytes = Vec::new();
    let read = open(path)?.take(LARGEST_TEXT + 1).read_to_end(&mut bytes);
    let count = read.map_err(|error| Problem::io(&name, "cannot read", &error))?;
    if count as u64 > LARGEST_TEXT {
        return Err(Problem::new(name, format!("the file is larger than the limit of {LARGEST_TEXT} bytes")));
    }
    utf8(&name, bytes)
}

/// Takes bytes as UTF-8, without a byte order mark.
fn utf8(name: &str, bytes: Vec<u8>) -> Result<String, Problem> {
    match String::from_utf8(bytes) {
        Ok(text) => Ok(text.strip_prefix('\u{feff}').map(str::to_owned).unwrap_or(text)),
        Err(error) => {
            let before = &error.as_bytes()[..error.utf8_error().valid_up_to()];
            let line = 1 + before.iter().filter(|&&byte| byte == b'\n').count() as u64;
            Err(Problem::new(name, "the text is not UTF-8; save the file as UTF-8").at_line(line))
        }
    }
}
