//! The element file: what the drawing says about a laminar flow element.

use std::path::Path;

use crate::input::{
    problem::{Problem, shown},
    toml_table::{Limits, Section},
    toml_text::TomlText,
};

/// Longest serial number, in characters.
const LONGEST_SERIAL: usize = 16;
const COUNT: Limits = Limits::new(1.0, 1e6, "");
const NARROW: Limits = Limits::new(0.001, 50.0, "mm");
const WIDTH: Limits = Limits::new(0.1, 100_000.0, "mm");
const LENGTH: Limits = Limits::new(0.1, 10_000.0, "mm");
const AREA: Limits = Limits::new(1e-6, 1e6, "mm2");
const EXPANSION: Limits = Limits::new(-1e-4, 1e-3, "1/K");
const REFERENCE: Limits = Limits::new(-100.0, 250.0, "C");

const SHAPES: &[&str] = &["round-tubes", "parallel-plates", "other"];
const COMMON_KEYS: &[&str] = &["serial", "shape", "count", "length_mm", "expansion_per_K", "reference_temperature_C"];
/// Keys that belong to each of the shapes alone, in the order of [`SHAPES`].
const OWN_KEYS: [&[&str]; 3] = [&["bore_mm"], &["gap_mm", "width_mm"], &["hydraulic_diameter_mm", "open_area_mm2"]];

/// An element as its maker describes it, in the units of the file.
#[derive(Clone, Debug, PartialEq)]
pub struct ElementFile {
    /// Serial number, 1 to 16 printable ASCII characters.
    pub serial: String,
    /// Shape of the channels and their size across the flow.
    pub shape: Shape,
    /// Channels in parallel; 1 where plates, whose width is the total one, or another shape do not say.
    pub count: u32,
    /// Length of a channel along the flow, mm.
    pub length_mm: f64,
    /// Linear thermal expansion of the element's material, 1/K.
    pub expansion_per_k: f64,
    /// Temperature at which the sizes hold, C.
    pub reference_temperature_c: f64,
}

/// Shape of the channels.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Shape {
    /// Round tubes.
    RoundTubes {
        /// Inner diameter, mm.
        bore_mm: f64,
    },
    /// Slots between parallel plates.
    ParallelPlates {
        /// Full gap, mm.
        gap_mm: f64,
        /// Total width, mm.
        width_mm: f64,
    },
    /// Anything else, known through calibration alone.
    Other {
        /// Four times the open area over the wetted perimeter, mm.
        hydraulic_diameter_mm: Option<f64>,
        /// Open area across the flow, mm2.
        open_area_mm2: Option<f64>,
    },
}

impl ElementFile {
    /// Reads an element file.
    ///
    /// * `path`: of the TOML file, or `-` for standard input
    ///
    /// # Errors
    /// Where the file is not TOML, a key is unknown, missing or of another shape, or a value is out of range.
    pub fn open(path: impl AsRef<Path>) -> Result<Self, Problem> {
        Self::read(&TomlText::open(path.as_ref())?)
    }

    /// Reads the text of an element file.
    ///
    /// * `text`: with its name
    ///
    /// # Errors
    /// As for [`Self::open`].
    ///
    /// ```
    /// use evenbore_bench::input::{element_file::{ElementFile, Shape}, toml_text::TomlText};
    /// let text = r#"
    /// serial = "EB-0042"
    /// shape = "round-tubes"
    /// count = 120
    /// bore_mm = 0.44
    /// length_mm = 120.0
    /// expansion_per_K = 16e-6
    /// reference_temperature_C = 20.0
    /// "#;
    /// let element = ElementFile::read(&TomlText::new("element.toml", text))?;
    /// assert_eq!(element.shape, Shape::RoundTubes { bore_mm: 0.44 });
    /// # Ok::<(), evenbore_bench::input::problem::Problem>(())
    /// ```
    pub fn read(text: &TomlText) -> Result<Self, Problem> {
        Self::from_keys(&Section::top(text)?)
    }

