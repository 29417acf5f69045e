//! The units a parameter may carry. Everything inside is SI; a number without a unit is SI too.
//!
//! A suffix is a unit, perhaps after one of the multipliers of IEEE 488.2 (7.7.3): `EX PE T G MA K M U N P F A`, where
//! `M` is a thousandth and `MA` a million. `HPA` has a row of its own because hecto is none of them.

use super::decimal::Decimal;
use super::error::LinkError;
use crate::quantity::{Length, MassFlow, PressureDrop, Temperature, VolumeFlow};

/// Most characters of a suffix.
const MOST_CHARACTERS: usize = 12;

/// A unit: its suffix in capitals, whether multipliers may stand before it, and the way to SI.
#[derive(Clone, Copy)]
pub struct Unit {
    name: &'static str,
    multiplied: bool,
    to_si: fn(f32) -> f32,
}

impl Unit {
    /// A unit that stands alone.
    pub const fn new(name: &'static str, to_si: fn(f32) -> f32) -> Self {
        Self { name, multiplied: false, to_si }
    }

    /// A unit that may carry a multiplier.
    pub const fn multiplied(name: &'static str, to_si: fn(f32) -> f32) -> Self {
        Self { name, multiplied: true, to_si }
    }

    /// The power of ten before this unit in `suffix`; `None` when `suffix` is another unit.
    fn power(&self, suffix: &[u8]) -> Option<i32> {
        let at = suffix.len().checked_sub(self.name.len())?;
        let (multiplier, name) = (suffix.get(..at)?, suffix.get(at..)?);
        if !name.eq_ignore_ascii_case(self.name.as_bytes()) {
            return None;
        }
        if multiplier.is_empty() {
            return Some(0);
        }
        let row = MULTIPLIERS.iter().find(|row| multiplier.eq_ignore_ascii_case(row.0.as_bytes()));
        row.filter(|_| self.multiplied).map(|row| i32::from(row.1))
    }
}

impl core::fmt::Debug for Unit {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        write!(f, "Unit({})", self.name)
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for Unit {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Unit({=str})", self.name);
    }
}

const MULTIPLIERS: [(&str, i8); 12] = [
    ("EX", 18),
    ("PE", 15),
    ("T", 12),
    ("G", 9),
    ("MA", 6),
    ("K", 3),
    ("M", -3),
    ("U", -6),
    ("N", -9),
    ("P", -12),
    ("F", -15),
    ("A", -18),
];

/// A number without unit.
pub const NO_UNIT: &[Unit] = &[];

/// Pressure, Pa.
pub const PRESSURE: &[Unit] = &[
    Unit::multiplied("PA", |v| v),
    Unit::new("HPA", |v| PressureDrop::from_millibars(v).as_pascals()),
    Unit::multiplied("BAR", |v| PressureDrop::from_millibars(v * 1e3).as_pascals()),
    Unit::new("INH2O", |v| PressureDrop::from_inches_of_water(v).as_pascals()),
    Unit::new("MMH2O", |v| PressureDrop::from_millimetres_of_water(v).as_pascals()),
    Unit::new("PSI", |v| PressureDrop::from_psi(v).as_pascals()),
];

/// Temperature, K; degrees Celsius and Fahrenheit by the standard's names CEL and FAR.
pub const TEMPERATURE: &[Unit] = &[
    Unit::multiplied("K", |v| v),
    Unit::new("CEL", |v| Temperature::from_celsius(v).as_kelvin()),
    Unit::new("FAR", |v| Temperature::from_fahrenheit(v).as_kelvin()),
];

/// Difference of two temperatures, K.
pub const TEMPERATURE_DIFFERENCE: &[Unit] = &[Unit::multiplied("K", |v| v)];

/// Volume flow, m3/s.
pub const VOLUME_FLOW: &[Unit] = &[
    Unit::new("M3/S", |v| v),
    Unit::new("M3/H", |v| VolumeFlow::from_cubic_metres_per_hour(v).as_cubic_metres_per_second()),
    Unit::new("M3/HR", |v| VolumeFlow::from_cubic_metres_per_hour(v).as_cubic_metres_per_second()),
    Unit::multiplied("L/S", |v| VolumeFlow::from_litres_per_second(v).as_cubic_metres_per_second()),
    Unit::multiplied("L/MIN", |v| VolumeFlow::from_litres_per_minute(v).as_cubic_metres_per_second()),
];

/// Mass flow, kg/s.
pub const MASS_FLOW: &[Unit] = &[
    Unit::multiplied("G/S", |v| MassFlow::from_grams_per_second(v).as_kilograms_per_second()),
    Unit::multiplied("G/MIN", |v| MassFlow::from_grams_per_minute(v).as_kilograms_per_second()),
    Unit::new("KG/H", |v| MassFlow::from_kilograms_per_hour(v).as_kilograms_per_second()),
    Unit::new("KG/HR", |v| MassFlow::from_kilograms_per_hour(v).as_kilograms_per_second()),
];

/// Length, m.
pub const LENGTH: &[Unit] = &[Unit::multiplied("M", |v| Length::from_metres(v).as_metres())];

/// Time, s.
pub const TIME: &[Unit] = &[Unit::multiplied("S", |v| v), Unit::new("MIN", |v| v * 60.0)];

/// A ratio; percent by the standard's name PCT.
pub const RATIO: &[Unit] = &[Unit::new("PCT", |v| v / 100.0)];

/// A number with its suffix, in SI.
///
/// # Errors
/// `SuffixNotAllowed` for a suffix where no unit is due, `InvalidSuffix` for one that is not in `units`.
pub(crate) fn in_si(number: Decimal, suffix: &[u8], units: &[Unit]) -> Result<f32, LinkError> {
    let of_suffix = |b: &u8| b.is_ascii_alphanumeric() || matches!(b, b'/' | b'.' | b'-');
    match suffix {
        [] => return Ok(number.single(0)),
        _ if !suffix.iter().all(of_suffix) => return Err(LinkError::InvalidCharacterInNumber),
        _ if units.is_empty() => return Err(LinkError::SuffixNotAllowed),
        _ if suffix.len() > MOST_CHARACTERS => return Err(LinkError::SuffixTooLong),
        _ => {}
    }
    let found = units.iter().find_map(|unit| Some((unit, unit.power(suffix)?)));
    let (unit, power) = found.ok_or(LinkError::InvalidSuffix)?;
    Ok((unit.to_si)(number.single(power)))
}
