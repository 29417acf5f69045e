//! The quantities of bench files and the units each may be written in.
//!
//! Factors are exact by definition: the standard atmosphere is not used, `inH2O` and `mmH2O` are the conventional ones
//! (water of 1000 kg/m3 under 9.80665 m/s2), and `psi` is the pound-force on a square inch.

/// A unit and its conversion to SI: `si = (value + shift) * times / over`.
///
/// Two factors instead of one keep exact what is exact in decimals: 50 pct is 0.5 and 1 L/min is 1/60000 m3/s.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    name: &'static str,
    shift: f64,
    times: f64,
    over: f64,
}

impl Unit {
    /// A unit proportional to the SI unit.
    const fn of(name: &'static str, times: f64, over: f64) -> Self {
        Self { name, shift: 0.0, times, over }
    }

    /// A temperature scale with its own zero.
    const fn scale(name: &'static str, shift: f64, times: f64, over: f64) -> Self {
        Self { name, shift, times, over }
    }

    /// Name as in a header, such as `kPa`.
    pub const fn name(&self) -> &'static str {
        self.name
    }

    /// Converts a value to SI.
    ///
    /// * `value`: in this unit
    pub fn to_si(&self, value: f64) -> f64 {
        (value + self.shift) * self.times / self.over
    }

    /// Converts a value from SI.
    ///
    /// * `si`: in the SI unit of the quantity
    pub fn from_si(&self, si: f64) -> f64 {
        si * self.over / self.times - self.shift
    }

    /// Converts a difference, such as a standard uncertainty, to SI; a temperature scale's zero does not matter.
    ///
    /// * `difference`: in this unit
    pub fn interval_to_si(&self, difference: f64) -> f64 {
        difference * self.times / self.over
    }
}

/// Relative units, accepted for every standard uncertainty.
pub const RELATIVE: &[Unit] = &[Unit::of("rel", 1.0, 1.0), Unit::of("pct", 1.0, 100.0)];
/// Units of actual and standard volume flow, to m3/s.
pub const VOLUME_FLOW: &[Unit] = &[
    Unit::of("m3_s", 1.0, 1.0),
    Unit::of("m3_h", 1.0, 3600.0),
    Unit::of("L_s", 1.0, 1e3),
    Unit::of("L_min", 1.0, 60e3),
    Unit::of("mL_min", 1.0, 60e6),
];
/// Units of mass flow, to kg/s.
pub const MASS_FLOW: &[Unit] = &[
    Unit::of("kg_s", 1.0, 1.0),
    Unit::of("kg_h", 1.0, 3600.0),
    Unit::of("g_s", 1.0, 1e3),
    Unit::of("g_min", 1.0, 60e3),
    Unit::of("mg_min", 1.0, 60e6),
];
/// Units of molar mass, to kg/mol.
pub const MOLAR_MASS: &[Unit] = &[Unit::of("kg_mol", 1.0, 1.0), Unit::of("g_mol", 1.0, 1e3)];
const TIME: &[Unit] = &[Unit::of("s", 1.0, 1.0), Unit::of("ms", 1.0, 1e3)];
const PRESSURE: &[Unit] = &[
    Unit::of("Pa", 1.0, 1.0),
    Unit::of("hPa", 100.0, 1.0),
    Unit::of("kPa", 1e3, 1.0),
    Unit::of("bar", 1e5, 1.0),
    Unit::of("mbar", 100.0, 1.0),
    Unit::of("inH2O", 249.08891, 1.0),
    Unit::of("mmH2O", 9.80665, 1.0),
    // The pound-force in newtons over the square inch in square metres.
    Unit::of("psi", 4.4482216152605, 0.00064516),
];
const TEMPERATURE: &[Unit] =
    &[Unit::scale("C", 273.15, 1.0, 1.0), Unit::scale("K", 0.0, 1.0, 1.0), Unit::scale("F", 459.67, 5.0, 9.0)];
const HUMIDITY: &[Unit] = &[Unit::of("pct", 1.0, 100.0), Unit::of("rel", 1.0, 1.0)];

