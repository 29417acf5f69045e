//! Reference conditions: the state at which a volume flow is quoted so that it means an amount of gas.

use crate::error::{Error, within};
use crate::quantity::{AbsolutePressure, Temperature};

/// A temperature and an absolute pressure, dry gas.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct ReferenceConditions {
    pub(crate) temperature: Temperature,
    pub(crate) pressure: AbsolutePressure,
}

impl ReferenceConditions {
    /// 0 C, 101.325 kPa: DIN 1343, the physical normal state.
    pub const DIN_1343: Self = Self::fixed(273.15, 101_325.0);
    /// 15 C, 101.325 kPa: ISO 13443 (natural gas) and ISO 2533 (standard atmosphere at sea level).
    pub const ISO_13443: Self = Self::fixed(288.15, 101_325.0);
    /// 20 C, 101.325 kPa: GOST 2939 (from memory).
    pub const GOST_2939: Self = Self::fixed(293.15, 101_325.0);
    /// 20 C, 100 kPa: ISO 1217 (from memory).
    pub const ISO_1217: Self = Self::fixed(293.15, 100_000.0);
    /// 25 C, 100 kPa: IUPAC standard ambient state (from memory).
    pub const IUPAC_AMBIENT: Self = Self::fixed(298.15, 100_000.0);

    const fn fixed(kelvin: f32, pascals: f32) -> Self {
        Self { temperature: Temperature::from_kelvin(kelvin), pressure: AbsolutePressure::from_pascals(pascals) }
    }

    /// Conditions of the user's own.
    ///
    /// # Errors
    /// Names the value outside 200..400 K or 10 kPa..1 MPa.
    ///
    /// ```
    /// use evenbore::quantity::{AbsolutePressure, Temperature};
    /// use evenbore::reference::ReferenceConditions;
    /// let own = ReferenceConditions::new(Temperature::from_celsius(21.1), AbsolutePressure::from_bars(1.0))?;
    /// assert_eq!(own.pressure().as_pascals(), 100_000.0);
    /// # Ok::<(), evenbore::error::Error>(())
    /// ```
    pub fn new(temperature: Temperature, pressure: AbsolutePressure) -> Result<Self, Error> {
        within("reference temperature (K)", temperature.as_kelvin(), 200.0, 400.0)?;
        within("reference pressure (Pa)", pressure.as_pascals(), 1e4, 1e6)?;
        Ok(Self { temperature, pressure })
    }

    /// The temperature.
    pub const fn temperature(&self) -> Temperature {
        self.temperature
    }

    /// The absolute pressure.
    pub const fn pressure(&self) -> AbsolutePressure {
        self.pressure
    }
}

impl Default for ReferenceConditions {
    /// [`ReferenceConditions::DIN_1343`].
    fn default() -> Self {
        Self::DIN_1343
    }
}