    /// Reads an element from a table of a file.
    ///
    /// * `keys`: the table
    ///
    /// # Errors
    /// Names the line and key of what is missing, unknown, outside its range or in conflict with the shape.
    pub fn from_keys(keys: &Section<'_>) -> Result<Self, Problem> {
        keys.accept(&[COMMON_KEYS, &OWN_KEYS.concat()].concat())?;
        let shape = keys.choice("shape", SHAPES)?;
        refuse_foreign(keys, shape)?;
        Ok(Self {
            serial: serial(keys)?,
            shape: sizes(keys, shape)?,
            count: count(keys, shape)?,
            length_mm: keys.number("length_mm", LENGTH)?,
            expansion_per_k: keys.number("expansion_per_K", EXPANSION)?,
            reference_temperature_c: keys.number("reference_temperature_C", REFERENCE)?,
        })
    }
}

/// Refuses the sizes of another shape.
fn refuse_foreign(keys: &Section<'_>, shape: usize) -> Result<(), Problem> {
    for (other, own) in OWN_KEYS.iter().enumerate().filter(|(other, _)| *other != shape) {
        if let Some(key) = own.iter().find(|key| keys.has(key)) {
            let message = format!(
                "belongs to {}, but the shape is {}, which has {}",
                SHAPES[other],
                SHAPES[shape],
                OWN_KEYS[shape].join(", ")
            );
            return Err(keys.problem(key, message));
        }
    }
    Ok(())
}

/// Reads the sizes of a shape.
fn sizes(keys: &Section<'_>, shape: usize) -> Result<Shape, Problem> {
    match shape {
        0 => Ok(Shape::RoundTubes { bore_mm: keys.number("bore_mm", NARROW)? }),
        1 => plates(keys),
        _ => other(keys),
    }
}

/// Reads the sizes of another shape: both, or neither.
fn other(keys: &Section<'_>) -> Result<Shape, Problem> {
    let (diameter, area) = ("hydraulic_diameter_mm", "open_area_mm2");
    for (given, absent) in [(diameter, area), (area, diameter)] {
        if keys.has(given) && !keys.has(absent) {
            let message = format!("stands without {absent}: give both, for the Reynolds number, or neither");
            return Err(keys.problem(given, message));
        }
    }
    Ok(Shape::Other {
        hydraulic_diameter_mm: keys.optional_number(diameter, NARROW)?,
        open_area_mm2: keys.optional_number(area, AREA)?,
    })
}

/// Reads the sizes of parallel plates.
fn plates(keys: &Section<'_>) -> Result<Shape, Problem> {
    let (gap_mm, width_mm) = (keys.number("gap_mm", NARROW)?, keys.number("width_mm", WIDTH)?);
    if gap_mm >= width_mm {
        let message = format!("{gap_mm} mm is not below the width of {width_mm} mm: a slot is wider than high");
        return Err(keys.problem("gap_mm", message));
    }
    Ok(Shape::ParallelPlates { gap_mm, width_mm })
}

/// Reads the number of channels, which only round tubes have to state.
fn count(keys: &Section<'_>, shape: usize) -> Result<u32, Problem> {
    if SHAPES[shape] != "round-tubes" && !keys.has("count") {
        return Ok(1);
    }
    let count = keys.count("count", COUNT)?;
    if SHAPES[shape] == "parallel-plates" && count != 1 {
        let message = format!("{count} is not 1: width_mm is the total width of all slots, so leave count out");
        return Err(keys.problem("count", message));
    }
    Ok(count)
}

/// Reads the serial number.
fn serial(keys: &Section<'_>) -> Result<String, Problem> {
    let text = keys.text("serial")?;
    let printable = text.bytes().all(|byte| byte.is_ascii_graphic() || byte == b' ');
    if printable && !text.trim().is_empty() && text.len() <= LONGEST_SERIAL {
        return Ok(text.to_owned());
    }
    let (text, found) = (shown(text.as_bytes()), text.chars().count());
    let message = format!("{text} ({found} characters) is not 1 to {LONGEST_SERIAL} printable ASCII characters");
    Err(keys.problem("serial", message))
}
