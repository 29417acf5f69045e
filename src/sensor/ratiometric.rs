//! Ratiometric inputs: a signal read against the very supply that drives the sensor, so that the supply cancels.

use super::fault::Fault;
use super::levels::Levels;
use super::transfer::Transfer;
use crate::error::Error;
use crate::quantity::Quantity;

/// Signal and supply as one converter read them; only their ratio means something.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct RawRatio {
    /// Counts of the signal.
    pub signal: i32,
    /// Counts of the supply, or of the converter's full scale where the supply is its reference.
    pub supply: i32,
}

impl RawRatio {
    /// The share of the supply, to 2e-7; [`Fault::Invalid`] without a supply.
    pub(crate) fn share(self) -> Result<f32, Fault> {
        if self.supply <= 0 { Err(Fault::Invalid) } else { Ok(self.signal as f32 / self.supply as f32) }
    }
}

/// A ratiometric sensor: its quantity is linear in its share of the supply.
///
/// ```
/// use evenbore::quantity::AbsolutePressure;
/// use evenbore::sensor::{Fault, Ratiometric, ratiometric::RawRatio};
/// let at = |share, kilopascals| (share, AbsolutePressure::from_kilopascals(kilopascals));
/// let sensor = Ratiometric::new(at(0.1, 0.0), at(0.9, 700.0))?;
/// let pressure = sensor.read(RawRatio { signal: 2048, supply: 4096 })?;
/// assert!((pressure.as_kilopascals() - 350.0).abs() < 1e-3);
/// assert_eq!(sensor.read(RawRatio { signal: 0, supply: 4096 }), Err(Fault::Open));
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Ratiometric<Q> {
    transfer: Transfer<Q>,
    levels: Levels,
}

impl<Q: Quantity> Ratiometric<Q> {
    /// A sensor that gives the share `low.0` of its supply at the quantity `low.1` and `high.0` at `high.1`.
    ///
    /// Shares from 5 % to 95 % are measurements, below 2.5 % the signal is open (pulled down), above 97.5 % shorted to
    /// the supply (common practice).
    ///
    /// # Errors
    /// Names what the transfer function refuses.
    pub fn new(low: (f32, Q), high: (f32, Q)) -> Result<Self, Error> {
        let levels = Levels::measured(0.05, 0.95)?.with_failure((0.025, Fault::Open), (0.975, Fault::Short))?;
        Ok(Self { transfer: Transfer::new(low, high)?, levels })
    }

    /// The same sensor with levels of its own, in shares of the supply.
    pub fn with_levels(self, levels: Levels) -> Self {
        Self { levels, ..self }
    }

    /// The quantity that a ratio stands for.
    ///
    /// # Errors
    /// The fault that the signal level says; [`Fault::Invalid`] without a supply.
    pub fn read(&self, raw: RawRatio) -> Result<Q, Fault> {
        Ok(self.transfer.apply(self.levels.judge(raw.share()?)?))
    }
}
