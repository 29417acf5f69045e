//! Values that exist but probably stand in the wrong unit.

use crate::input::units::Quantity;

/// Temperatures below this are probably degrees Celsius in a kelvin column, K.
const COLD: f64 = 100.0;
/// Temperatures above this are probably kelvin in a Celsius column, K.
const HOT: f64 = 523.15;
/// Line pressures below this are probably in another unit, Pa.
const NEAR_VACUUM: f64 = 1e3;
/// Line pressures above this are probably in another unit, Pa.
const HIGH_PRESSURE: f64 = 20e6;
/// Barometric pressures outside this are not met where people work, Pa.
const BAROMETER: (f64, f64) = (45e3, 115e3);

/// Says why a value is probably not what its column claims; `None` where it is plausible.
///
/// * `quantity`: of the value
/// * `value`: in SI
///
/// ```
/// use evenbore_bench::input::{plausible::plausibility, units::Quantity};
/// assert!(plausibility(Quantity::Temperature, 20.0).is_some_and(|hint| hint.contains("is this column in C?")));
/// assert_eq!(plausibility(Quantity::Temperature, 293.15), None);
/// ```
pub fn plausibility(quantity: Quantity, value: f64) -> Option<String> {
    match quantity {
        Quantity::Temperature | Quantity::ReferenceTemperature => temperature(value),
        Quantity::LinePressure | Quantity::ReferencePressure => absolute_pressure(value),
        Quantity::BarometricPressure => barometer(value),
        Quantity::RelativeHumidity => humidity(value),
        _ => None,
    }
}

/// Looks at a temperature in K.
fn temperature(value: f64) -> Option<String> {
    if value < COLD {
        return Some(format!("{value} K is below {COLD} K: is this column in C?"));
    }
    let celsius = value - 273.15;
    (value > HOT).then(|| format!("{celsius:.2} C is above {} C: is this column in K?", HOT - 273.15))
}

/// Looks at an absolute pressure in Pa.
fn absolute_pressure(value: f64) -> Option<String> {
    if value < NEAR_VACUUM {
        return Some(format!(
            "{value} Pa is below {NEAR_VACUUM} Pa: is this column in another unit, or gauge pressure?"
        ));
    }
    (value > HIGH_PRESSURE).then(|| format!("{value} Pa is above {HIGH_PRESSURE} Pa: is this column in another unit?"))
}

/// Looks at the pressure of the surrounding air in Pa.
fn barometer(value: f64) -> Option<String> {
    let (low, high) = BAROMETER;
    let outside = !(low..=high).contains(&value);
    outside.then(|| format!("{value} Pa is outside {low} Pa to {high} Pa: is this column in another unit?"))
}

/// Looks at a relative humidity, 0 to 1.
fn humidity(value: f64) -> Option<String> {
    let percent = value * 100.0;
    let outside = !(0.0..=1.0).contains(&value);
    outside.then(|| format!("{percent} pct is outside 0 pct to 100 pct: is this column in pct?"))
}
