//! Alarms: a limit with hysteresis and delay.

use crate::error::{Error, within};
use crate::quantity::Quantity;

/// On which side of its limit a value alarms.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Side {
    /// Above the limit.
    Above,
    /// Below the limit.
    Below,
}

/// An alarm: raised when the value is beyond its limit for the whole delay, cleared when it has come back by the
/// hysteresis. Without a value it is raised at once: what is not known is not safe.
///
/// ```
/// use evenbore::output::{Alarm, alarm::Side};
/// use evenbore::quantity::VolumeFlow;
/// let litres = VolumeFlow::from_litres_per_minute;
/// let mut alarm = Alarm::new(Side::Above, litres(10.0), litres(0.5), 2000)?;
/// assert!(!alarm.update(Some(litres(11.0)), 1000));
/// assert!(alarm.update(Some(litres(11.0)), 1000));
/// assert!(alarm.update(Some(litres(9.8)), 1000));
/// assert!(!alarm.update(Some(litres(9.4)), 1000));
/// assert!(alarm.update(None, 1000));
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Alarm<Q> {
    side: Side,
    limit: Q,
    hysteresis: Q,
    delay_ms: u32,
    beyond_ms: u32,
    raised: bool,
}

impl<Q: Quantity> Alarm<Q> {
    /// An alarm that clears `hysteresis` inside its `limit` and waits `delay_ms` before it is raised.
    ///
    /// # Errors
    /// Names a limit that is not finite or beyond 1e9, a negative hysteresis, or a delay above a day.
    pub fn new(side: Side, limit: Q, hysteresis: Q, delay_ms: u32) -> Result<Self, Error> {
        within("alarm limit (SI)", limit.as_si(), -1e9, 1e9)?;
        within("alarm hysteresis (SI)", hysteresis.as_si(), 0.0, 1e9)?;
        within("alarm delay (ms)", delay_ms as f32, 0.0, 8.64e7)?;
        Ok(Self { side, limit, hysteresis, delay_ms, beyond_ms: 0, raised: false })
    }

    /// Takes a value and the time since the one before; says whether the alarm is raised.
    pub fn update(&mut self, value: Option<Q>, elapsed_ms: u32) -> bool {
        let Some(excess) = value.map(|value| self.excess(value)).filter(|excess| !excess.is_nan()) else {
            self.raised = true;
            return true;
        };
        if excess > 0.0 {
            self.beyond_ms = self.beyond_ms.saturating_add(elapsed_ms);
            self.raised |= self.beyond_ms >= self.delay_ms;
        } else {
            self.beyond_ms = 0;
            self.raised &= excess > -self.hysteresis.as_si();
        }
        self.raised
    }

    /// Whether the alarm is raised.
    pub const fn raised(&self) -> bool {
        self.raised
    }

    /// How far a value is beyond the limit, SI units; negative inside.
    fn excess(&self, value: Q) -> f32 {
        let above = value.as_si() - self.limit.as_si();
        match self.side {
            Side::Above => above,
            Side::Below => -above,
        }
    }

    /// Sets a pin: high when all is well, so that a broken wire and a lost supply alarm too.
    ///
    /// # Errors
    /// The error of the pin.
    #[cfg(feature = "hal")]
    pub fn drive<P: embedded_hal::digital::OutputPin>(&self, pin: &mut P) -> Result<(), P::Error> {
        pin.set_state((!self.raised).into())
    }
}
