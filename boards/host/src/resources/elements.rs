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
