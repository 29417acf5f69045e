//! Damping: a first-order lag with its time constant in seconds.

use super::linear::Linear;
use crate::error::{Error, within};
use crate::math::approached;
use core::marker::PhantomData;

/// Longest time constant, s.
pub const MOST_SECONDS: f32 = 1e4;

/// A first-order lag, `y += (1 - exp(-dt/tau)) (x - y)`: exact for an input that holds over each interval, however
/// uneven the intervals are.
///
/// `y` is kept in two single-precision parts, so that it reaches its input also where one step is smaller than the last
/// digit of `y`: within 2e-7 after 20 time constants of 100 000 samples each (asserted in
/// `tests/signal_conditioning.rs`).
///
/// ```
/// use evenbore::{conditioning::Damping, quantity::MassFlow};
/// let mut damping = Damping::new(2.0)?;
/// damping.update(MassFlow::from_grams_per_second(0.0), 100);
/// let after_two_seconds = damping.update(MassFlow::from_grams_per_second(1.0), 2000);
/// assert!((after_two_seconds.ok_or("a flow")?.as_grams_per_second() - 0.63212).abs() < 1e-5);
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Damping<Q> {
    lag: Lag,
    quantity: PhantomData<Q>,
}

impl<Q: Linear> Damping<Q> {
    /// A lag of `seconds`; zero is none.
    ///
    /// # Errors
    /// Names a time constant outside 0..10 000 s.
    pub fn new(seconds: f32) -> Result<Self, Error> {
        Ok(Self { lag: Lag::new(seconds)?, quantity: PhantomData })
    }

    /// Takes a sample and the time since the one before; the first sample is taken whole, one that is not finite not at
    /// all. Returns the damped value, nothing before the first sample.
    pub fn update(&mut self, sample: Q, elapsed_ms: u32) -> Option<Q> {
        self.lag.update(sample.as_si(), elapsed_ms);
        self.value()
    }

    /// The damped value; nothing before the first sample.
    pub fn value(&self) -> Option<Q> {
        self.lag.value().map(Q::from_si)
    }

    /// Forgets all samples, as after a gap or a change of fluid.
    pub fn reset(&mut self) {
        self.lag.state = None;
    }
}

/// The lag of one number.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub(crate) struct Lag {
    seconds: f32,
    /// The value and what its rounding left over.
    state: Option<[f32; 2]>,
}

impl Lag {
    pub(crate) fn new(seconds: f32) -> Result<Self, Error> {
        within("time constant (s)", seconds, 0.0, MOST_SECONDS)?;
        Ok(Self { seconds, state: None })
    }

    pub(crate) fn starting_at(self, value: f32) -> Self {
        Self { state: Some([value, 0.0]), ..self }
    }

    pub(crate) fn value(&self) -> Option<f32> {
        self.state.map(|[value, _]| value)
    }

    pub(crate) fn update(&mut self, sample: f32, elapsed_ms: u32) {
        if !sample.is_finite() {
            return;
        }
        let next = match self.state {
            Some([value, rest]) if self.seconds > 0.0 => {
                let share = approached(elapsed_ms as f32 * 1e-3 / self.seconds);
                // What is added is small against the value: the difference below is exact (Dekker, 1971).
                let add = rest + share * ((sample - value) - rest);
                let sum = value + add;
                [sum, add - (sum - value)]
            }
            _ => [sample, 0.0],
        };
        // Two samples at opposite ends of the number range: their difference is not a number to keep.
        self.state = if next.iter().all(|part| part.is_finite()) { Some(next) } else { self.state };
    }
}