/// A quantity that a column of a bench file may hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Quantity {
    /// Time of the reading, s.
    Time,
    /// Pressure drop over the element, positive for forward flow, Pa.
    PressureDrop,
    /// Absolute pressure at the upstream port, Pa.
    LinePressure,
    /// Absolute pressure at which the reference flow is stated, Pa.
    ReferencePressure,
    /// Pressure at the upstream port above that of the surrounding air, Pa.
    LineGaugePressure,
    /// Absolute pressure of the surrounding air, Pa.
    BarometricPressure,
    /// Temperature of the element, K.
    Temperature,
    /// Temperature at which the reference flow is stated, K.
    ReferenceTemperature,
    /// Relative humidity of the air at the element's inlet, 0 to 1.
    RelativeHumidity,
    /// Actual volume flow of the reference, m3/s.
    ReferenceFlow,
    /// Mass flow of the reference, kg/s.
    ReferenceMassFlow,
}

impl Quantity {
    /// All quantities.
    pub const ALL: [Self; 11] = [
        Self::Time,
        Self::PressureDrop,
        Self::LinePressure,
        Self::ReferencePressure,
        Self::LineGaugePressure,
        Self::BarometricPressure,
        Self::Temperature,
        Self::ReferenceTemperature,
        Self::RelativeHumidity,
        Self::ReferenceFlow,
        Self::ReferenceMassFlow,
    ];

    /// Name as in a header, before the unit.
    pub const fn name(self) -> &'static str {
        match self {
            Self::Time => "time",
            Self::PressureDrop => "pressure_drop",
            Self::LinePressure => "line_pressure",
            Self::ReferencePressure => "reference_pressure",
            Self::LineGaugePressure => "line_gauge_pressure",
            Self::BarometricPressure => "barometric_pressure",
            Self::Temperature => "temperature",
            Self::ReferenceTemperature => "reference_temperature",
            Self::RelativeHumidity => "relative_humidity",
            Self::ReferenceFlow => "reference_flow",
            Self::ReferenceMassFlow => "reference_mass_flow",
        }
    }

    /// Units the quantity may be written in.
    pub const fn units(self) -> &'static [Unit] {
        match self {
            Self::Time => TIME,
            Self::PressureDrop
            | Self::LinePressure
            | Self::ReferencePressure
            | Self::LineGaugePressure
            | Self::BarometricPressure => PRESSURE,
            Self::Temperature | Self::ReferenceTemperature => TEMPERATURE,
            Self::RelativeHumidity => HUMIDITY,
            Self::ReferenceFlow => VOLUME_FLOW,
            Self::ReferenceMassFlow => MASS_FLOW,
        }
    }
}

/// Unit in which mass flow is reported beside a volume flow: `kg_s` beside `m3_s`, else `g_min`.
///
/// * `volume`: the unit chosen for volume flow
pub fn mass_unit_beside(volume: Unit) -> Unit {
    if volume.name == "m3_s" { MASS_FLOW[0] } else { MASS_FLOW[3] }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn si(quantity: Quantity, unit: &str, value: f64) -> f64 {
        quantity.units().iter().find(|u| u.name == unit).map_or(f64::NAN, |u| u.to_si(value))
    }

    #[test]
    fn exact_conversions() {
        assert_eq!(si(Quantity::RelativeHumidity, "pct", 35.0), 0.35);
        assert_eq!(si(Quantity::ReferenceFlow, "L_min", 60.0), 1e-3);
        assert_eq!(si(Quantity::ReferenceMassFlow, "mg_min", 60.0), 1e-6);
        assert_eq!(si(Quantity::Temperature, "C", 20.0), 293.15);
        assert_eq!(si(Quantity::Temperature, "F", 32.0), 273.15);
        assert_eq!(si(Quantity::LinePressure, "kPa", 101.325), 101_325.0);
        assert_eq!(si(Quantity::LinePressure, "mbar", 1013.25), 101_325.0);
        assert!((si(Quantity::LinePressure, "psi", 1.0) / 6_894.757_293_168_361 - 1.0).abs() < 1e-15);
    }

    #[test]
    fn every_unit_returns_what_it_took() {
        for unit in Quantity::ALL.iter().flat_map(|quantity| quantity.units()) {
            assert!((unit.from_si(unit.to_si(12.5)) - 12.5).abs() < 1e-12, "{}", unit.name);
        }
    }
}
