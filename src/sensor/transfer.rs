//! The straight line through two points that takes a signal to a quantity.

use crate::error::{Error, within};
use crate::quantity::Quantity;

/// A straight transfer function, `value = v1 + (signal - s1) (v2 - v1)/(s2 - s1)`.
///
/// The slope is formed once; against the exact line the result is off by at most 2e-7 of the larger end value, for
/// signals between the ends (asserted in `tests/signal_sensors.rs`).
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Transfer<Q> {
    signal: f32,
    value: Q,
    slope: f32,
}

impl<Q: Quantity> Transfer<Q> {
    /// The line through `low` and `high`, each a signal and the quantity it stands for. The quantity may fall.
    ///
    /// # Errors
    /// Names the number that is not finite or beyond 1e9, or the upper signal when it is not above the lower.
    pub fn new(low: (f32, Q), high: (f32, Q)) -> Result<Self, Error> {
        within("signal at the low end", low.0, -1e9, 1e9)?;
        within("signal at the high end", high.0, low.0.next_up(), 1e9)?;
        let low_value = within("value at the low end (SI)", low.1.as_si(), -1e9, 1e9)?;
        let high_value = within("value at the high end (SI)", high.1.as_si(), -1e9, 1e9)?;
        let slope = within("slope of the transfer function", (high_value - low_value) / (high.0 - low.0), -1e12, 1e12)?;
        Ok(Self { signal: low.0, value: low.1, slope })
    }

    /// The quantity a signal stands for; also beyond the ends.
    pub fn apply(&self, signal: f32) -> Q {
        Q::from_si(self.value.as_si() + (signal - self.signal) * self.slope)
    }
}
