//! The state at which a question is asked, as the law and the instrument take it.

use evenbore::double::Conditions;
use evenbore::fluid::StoredFluid;
use evenbore::quantity::{AbsolutePressure, PressureDrop, RelativeHumidity, Temperature};
use evenbore::status::Refusal;
use evenbore::{Element, Reading};

/// Temperature, line pressure and, for air, humidity.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct State {
    /// Temperature of the element, K.
    pub temperature: f64,
    /// Absolute pressure at the upstream port, Pa.
    pub line_pressure: f64,
    /// Relative humidity of the air at the inlet, 0 to 1.
    pub humidity: Option<f64>,
}

impl State {
    /// A dry state.
    pub const fn dry(temperature: f64, line_pressure: f64) -> Self {
        Self { temperature, line_pressure, humidity: None }
    }

    /// What the instrument reads at a pressure drop (Pa).
    pub fn reading(&self, drop: f64) -> Reading {
        let reading = Reading::new(
            PressureDrop::from_pascals(drop as f32),
            Temperature::from_kelvin(self.temperature as f32),
            AbsolutePressure::from_pascals(self.line_pressure as f32),
        );
        match self.humidity {
            Some(fraction) => reading.with_relative_humidity(RelativeHumidity::from_fraction(fraction as f32)),
            None => reading,
        }
    }

    /// The law for an element and a fluid at this state, in double precision.
    ///
    /// # Errors
    /// Refuses a state outside the fluid's table, and a humidity that cannot be.
    pub fn law(&self, element: &Element, fluid: &StoredFluid) -> Result<Conditions, Refusal> {
        Conditions::new(element, fluid, self.temperature, self.line_pressure, self.humidity)
    }

    /// Why a fluid cannot serve this state, with values and limits.
    ///
    /// ```
    /// use evenbore::{fluid::catalogue::WATER, status::Refusal};
    /// use evenbore_bench::planning::state::State;
    /// let frozen = State::dry(253.15, 101_325.0);
    /// let words = frozen.refused(WATER.fluid(), Refusal::TEMPERATURE_OUTSIDE_TABLE);
    /// assert!(words.contains("-20.00 C") && words.contains("water is stored for"), "{words}");
    /// ```
    pub fn refused(&self, fluid: &StoredFluid, refusal: Refusal) -> String {
        let [t_low, t_high] = fluid.temperature_range().map(Temperature::as_celsius);
        let [p_low, p_high] = fluid.pressure_range().map(AbsolutePressure::as_kilopascals);
        let humidity = self.humidity.map_or_else(String::new, |h| format!(", relative humidity {:.1} %", 100.0 * h));
        format!(
            "{refusal}: temperature {:.2} C, line pressure {:.3} kPa{humidity}; {} is stored for {t_low:.2} to \
             {t_high:.2} C and {p_low} to {p_high} kPa absolute",
            self.temperature - 273.15,
            self.line_pressure / 1e3,
            fluid.name()
        )
    }
}
