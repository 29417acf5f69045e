//! Platinum resistance thermometers by IEC 60751: resistance of a temperature and back, on both sides of 0 C.
//!
//! - 0 to 850 C: `R = R0 (1 + A t + B t^2)`
//! - -200 to 0 C: `R = R0 (1 + A t + B t^2 + C (t - 100) t^3)` (Callendar and Van Dusen; IEC 60751)
//!
//! with t in C on the ITS-90.

use super::fault::Fault;
use crate::error::{Error, within};
use crate::math::Real;
use crate::quantity::{Resistance, Temperature};

/// A in 1/K, B in 1/K^2 and C in 1/K^4 of industrial platinum, IEC 60751:2008.
pub const IEC_60751: [f32; 3] = [3.9083e-3, -5.775e-7, -4.183e-12];

/// Temperatures between which the standard's equations hold, C.
pub const RANGE_C: [f32; 2] = [-200.0, 850.0];

/// A platinum thermometer: a Pt100 with the standard's coefficients unless told otherwise.
///
/// Against the standard's equations in high precision, from -200 to 850 C: resistance within 5e-5 ohm of a Pt100,
/// temperature within 1.5e-4 K, which near 850 C is the last digit of its resistance (asserted in
/// `tests/signal_sensors.rs`; class AA allows 0.1 K at 0 C, from memory).
///
/// ```
/// use evenbore::quantity::{Resistance, Temperature};
/// use evenbore::sensor::{Fault, Pt100};
/// let sensor = Pt100::default();
/// assert!((sensor.temperature(Resistance::from_ohms(138.5055))?.as_celsius() - 100.0).abs() < 2e-4);
/// assert!((sensor.resistance(Temperature::from_celsius(-100.0)).as_ohms() - 60.2558).abs() < 1e-4);
/// assert_eq!(sensor.temperature(Resistance::from_ohms(2.0)), Err(Fault::Short));
/// # Ok::<(), evenbore::sensor::Fault>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Pt100 {
    r0: Resistance,
    coefficients: [f32; 3],
}

impl Pt100 {
    /// A thermometer of resistance `r0` at 0 C: 100 ohm nominally, or what its certificate says; 1000 ohm for a Pt1000.
    ///
    /// # Errors
    /// Names an `r0` outside 10 ohm..10 kohm.
    pub fn new(r0: Resistance) -> Result<Self, Error> {
        Self::with_coefficients(r0, IEC_60751)
    }

    /// A thermometer with A, B and C of its own calibration.
    ///
    /// # Errors
    /// Names an `r0` outside 10 ohm..10 kohm, and a coefficient no platinum wire has.
    pub fn with_coefficients(r0: Resistance, coefficients: [f32; 3]) -> Result<Self, Error> {
        let [a, b, c] = coefficients;
        within("R0 (ohm)", r0.as_ohms(), 10.0, 1e4)?;
        within("A of platinum (1/K)", a, 3.7e-3, 4.1e-3)?;
        within("B of platinum (1/K2)", b, -7e-7, -5e-7)?;
        within("C of platinum (1/K4)", c, -6e-12, 0.0)?;
        Ok(Self { r0, coefficients })
    }

    /// Resistance at a temperature, by the standard's equations; they are extended beyond their range.
    pub fn resistance(&self, temperature: Temperature) -> Resistance {
        let t = temperature.as_kelvin() - 273.15;
        Resistance::from_ohms(self.r0.as_ohms() * (1.0 + self.excess(t)))
    }

    /// Temperature of a resistance.
    ///
    /// From 0 C up the closed form `t = 2 w/(A + sqrt(A^2 + 4 B w))` with `w = R/R0 - 1`, which is the root of the
    /// standard's quadratic written without cancellation. Below 0 C two Newton steps from there: at -200 C it is off by
    /// 2.4 K before the first, 2.5 mK after it and less than 1e-8 K after the second.
    ///
    /// # Errors
    /// [`Fault::Short`] below the resistance at -200 C, [`Fault::Open`] above that at 850 C, [`Fault::Invalid`] when
    /// it is not finite.
    pub fn temperature(&self, resistance: Resistance) -> Result<Temperature, Fault> {
        let [a, b, _] = self.coefficients;
        let w = (resistance.as_ohms() - self.r0.as_ohms()) / self.r0.as_ohms();
        let [coldest, hottest] = RANGE_C.map(|t| self.excess(t));
        if !w.is_finite() {
            return Err(Fault::Invalid);
        }
        if w < coldest - ROUNDING {
            return Err(Fault::Short);
        }
        if w > hottest + ROUNDING {
            return Err(Fault::Open);
        }
        let t = 2.0 * w / (a + (a * a + 4.0 * b * w).root());
        let t = if w < 0.0 { self.newton(self.newton(t, w), w) } else { t };
        Ok(Temperature::from_celsius(t))
    }

    /// `R/R0 - 1` at `t` (C).
    fn excess(&self, t: f32) -> f32 {
        let [a, b, c] = self.coefficients;
        let c = if t < 0.0 { c } else { 0.0 };
        t * (a + t * (b + t * (t - 100.0) * c))
    }

    /// One Newton step below 0 C towards the `t` (C) at which `R/R0 - 1` is `w`.
    fn newton(&self, t: f32, w: f32) -> f32 {
        let [a, b, c] = self.coefficients;
        let slope = a + t * (2.0 * b + t * (4.0 * t - 300.0) * c);
        t + (w - self.excess(t)) / slope
    }
}

/// What rounding may add to `R/R0` at the ends of the range.
const ROUNDING: f32 = 1e-6;

impl Default for Pt100 {
    /// 100 ohm at 0 C, coefficients of IEC 60751.
    fn default() -> Self {
        Self { r0: Resistance::from_ohms(100.0), coefficients: IEC_60751 }
    }
}
