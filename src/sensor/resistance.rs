//! Resistances: a resistor read against a known one that carries the same current.

use super::fault::Fault;
use super::ratiometric::RawRatio;
use crate::error::{Error, within};
use crate::quantity::Resistance;

/// How the unknown resistor and the known one are connected.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Circuit {
    /// The voltage over the sensor against that over the reference: `R = Rref f`.
    Series,
    /// The voltage over the sensor against that over both: `R = Rref f/(1 - f)`.
    Divider,
}

/// An input that reads a resistance against a reference resistor.
///
/// ```
/// use evenbore::quantity::Resistance;
/// use evenbore::sensor::{Fault, ratiometric::RawRatio, resistance::ResistanceInput};
/// let pull_up = ResistanceInput::divider(Resistance::from_kilohms(10.0))?;
/// let half = RawRatio { signal: 2048, supply: 4096 };
/// assert_eq!(pull_up.read(half)?.as_kilohms(), 10.0);
/// assert_eq!(pull_up.read(RawRatio { signal: 4096, supply: 4096 }), Err(Fault::Open));
/// assert_eq!(pull_up.read(RawRatio { signal: 0, supply: 4096 }), Err(Fault::Short));
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ResistanceInput {
    circuit: Circuit,
    reference: Resistance,
}

impl ResistanceInput {
    /// Sensor and reference resistor carry one current; the ratio is the sensor's voltage over the reference's.
    ///
    /// # Errors
    /// Names a reference outside 1 ohm..10 Mohm.
    pub fn series(reference: Resistance) -> Result<Self, Error> {
        Self::new(Circuit::Series, reference)
    }

    /// The sensor stands between the signal and ground, the reference between the signal and the supply.
    ///
    /// # Errors
    /// Names a reference outside 1 ohm..10 Mohm.
    pub fn divider(reference: Resistance) -> Result<Self, Error> {
        Self::new(Circuit::Divider, reference)
    }

    fn new(circuit: Circuit, reference: Resistance) -> Result<Self, Error> {
        within("reference resistor (ohm)", reference.as_ohms(), 1.0, 1e7)?;
        Ok(Self { circuit, reference })
    }

    /// The resistance that a ratio stands for.
    ///
    /// # Errors
    /// [`Fault::Short`] at or below 0.1 % of the reference's voltage or of the supply; [`Fault::Open`] at or above
    /// 99.9 % of the supply (divider), at 1000 times the reference, or where no current flows (series);
    /// [`Fault::Invalid`] without a supply (divider).
    pub fn read(&self, raw: RawRatio) -> Result<Resistance, Fault> {
        if self.circuit == Circuit::Series && raw.supply <= 0 {
            return Err(Fault::Open);
        }
        let share = raw.share()?;
        let (open, scale) = match self.circuit {
            Circuit::Series => (1000.0, share),
            Circuit::Divider => (0.999, share / (1.0 - share)),
        };
        if share <= 0.001 {
            Err(Fault::Short)
        } else if share >= open {
            Err(Fault::Open)
        } else {
            Ok(Resistance::from_ohms(self.reference.as_ohms() * scale))
        }
    }
}
