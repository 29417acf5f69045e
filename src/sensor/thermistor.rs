//! Thermistors (NTC) by the equation of Steinhart and Hart.

use super::fault::Fault;
use crate::error::{Error, within};
use crate::math::{self, ln};
use crate::quantity::{Resistance, Temperature};

/// A thermistor, `1/T = a + b ln R + c (ln R)^3` with T in K and R in ohm (Steinhart and Hart, 1968).
///
/// The equation follows a thermistor to about 0.01 K over 100 K between its points (Steinhart and Hart, from memory);
/// its arithmetic here is within 5e-5 K of double precision (asserted in `tests/signal_sensors.rs`).
///
/// ```
/// use evenbore::quantity::{Resistance, Temperature};
/// use evenbore::sensor::{Fault, Thermistor};
/// let at = |ohms, celsius| (Resistance::from_ohms(ohms), Temperature::from_celsius(celsius));
/// let sensor = Thermistor::from_points([at(32_650.0, 0.0), at(10_000.0, 25.0), at(1_751.6, 70.0)])?;
/// assert!((sensor.temperature(Resistance::from_ohms(10_000.0))?.as_celsius() - 25.0).abs() < 1e-4);
/// assert_eq!(sensor.temperature(Resistance::from_ohms(1e7)), Err(Fault::Open));
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Thermistor {
    coefficients: [f32; 3],
    range: [f32; 2],
}

/// How far beyond its outermost points, in resistance, the equation of three points is used.
const REACH: f32 = 3.0;

impl Thermistor {
    /// A thermistor of known coefficients a (1/K), b (1/K), c (1/K), used between two resistances.
    ///
    /// # Errors
    /// Names a resistance outside 0.1 ohm..100 Mohm, the larger one when it is not above the smaller, and the
    /// temperature or slope at either of them when it is not that of a thermistor (150 to 650 K, falling).
    pub fn new(coefficients: [f32; 3], least: Resistance, most: Resistance) -> Result<Self, Error> {
        let range = [least.as_ohms(), most.as_ohms()];
        within("smallest resistance (ohm)", least.as_ohms(), 0.1, 1e8)?;
        within("largest resistance (ohm)", most.as_ohms(), least.as_ohms().next_up(), 1e8)?;
        let [_, b, c] = coefficients;
        let thermistor = Self { coefficients, range };
        for ohms in range {
            let l = math::logarithm(ohms);
            within("temperature at the ends (K)", thermistor.kelvin(ohms), 150.0, 650.0)?;
            within("b of the thermistor (1/K)", b, 1e-6, 1e-2)?;
            within("slope of 1/T in ln R (1/K)", b + 3.0 * c * l * l, 1e-6, 1e-1)?;
        }
        Ok(thermistor)
    }

    /// A thermistor through three points, in any order, used to three times beyond them in resistance.
    ///
    /// Solved in double precision by divided differences in `L = ln R`: with `g(i, j) = (1/Ti - 1/Tj)/(Li - Lj)`,
    /// `c = (g(3,1) - g(2,1))/((L3 - L2)(L1 + L2 + L3))`, `b = g(2,1) - c (L1^2 + L1 L2 + L2^2)`,
    /// `a = 1/T1 - L1 (b + c L1^2)`.
    ///
    /// # Errors
    /// Names what does not describe a thermistor; two equal points are one.
    pub fn from_points(points: [(Resistance, Temperature); 3]) -> Result<Self, Error> {
        let [l1, l2, l3] = points.map(|(r, _)| ln(f64::from(r.as_ohms())));
        let [y1, y2, y3] = points.map(|(_, t)| 1.0 / f64::from(t.as_kelvin()));
        let (g2, g3) = ((y2 - y1) / (l2 - l1), (y3 - y1) / (l3 - l1));
        let c = (g3 - g2) / ((l3 - l2) * (l1 + l2 + l3));
        let b = g2 - c * (l1 * l1 + l1 * l2 + l2 * l2);
        let a = y1 - l1 * (b + c * l1 * l1);
        let coefficients = [a as f32, b as f32, c as f32];
        for coefficient in coefficients {
            within("coefficient of the thermistor (1/K)", coefficient, -0.1, 0.1)?;
        }
        let ohms = points.map(|(r, _)| r.as_ohms());
        let least = ohms.into_iter().fold(f32::INFINITY, f32::min) / REACH;
        let most = ohms.into_iter().fold(0.0, f32::max) * REACH;
        Self::new(coefficients, Resistance::from_ohms(least), Resistance::from_ohms(most))
    }

    /// Temperature of a resistance.
    ///
    /// # Errors
    /// [`Fault::Short`] and [`Fault::Open`] below and above the range, [`Fault::Invalid`] when it is not finite.
    pub fn temperature(&self, resistance: Resistance) -> Result<Temperature, Fault> {
        let ohms = resistance.as_ohms();
        let [least, most] = self.range;
        if !ohms.is_finite() {
            Err(Fault::Invalid)
        } else if ohms < least {
            Err(Fault::Short)
        } else if ohms > most {
            Err(Fault::Open)
        } else {
            Ok(Temperature::from_kelvin(self.kelvin(ohms)))
        }
    }

    fn kelvin(&self, ohms: f32) -> f32 {
        let [a, b, c] = self.coefficients;
        let l = math::logarithm(ohms);
        1.0 / (a + l * (b + c * l * l))
    }
}
