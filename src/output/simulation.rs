//! Simulation: a value in place of the measured one, to test what is connected. It raises function check and ends by
//! itself.

use crate::error::{Error, within};
use crate::health::Causes;

/// Longest simulation, ms: an hour.
pub const LONGEST_MS: u32 = 3_600_000;

/// A simulation of one input or output; off to begin with.
///
/// ```
/// use evenbore::health::{Category, Causes, Mapping};
/// use evenbore::{output::Simulation, quantity::Current};
/// let mut simulation = Simulation::default();
/// simulation.start(Current::from_milliamperes(12.0), 60_000)?;
/// let shown = simulation.over(Current::from_milliamperes(4.0));
/// assert_eq!(shown, Current::from_milliamperes(12.0));
/// assert_eq!(Mapping::default().category(simulation.causes()), Category::FunctionCheck);
/// simulation.pass(60_000);
/// assert_eq!(simulation.causes(), Causes::empty());
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Simulation<T> {
    running: Option<(T, u32)>,
}

impl<T> Default for Simulation<T> {
    fn default() -> Self {
        Self { running: None }
    }
}

impl<T: Copy> Simulation<T> {
    /// Puts `value` in place of the measured one for `for_ms`.
    ///
    /// # Errors
    /// Names a time outside 1 ms..1 h.
    pub fn start(&mut self, value: T, for_ms: u32) -> Result<(), Error> {
        within("length of a simulation (ms)", for_ms as f32, 1.0, LONGEST_MS as f32)?;
        self.running = Some((value, for_ms));
        Ok(())
    }

    /// Ends it.
    pub fn stop(&mut self) {
        self.running = None;
    }

    /// Lets time pass.
    pub fn pass(&mut self, elapsed_ms: u32) {
        self.running = match self.running {
            Some((value, left)) if left > elapsed_ms => Some((value, left.saturating_sub(elapsed_ms))),
            _ => None,
        };
    }

    /// The simulated value while one is, else the measured one.
    pub fn over(&self, measured: T) -> T {
        self.running.map_or(measured, |(value, _)| value)
    }

    /// [`Causes::SIMULATION`] while it runs, to be joined to the assessment.
    pub fn causes(&self) -> Causes {
        if self.running.is_some() { Causes::SIMULATION } else { Causes::empty() }
    }
}
