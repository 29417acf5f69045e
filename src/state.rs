//! Fluid and law together at one temperature, line pressure and humidity, in either precision.

use crate::element::law::{Channels, Prepared};
use crate::fluid::StoredFluid;
use crate::fluid::moist_air::{Moisture, moisture_of};
use crate::fluid::properties::{PropertiesAt, outside};
use crate::math::Real;
use crate::status::Refusal;

/// What flows, and the law for it, at one temperature and line pressure.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub(crate) struct State<F> {
    pub law: Prepared<F>,
    pub moisture: Moisture<F>,
    /// Density at the line pressure, kg/m3.
    pub line_density: F,
    /// Lowest and highest pressure of the fluid's table, Pa.
    pub pressure_range: [F; 2],
    /// Linear thermal expansion of the element, 1/K.
    pub element_expansion: F,
}

impl<F: Real> State<F> {
    /// Prepares the law for `channels` carrying `fluid` at `temperature` (K) and `line_pressure` (Pa).
    ///
    /// # Errors
    /// Refuses a state outside the fluid's table, and a humidity that cannot be or is not of air.
    pub fn new(
        channels: &Channels<F>,
        fluid: &StoredFluid,
        temperature: F,
        line_pressure: F,
        humidity: Option<F>,
    ) -> Result<Self, Refusal> {
        let refusal = outside(fluid, temperature, line_pressure);
        if !refusal.is_empty() {
            return Err(refusal);
        }
        let moisture = moisture_of(fluid, humidity, temperature, line_pressure)?;
        let mut properties = PropertiesAt::new(fluid, temperature);
        if humidity.is_some() {
            properties = moisture.moisten(properties);
        }
        Ok(Self {
            law: Prepared::new(channels, properties, line_pressure),
            moisture,
            line_density: properties.density(line_pressure),
            pressure_range: fluid.pressure_range.map(F::stored),
            element_expansion: channels.thermal_expansion,
        })
    }

    /// Refuses a pressure drop (Pa) whose outlet pressure the fluid's table cannot serve.
    ///
    /// # Errors
    /// Not finite, outlet vacuum, or outside the table.
    pub fn check(&self, drop: F) -> Result<(), Refusal> {
        if !drop.finite() {
            return Err(Refusal::NOT_FINITE);
        }
        let outlet = self.law.line_pressure - drop;
        let [low, high] = self.pressure_range;
        if outlet <= F::of(0.0) {
            Err(Refusal::OUTLET_VACUUM)
        } else if outlet < low || outlet > high {
            Err(Refusal::PRESSURE_OUTSIDE_TABLE)
        } else {
            Ok(())
        }
    }
}
