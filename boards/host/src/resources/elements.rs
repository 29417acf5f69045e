//! An element file as an element of the library.

use crate::input::element_file::{ElementFile, Shape};
use evenbore::Element;
use evenbore::error::Error;
use evenbore::quantity::{Length, Temperature};

/// A coefficient that stands in until a calibration gives A and B of a matrix of unknown channels.
const UNKNOWN_COEFFICIENT: f32 = 1.0;

/// The element of nominal geometry that a file describes.
///
/// An element of shape "other" has no nominal A and B; both are 1 until a calibration sets them.
///
/// # Errors
/// Names the size the library does not accept.
pub fn nominal(file: &ElementFile) -> Result<Element, Error> {
    let mm = |value: f64| Length::from_millimetres(value as f32);
    let length = mm(file.length_mm);
    let element = match file.shape {
        Shape::RoundTubes { bore_mm } => Element::round_tubes(file.count, mm(bore_mm), length)?,
        Shape::ParallelPlates { gap_mm, width_mm } => Element::parallel_plates(mm(gap_mm), mm(width_mm), length)?,
        Shape::Other { hydraulic_diameter_mm, open_area_mm2 } => {
            let element = Element::other(UNKNOWN_COEFFICIENT, 0.0)?;
            match (hydraulic_diameter_mm, open_area_mm2) {
                (Some(diameter), Some(area)) => element.with_hydraulic_size(mm(diameter), (area * 1e-6) as f32)?,
                _ => element,
            }
        }
    };
    element.with_expansion(file.expansion_per_k as f32, Temperature::from_celsius(file.reference_temperature_c as f32))
}

/// Whether the file says enough for a nominal A and B.
pub fn has_nominal_coefficients(file: &ElementFile) -> bool {
    !matches!(file.shape, Shape::Other { .. })
}

/// The file's content in words, for a report.
pub fn describe(file: &ElementFile) -> Vec<(String, String)> {
    let mm = |value: f64| format!("{value} mm");
    let (shape, mut sizes) = match file.shape {
        Shape::RoundTubes { bore_mm } => ("round tubes", vec![("bore", mm(bore_mm))]),
        Shape::ParallelPlates { gap_mm, width_mm } => {
            ("parallel plates", vec![("gap", mm(gap_mm)), ("width", mm(width_mm))])
        }
        Shape::Other { .. } => ("other", vec![]),
    };
    sizes.insert(0, ("shape", shape.into()));
    sizes.push(("channels", file.count.to_string()));
    sizes.push(("length", mm(file.length_mm)));
    sizes.push(("thermal expansion", format!("{:e} 1/K", file.expansion_per_k)));
    sizes.push(("reference temperature", format!("{} C", file.reference_temperature_c)));
    sizes.into_iter().map(|(name, value)| (name.into(), value)).collect()
}

/// The text of an element file, as [`ElementFile::read`] takes it; slots between plates become one of their total width.
///
/// ```
/// use evenbore_bench::input::{element_file::{ElementFile, Shape}, toml_text::TomlText};
/// use evenbore_bench::resources::elements::as_toml;
/// let file = ElementFile {
///     serial: "EB-0042".into(),
///     shape: Shape::RoundTubes { bore_mm: 0.44 },
///     count: 120,
///     length_mm: 120.0,
///     expansion_per_k: 16e-6,
///     reference_temperature_c: 20.0,
/// };
/// assert_eq!(ElementFile::read(&TomlText::new("element.toml", &as_toml(&file)))?, file);
/// # Ok::<(), evenbore_bench::input::problem::Problem>(())
/// ```
pub fn as_toml(file: &ElementFile) -> String {
    let (shape, sizes) = match file.shape {
        Shape::RoundTubes { bore_mm } => ("round-tubes", vec![("bore_mm", bore_mm)]),
        Shape::ParallelPlates { gap_mm, width_mm } => {
            ("parallel-plates", vec![("gap_mm", gap_mm), ("width_mm", width_mm)])
        }
        Shape::Other { hydraulic_diameter_mm, open_area_mm2 } => {
            let given = [("hydraulic_diameter_mm", hydraulic_diameter_mm), ("open_area_mm2", open_area_mm2)];
            ("other", given.into_iter().filter_map(|(key, value)| Some((key, value?))).collect())
        }
    };
    let serial = toml::Value::String(file.serial.clone());
    let mut text = format!("serial = {serial}\nshape = \"{shape}\"\n");
    text += &match (file.shape, file.count) {
        (Shape::ParallelPlates { .. }, 1) => String::new(),
        (Shape::ParallelPlates { .. }, slots) => format!("# The width is that of {slots} slots together.\n"),
        (_, count) => format!("count = {count}\n"),
    };
    let further = [
        ("length_mm", file.length_mm),
        ("expansion_per_K", file.expansion_per_k),
        ("reference_temperature_C", file.reference_temperature_c),
    ];
    for (key, value) in sizes.into_iter().chain(further) {
        text += &format!("{key} = {value:?}\n");
    }
    text
}
