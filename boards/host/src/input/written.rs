//! Quantities written on a command line, such as `25C`, `101.325kPa` or `0C,101.325kPa`.

use crate::input::{
    header::{listed, meant},
    number::number,
    problem::shown,
    units::{MOLAR_MASS, Quantity, RELATIVE, Unit, VOLUME_FLOW},
};

/// Reference conditions of a standard flow.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ReferenceConditions {
    /// Temperature, K.
    pub temperature: f64,
    /// Absolute pressure, Pa.
    pub pressure: f64,
}

/// Reads a number followed by its unit.
///
/// * `text`: such as `25C`, with or without a blank between
/// * `quantity`: what is expected
///
/// Returns the value in SI.
///
/// # Errors
/// A message that repeats the text and lists the accepted units; also below absolute zero or, for an absolute
/// pressure, below vacuum.
///
/// ```
/// use evenbore_bench::input::{units::Quantity, written::parse_quantity};
/// assert_eq!(parse_quantity("25C", Quantity::Temperature), Ok(298.15));
/// assert_eq!(parse_quantity("50 pct", Quantity::RelativeHumidity), Ok(0.5));
/// assert!(parse_quantity("25", Quantity::Temperature).unwrap_err().contains("C, K, F"));
/// ```
pub fn parse_quantity(text: &str, quantity: Quantity) -> Result<f64, String> {
    let value = with_unit(text.trim(), quantity.units())?;
    match floor(quantity) {
        Some(floor) if value <= floor => Err(format!("{} is not above absolute zero", shown(text.as_bytes()))),
        _ => Ok(value),
    }
}

/// Reads a difference, such as an uncertainty: a number followed by its unit, without the unit's zero point.
///
/// * `text`: such as `0.1K`
/// * `quantity`: what it is a difference of
///
/// # Errors
/// A message that repeats the text and lists the accepted units.
///
/// ```
/// use evenbore_bench::input::{units::Quantity, written::parse_interval};
/// assert_eq!(parse_interval("0.9F", Quantity::Temperature), Ok(0.5));
/// ```
pub fn parse_interval(text: &str, quantity: Quantity) -> Result<f64, String> {
    converted(text.trim(), quantity.units(), Unit::interval_to_si)
}

/// Reads a value, or two with `..` between, the lower first.
///
/// * `text`: such as `20C` or `10C..40C`
/// * `read`: what reads one value
///
/// # Errors
/// What `read` says; also when the first value exceeds the second.
///
/// ```
/// use evenbore_bench::input::written::{parse_share, parse_span};
/// assert_eq!(parse_span("10pct..100pct", parse_share), Ok([0.1, 1.0]));
/// assert_eq!(parse_span("0.5rel", parse_share), Ok([0.5, 0.5]));
/// assert!(parse_span("40pct..20pct", parse_share).is_err());
/// ```
pub fn parse_span(text: &str, read: impl Fn(&str) -> Result<f64, String>) -> Result<[f64; 2], String> {
    let Some((low, high)) = text.split_once("..") else { return read(text).map(|value| [value; 2]) };
    let span = [read(low)?, read(high)?];
    if span[0] <= span[1] {
        return Ok(span);
    }
    Err(format!("{} falls: the lower end comes first, as in 10C..40C", shown(text.as_bytes())))
}

/// Reads a share, such as `0.3pct` or `0.003rel`.
///
/// # Errors
/// A message that repeats the text and lists the accepted units; also for a negative share.
pub fn parse_share(text: &str) -> Result<f64, String> {
    match with_unit(text.trim(), RELATIVE)? {
        share if share < 0.0 => Err(format!("{} is negative", shown(text.as_bytes()))),
        share => Ok(share),
    }
}

/// Reads a molar mass, such as `44.01g_mol`, in kg/mol.
///
/// # Errors
/// A message that repeats the text and lists the accepted units.
pub fn parse_molar_mass(text: &str) -> Result<f64, String> {
    with_unit(text.trim(), MOLAR_MASS)
}

/// Reads reference conditions: a temperature and an absolute pressure with a comma between, in either order.
///
/// * `text`: such as `0C,101.325kPa`
///
/// # Errors
/// A message that repeats the text and says what was expected.
///
/// ```
/// use evenbore_bench::input::written::parse_reference_conditions;
/// let normal = parse_reference_conditions("0C,101.325kPa")?;
/// assert_eq!((normal.temperature, normal.pressure), (273.15, 101_325.0));
/// # Ok::<(), String>(())
/// ```
pub fn parse_reference_conditions(text: &str) -> Result<ReferenceConditions, String> {
    let parts: Vec<&str> = text.split(',').collect();
    let &[first, second] = parts.as_slice() else {
        return Err(format!(
            "{} is not a temperature and a pressure with one comma between, such as 0C,101.325kPa",
            shown(text.as_bytes())
        ));
    };
    pair(first, second).or_else(|fault| pair(second, first).map_err(|_| fault))
}

