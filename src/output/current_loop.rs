//! Current loop 4 to 20 mA with the levels of NAMUR NE 43 (common practice / NE 43, from memory).

use crate::error::{Error, within};
use crate::quantity::{Current, Quantity};

/// Currents between which the loop shows a measurement, A: 3.8 to 20.5 mA.
pub const MEASUREMENT: [f32; 2] = [3.8e-3, 20.5e-3];
/// Currents that say failure, A: at most 3.6 mA, at least 21 mA.
pub const FAILURE: [f32; 2] = [3.6e-3, 21.0e-3];

/// Which way the loop goes in a failure.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum FailureLevel {
    /// To 3.6 mA.
    Low,
    /// To 21 mA.
    High,
}

/// A current loop: which value is 4 mA, which is 20 mA, and what a failure looks like.
///
/// `I = 4 mA + 16 mA (v - v4)/(v20 - v4)`, held at 3.8 and 20.5 mA beyond the scale.
///
/// ```
/// use evenbore::output::{CurrentLoop, current_loop::FailureLevel};
/// use evenbore::quantity::VolumeFlow;
/// let litres = VolumeFlow::from_litres_per_minute;
/// let current_loop = CurrentLoop::new(litres(0.0), litres(10.0), FailureLevel::Low)?;
/// let milliamperes = |value| current_loop.current(value).as_milliamperes();
/// assert!((milliamperes(Some(litres(5.0))) - 12.0).abs() < 1e-5);
/// assert!((milliamperes(Some(litres(99.0))) - 20.5).abs() < 1e-5);
/// assert!((milliamperes(None) - 3.6).abs() < 1e-5);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct CurrentLoop<Q> {
    low: Q,
    high: Q,
    failure: FailureLevel,
}

impl<Q: Quantity> CurrentLoop<Q> {
    /// A loop that shows `low` as 4 mA and `high` as 20 mA; `high` may be the smaller.
    ///
    /// # Errors
    /// Names an end that is not finite or beyond 1e9, or a span that is nothing.
    pub fn new(low: Q, high: Q, failure: FailureLevel) -> Result<Self, Error> {
        let v4 = within("value at 4 mA (SI)", low.as_si(), -1e9, 1e9)?;
        let v20 = within("value at 20 mA (SI)", high.as_si(), -1e9, 1e9)?;
        within("span of the current loop (SI)", (v20 - v4).abs(), f32::MIN_POSITIVE, 2e9)?;
        Ok(Self { low, high, failure })
    }

    /// The current for a value, and for none or one that is not a number the failure level.
    pub fn current(&self, value: Option<Q>) -> Current {
        let (v4, v20) = (self.low.as_si(), self.high.as_si());
        let [least, most] = MEASUREMENT;
        let [failed_low, failed_high] = FAILURE;
        Current::from_amperes(match value.map(Q::as_si) {
            Some(v) if !v.is_nan() => (4e-3 + 16e-3 * ((v - v4) / (v20 - v4))).max(least).min(most),
            _ if self.failure == FailureLevel::Low => failed_low,
            _ => failed_high,
        })
    }
}

/// A duty cycle that drives the loop, through a stage that turns duty into current.
///
/// ```
/// use evenbore::{output::current_loop::DutyStage, quantity::Current};
/// let stage = DutyStage::new(Current::from_milliamperes(25.0))?;
/// assert_eq!(stage.duty(Current::from_milliamperes(12.0), 1000), 480);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct DutyStage {
    full: Current,
}

impl DutyStage {
    /// A stage that makes the current `full` of a duty of 100 %.
    ///
    /// # Errors
    /// Names a full current outside 21..100 mA: below 21 mA the loop could not say failure.
    pub fn new(full: Current) -> Result<Self, Error> {
        let [_, failed_high] = FAILURE;
        within("current at full duty (A)", full.as_amperes(), failed_high, 0.1)?;
        Ok(Self { full })
    }

    /// The duty for a current, to the nearest step out of `most`.
    pub fn duty(&self, current: Current, most: u16) -> u16 {
        let share = current.as_amperes() / self.full.as_amperes();
        // A cast from a negative number or NaN gives 0, from one too large the largest.
        ((share * f32::from(most) + 0.5) as u16).min(most)
    }

    /// Sets a duty cycle to a current.
    ///
    /// # Errors
    /// The error of the duty cycle.
    #[cfg(feature = "hal")]
    pub fn drive<P: embedded_hal::pwm::SetDutyCycle>(&self, current: Current, pwm: &mut P) -> Result<(), P::Error> {
        let duty = self.duty(current, pwm.max_duty_cycle());
        pwm.set_duty_cycle(duty)
    }
}
