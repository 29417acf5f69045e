//! Signal levels: where a signal is a measurement, where it is saturated, where it says that a wire is broken.
//!
//! ```text
//! failure low | saturated low | measured ... measured | saturated high | failure high
//! ```

use super::fault::Fault;
use crate::error::{Error, within};

/// Largest magnitude of a signal level.
const MOST: f32 = 1e9;

/// Limits between which a signal is a measurement, and outside which a wire is broken.
///
/// ```
/// use evenbore::sensor::{Fault, levels::Levels};
/// // 0.5 to 4.5 V of a 5 V supply, as shares of it; a pulled-down output falls to zero when its wire breaks.
/// let levels = Levels::measured(0.05, 0.95)?.with_failure((0.025, Fault::Open), (0.975, Fault::Short))?;
/// assert_eq!(levels.judge(0.5), Ok(0.5));
/// assert_eq!(levels.judge(0.04), Err(Fault::SaturatedLow));
/// assert_eq!(levels.judge(0.96), Err(Fault::SaturatedHigh));
/// assert_eq!(levels.judge(0.0), Err(Fault::Open));
/// assert_eq!(levels.judge(1.0), Err(Fault::Short));
/// assert_eq!(levels.judge(f32::NAN), Err(Fault::Invalid));
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Levels {
    measured: [f32; 2],
    failure: [f32; 2],
    means: [Fault; 2],
}

impl Levels {
    /// Signals from `least` to `most` are measurements; what lies outside is saturated.
    ///
    /// # Errors
    /// Names the level that is not finite, or the upper one when it is not above the lower.
    pub fn measured(least: f32, most: f32) -> Result<Self, Error> {
        within("smallest measured signal", least, -MOST, MOST)?;
        within("largest measured signal", most, least.next_up(), MOST)?;
        let means = [Fault::SaturatedLow, Fault::SaturatedHigh];
        Ok(Self { measured: [least, most], failure: [f32::NEG_INFINITY, f32::INFINITY], means })
    }

    /// The same levels, with a signal at or below `low.0` meaning the fault `low.1`, and one at or above `high.0`
    /// meaning `high.1`.
    ///
    /// # Errors
    /// Names the level that is not finite or not outside the measured signals.
    pub fn with_failure(self, low: (f32, Fault), high: (f32, Fault)) -> Result<Self, Error> {
        let [least, most] = self.measured;
        within("low failure level", low.0, -MOST, least.next_down())?;
        within("high failure level", high.0, most.next_up(), MOST)?;
        Ok(Self { failure: [low.0, high.0], means: [low.1, high.1], ..self })
    }

    /// Hands back a signal that is a measurement.
    ///
    /// # Errors
    /// The fault of any other; [`Fault::Invalid`] for a signal that is not finite.
    pub fn judge(&self, signal: f32) -> Result<f32, Fault> {
        let ([least, most], [broken_low, broken_high]) = (self.measured, self.failure);
        let [low_means, high_means] = self.means;
        if !signal.is_finite() {
            Err(Fault::Invalid)
        } else if signal <= broken_low {
            Err(low_means)
        } else if signal >= broken_high {
            Err(high_means)
        } else if signal < least {
            Err(Fault::SaturatedLow)
        } else if signal > most {
            Err(Fault::SaturatedHigh)
        } else {
            Ok(signal)
        }
    }
}