/// Finds the unit chosen for volume flow.
///
/// * `name`: such as `L_min`; `L/min` is understood as well
///
/// # Errors
/// A message that lists the accepted units.
pub fn parse_flow_unit(name: &str) -> Result<Unit, String> {
    let plain = name.trim().replace('/', "_");
    let found = VOLUME_FLOW.iter().copied().find(|unit| unit.name() == plain);
    found.ok_or_else(|| unknown_unit(&plain, VOLUME_FLOW))
}

/// Takes the first text as a temperature and the second as a pressure.
fn pair(temperature: &str, pressure: &str) -> Result<ReferenceConditions, String> {
    Ok(ReferenceConditions {
        temperature: parse_quantity(temperature, Quantity::ReferenceTemperature)?,
        pressure: parse_quantity(pressure, Quantity::ReferencePressure)?,
    })
}

/// Value that a quantity must exceed to exist, in SI.
fn floor(quantity: Quantity) -> Option<f64> {
    match quantity {
        Quantity::Temperature
        | Quantity::ReferenceTemperature
        | Quantity::LinePressure
        | Quantity::ReferencePressure
        | Quantity::BarometricPressure => Some(0.0),
        _ => None,
    }
}

/// Splits a text into number and unit and converts to SI.
fn with_unit(text: &str, units: &[Unit]) -> Result<f64, String> {
    converted(text, units, Unit::to_si)
}

/// Splits a text into number and unit and converts it by `to_si`.
fn converted(text: &str, units: &[Unit], to_si: fn(&Unit, f64) -> f64) -> Result<f64, String> {
    let plain = text.replace('/', "_");
    let fits = |unit: &Unit| {
        let digits = plain.strip_suffix(unit.name())?;
        number(digits.as_bytes()).ok().map(|value| to_si(unit, value))
    };
    units.iter().find_map(fits).filter(|value| value.is_finite()).ok_or_else(|| refusal(&plain, units))
}

/// Message for a text that is no number with an accepted unit.
fn refusal(text: &str, units: &[Unit]) -> String {
    let unit = text.trim_start_matches(|c: char| c.is_ascii_digit() || "+-.,eE ".contains(c));
    let digits = &text[..text.len() - unit.len()];
    match number(digits.as_bytes()) {
        Err(fault) if !digits.is_empty() => fault,
        _ if digits.is_empty() => {
            format!("{} is not a number followed by its unit: accepted are {}", shown(text.as_bytes()), listed(units))
        }
        _ => unknown_unit(unit, units),
    }
}

/// Message for a unit that is missing or not accepted.
fn unknown_unit(unit: &str, units: &[Unit]) -> String {
    if unit.is_empty() {
        return format!("the unit is missing: accepted are {}", listed(units));
    }
    let hint = meant(unit, units).map_or_else(String::new, |name| format!("; did you mean {name}?"));
    format!("{} is not an accepted unit: accepted are {}{hint}", shown(unit.as_bytes()), listed(units))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn faults_are_named() {
        for (text, quantity, expected) in [
            ("25degC", Quantity::Temperature, "did you mean C?"),
            ("25,5C", Quantity::Temperature, "Write 25.5"),
            ("-300C", Quantity::Temperature, "absolute zero"),
            ("kPa", Quantity::LinePressure, "\"kPa\" is not a number followed by its unit"),
            ("", Quantity::LinePressure, "Pa, hPa"),
            ("infK", Quantity::Temperature, "\"infK\""),
        ] {
            let message = parse_quantity(text, quantity).unwrap_err();
            assert!(message.contains(expected), "{message}");
        }
    }

    #[test]
    fn conditions_in_either_order() {
        assert_eq!(parse_reference_conditions("1bar,70F"), parse_reference_conditions("70F,100kPa"));
        assert!(parse_reference_conditions("0C").is_err());
        assert!(parse_reference_conditions("0C,20C").is_err());
    }

    #[test]
    fn flow_units() {
        assert_eq!(parse_flow_unit("L/min").map(|unit| unit.name()), Ok("L_min"));
        assert!(parse_flow_unit("slpm").is_err());
    }
}
