//! Pulse output: one pulse per amount, at most so many a second, none lost.

use crate::error::{Error, within};

/// A pulse output. Amounts go in as sub-units of a total, pulses come out as levels; what cannot go out yet waits.
///
/// The backlog holds 2^64 - 1 sub-units. It empties whenever the mean flow is below the largest rate; a backlog that
/// only grows says that the amount per pulse is too small, see [`PulseOutput::backlog`].
///
/// ```
/// use evenbore::output::PulseOutput;
/// // A pulse per millilitre (in nanolitres), 10 ms high and 10 ms low: 50 a second at most.
/// let mut output = PulseOutput::new(1_000_000, 10, 10)?;
/// output.add(2_500_000);
/// let levels = [0, 9, 1, 10, 10, 10].map(|ms| output.step(ms));
/// assert_eq!(levels, [true, true, false, true, false, false]);
/// assert_eq!(output.backlog(), 0);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PulseOutput {
    per_pulse: u64,
    on_ms: u16,
    off_ms: u16,
    waiting: u64,
    high: bool,
    /// Time that the present level still has to last, ms.
    left_ms: u32,
}

impl PulseOutput {
    /// A pulse per `per_pulse` sub-units, high for `on_ms` and then low for at least `off_ms`.
    ///
    /// # Errors
    /// Names an amount below 1 sub-unit, or a time outside 1..60 000 ms.
    pub fn new(per_pulse: u64, on_ms: u16, off_ms: u16) -> Result<Self, Error> {
        within("sub-units per pulse", per_pulse as f32, 1.0, u64::MAX as f32)?;
        within("length of a pulse (ms)", f32::from(on_ms), 1.0, 6e4)?;
        within("pause after a pulse (ms)", f32::from(off_ms), 1.0, 6e4)?;
        Ok(Self { per_pulse, on_ms, off_ms, waiting: 0, high: false, left_ms: 0 })
    }

    /// Adds sub-units that have flowed, as [`Counter::since`](crate::total::Counter::since) gives them.
    pub const fn add(&mut self, sub_units: u64) {
        self.waiting = self.waiting.saturating_add(sub_units);
    }

    /// Whole pulses that wait.
    pub const fn backlog(&self) -> u64 {
        match self.waiting.checked_div(self.per_pulse) {
            Some(pulses) => pulses,
            None => 0,
        }
    }

    /// Sub-units that have not gone out as a pulse, to be stored and added again after a restart.
    pub const fn waiting(&self) -> u64 {
        self.waiting
    }

    /// Most pulses a second.
    pub fn most_per_second(&self) -> f32 {
        1000.0 / (f32::from(self.on_ms) + f32::from(self.off_ms))
    }

    /// The level after a further `elapsed_ms`. Called late it lengthens a pulse or a pause and never drops one.
    pub const fn step(&mut self, elapsed_ms: u32) -> bool {
        self.left_ms = self.left_ms.saturating_sub(elapsed_ms);
        if self.left_ms == 0 && self.high {
            self.high = false;
            self.left_ms = self.off_ms as u32;
        } else if self.left_ms == 0 && self.waiting >= self.per_pulse {
            self.waiting = self.waiting.saturating_sub(self.per_pulse);
            self.high = true;
            self.left_ms = self.on_ms as u32;
        }
        self.high
    }

    /// Steps and sets a pin, high for a pulse. Where the pin fails only the time passes: the pulse comes later.
    ///
    /// # Errors
    /// The error of the pin.
    #[cfg(feature = "hal")]
    pub fn drive<P: embedded_hal::digital::OutputPin>(&mut self, elapsed_ms: u32, pin: &mut P) -> Result<(), P::Error> {
        let mut next = *self;
        let level = next.step(elapsed_ms);
        let set = pin.set_state(level.into());
        *self = match set {
            Ok(()) => next,
            Err(_) => Self { left_ms: self.left_ms.saturating_sub(elapsed_ms), ..*self },
        };
        set
    }
}
