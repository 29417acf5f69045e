//! What the sensors say: one reading, the trims that correct it, and what its parts are uncertain by.

use crate::error::{Error, Limit, all_within};
use crate::quantity::{AbsolutePressure, PressureDrop, RelativeHumidity, Temperature};
use crate::status::Refusal;

/// One reading of the three sensors, and of a fourth for moist air.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Reading {
    /// Pressure drop along the element, upstream minus downstream; negative is reverse flow.
    pub pressure_drop: PressureDrop,
    /// Temperature of the element's wall, which the gas takes over within a few bores.
    pub temperature: Temperature,
    /// Absolute pressure at the port marked upstream, whichever way the flow goes.
    pub line_pressure: AbsolutePressure,
    /// Relative humidity at the element's inlet; only for air.
    pub relative_humidity: Option<RelativeHumidity>,
}

impl Reading {
    /// A reading of a dry gas or a liquid.
    pub const fn new(pressure_drop: PressureDrop, temperature: Temperature, line_pressure: AbsolutePressure) -> Self {
        Self { pressure_drop, temperature, line_pressure, relative_humidity: None }
    }

    /// The same reading with the relative humidity of the air at the inlet.
    pub const fn with_relative_humidity(self, humidity: RelativeHumidity) -> Self {
        Self { relative_humidity: Some(humidity), ..self }
    }

    /// Refuses what cannot be a state: a number that is not finite, an absolute value that is not positive, a humidity
    /// outside 0 to 1, an outlet below vacuum. What the fluid's table cannot serve is refused later, by the fluid.
    ///
    /// # Errors
    /// The reasons, all of them.
    ///
    /// ```
    /// use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
    /// use evenbore::{reading::Reading, status::Refusal};
    /// let broken = Reading::new(
    ///     PressureDrop::from_pascals(f32::NAN),
    ///     Temperature::from_celsius(20.0),
    ///     AbsolutePressure::from_pascals(-3.0),
    /// );
    /// assert_eq!(broken.check(), Err(Refusal::NOT_FINITE | Refusal::NOT_ABSOLUTE));
    /// ```
    pub fn check(&self) -> Result<(), Refusal> {
        let (drop, t, p) =
            (self.pressure_drop.as_pascals(), self.temperature.as_kelvin(), self.line_pressure.as_pascals());
        let humidity = self.relative_humidity.map_or(0.0, RelativeHumidity::as_fraction);
        let mut refusal = Refusal::empty();
        refusal.set(Refusal::NOT_FINITE, !(drop.is_finite() && t.is_finite() && p.is_finite() && humidity.is_finite()));
        refusal.set(Refusal::NOT_ABSOLUTE, t <= 0.0 || p <= 0.0);
        refusal.set(Refusal::OUTLET_VACUUM, p > 0.0 && drop >= p);
        refusal.set(Refusal::HUMIDITY_INVALID, !(0.0..=1.0).contains(&humidity) && humidity.is_finite());
        if refusal.is_empty() { Ok(()) } else { Err(refusal) }
    }
}

/// Corrections of the sensors: `true = (read - zero) gain` for the pressure drop, `true = read - offset` otherwise.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct Trims {
    /// Pressure drop read at no flow, Pa.
    pub pressure_drop_zero_pa: f32,
    /// Gain of the pressure drop, 1 when perfect.
    pub pressure_drop_gain: f32,
    /// Temperature read too high by, K.
    pub temperature_offset_k: f32,
    /// Line pressure read too high by, Pa.
    pub line_pressure_offset_pa: f32,
}

impl Trims {
    /// No correction.
    pub const NONE: Self = Self {
        pressure_drop_zero_pa: 0.0,
        pressure_drop_gain: 1.0,
        temperature_offset_k: 0.0,
        line_pressure_offset_pa: 0.0,
    };

    /// The corrected reading.
    pub fn apply(&self, reading: &Reading) -> Reading {
        let drop = (reading.pressure_drop.as_pascals() - self.pressure_drop_zero_pa) * self.pressure_drop_gain;
        Reading {
            pressure_drop: PressureDrop::from_pascals(drop),
            temperature: Temperature::from_kelvin(reading.temperature.as_kelvin() - self.temperature_offset_k),
            line_pressure: AbsolutePressure::from_pascals(
                reading.line_pressure.as_pascals() - self.line_pressure_offset_pa,
            ),
            relative_humidity: reading.relative_humidity,
        }
    }

    /// Accepts corrections of a size that a sensor worth trimming may need.
    ///
    /// # Errors
    /// Names the trim outside its limits.
    pub fn check(&self) -> Result<(), Error> {
        const LIMITS: [Limit; 4] = [
            ("pressure drop zero (Pa)", -1e5, 1e5),
            ("pressure drop gain", 0.5, 2.0),
            ("temperature offset (K)", -50.0, 50.0),
            ("line pressure offset (Pa)", -1e6, 1e6),
        ];
        all_within(
            &LIMITS,
            [
                self.pressure_drop_zero_pa,
                self.pressure_drop_gain,
                self.temperature_offset_k,
                self.line_pressure_offset_pa,
            ],
        )
    }
}

impl Default for Trims {
    fn default() -> Self {
        Self::NONE
    }
}

/// Standard uncertainties of the sensors at use; absolute and relative parts add in squares.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct SensorUncertainty {
    /// Pressure drop, absolute part (zero, noise), Pa.
    pub pressure_drop_pa: f32,
    /// Pressure drop, part proportional to the reading.
    pub pressure_drop_rel: f32,
    /// Temperature, K.
    pub temperature_k: f32,
    /// Line pressure, absolute part, Pa.
    pub line_pressure_pa: f32,
    /// Line pressure, part proportional to the reading.
    pub line_pressure_rel: f32,
    /// Relative humidity, as a fraction of saturation.
    pub relative_humidity: f32,
}

impl SensorUncertainty {
    /// Sensors of a good instrument, when nothing is stated: 0.2 Pa and 0.1 % of reading, 0.1 K, 0.1 % of line
    /// pressure, 2 % relative humidity (common practice).
    pub const COMMON: Self = Self {
        pressure_drop_pa: 0.2,
        pressure_drop_rel: 0.001,
        temperature_k: 0.1,
        line_pressure_pa: 0.0,
        line_pressure_rel: 0.001,
        relative_humidity: 0.02,
    };

    /// Accepts uncertainties that are not negative and not absurd.
    ///
    /// # Errors
    /// Names the uncertainty outside its limits.
    pub fn check(&self) -> Result<(), Error> {
        const LIMITS: [Limit; 6] = [
            ("u pressure drop (Pa)", 0.0, 1e6),
            ("u pressure drop (rel)", 0.0, 1.0),
            ("u temperature (K)", 0.0, 100.0),
            ("u line pressure (Pa)", 0.0, 1e7),
            ("u line pressure (rel)", 0.0, 1.0),
            ("u relative humidity", 0.0, 1.0),
        ];
        all_within(
            &LIMITS,
            [
                self.pressure_drop_pa,
                self.pressure_drop_rel,
                self.temperature_k,
                self.line_pressure_pa,
                self.line_pressure_rel,
                self.relative_humidity,
            ],
        )
    }
}

impl Default for SensorUncertainty {
    fn default() -> Self {
        Self::COMMON
    }
}
