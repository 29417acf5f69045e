//! Detectors: what only a row of samples can show.

use super::causes::Causes;
use crate::conditioning::samples::Samples;
use crate::error::{Error, within};
use crate::math::Real;
use crate::quantity::Quantity;
use core::marker::PhantomData;

/// Raises [`Causes::STUCK`] when a quantity stays within a resolution of where it was for a number of samples.
///
/// A live signal moves by its noise; a blocked port holds its pressure. The resolution therefore lies below the noise
/// of the healthy sensor, and the number of samples is large.
///
/// ```
/// use evenbore::{health::{Causes, detectors::Stuck}, quantity::PressureDrop};
/// let pa = PressureDrop::from_pascals;
/// let mut stuck = Stuck::new(pa(0.05), 3)?;
/// assert_eq!(stuck.update(pa(100.0)), Causes::empty());
/// assert_eq!(stuck.update(pa(100.04)), Causes::empty());
/// assert_eq!(stuck.update(pa(99.96)), Causes::empty());
/// assert_eq!(stuck.update(pa(100.0)), Causes::STUCK);
/// assert_eq!(stuck.update(pa(100.06)), Causes::empty());
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Stuck<Q> {
    resolution: f32,
    after: u32,
    anchor: Option<f32>,
    still: u32,
    quantity: PhantomData<Q>,
}

impl<Q: Quantity> Stuck<Q> {
    /// Stuck after `after` samples that stay within `resolution` of the one before them.
    ///
    /// # Errors
    /// Names a resolution outside 0..1e9 SI units or a number of samples outside 1..1e9.
    pub fn new(resolution: Q, after: u32) -> Result<Self, Error> {
        let resolution = within("resolution of the stuck detector (SI)", resolution.as_si(), 0.0, 1e9)?;
        within("samples of the stuck detector", after as f32, 1.0, 1e9)?;
        Ok(Self { resolution, after, anchor: None, still: 0, quantity: PhantomData })
    }

    /// Takes a sample and says whether the quantity is stuck; one that is not finite changes nothing.
    pub fn update(&mut self, sample: Q) -> Causes {
        let value = sample.as_si();
        if value.is_finite() {
            match self.anchor {
                Some(anchor) if (value - anchor).magnitude() <= self.resolution => {
                    self.still = self.still.saturating_add(1)
                }
                _ => (self.anchor, self.still) = (Some(value), 0),
            }
        }
        if self.still >= self.after { Causes::STUCK } else { Causes::empty() }
    }
}

/// Raises [`Causes::FROZEN`] when a raw word comes the same, bit by bit, a number of times in a row.
///
/// ```
/// use evenbore::health::{Causes, detectors::Frozen};
/// let mut frozen = Frozen::new(2)?;
/// let said = [7, 7, 7, 8].map(|word| frozen.update(word));
/// assert_eq!(said, [Causes::empty(), Causes::empty(), Causes::FROZEN, Causes::empty()]);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Frozen {
    after: u32,
    last: Option<u32>,
    repeats: u32,
}

impl Frozen {
    /// Frozen after `after` repetitions of one word.
    ///
    /// # Errors
    /// Names a number of repetitions outside 1..1e9.
    pub fn new(after: u32) -> Result<Self, Error> {
        within("repetitions of the frozen detector", after as f32, 1.0, 1e9)?;
        Ok(Self { after, last: None, repeats: 0 })
    }

    /// Takes the bits of a raw word and says whether the source is frozen.
    pub fn update(&mut self, word: u32) -> Causes {
        self.repeats = if self.last == Some(word) { self.repeats.saturating_add(1) } else { 0 };
        self.last = Some(word);
        if self.repeats >= self.after { Causes::FROZEN } else { Causes::empty() }
    }
}

/// Raises [`Causes::NOISY`] when the last `N` samples scatter about their mean by more than a limit (rms over `N - 1`).
///
/// ```
/// use evenbore::{health::{Causes, detectors::Noisy}, quantity::PressureDrop};
/// let pa = PressureDrop::from_pascals;
/// let mut noisy = Noisy::<PressureDrop, 4>::new(pa(1.0))?;
/// let said = [10.0, 11.0, 10.0, 11.0, 14.0].map(|sample| noisy.update(pa(sample)));
/// assert_eq!(said[3], Causes::empty());
/// assert_eq!(said[4], Causes::NOISY);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Noisy<Q, const N: usize> {
    most: f32,
    samples: Samples<N>,
    quantity: PhantomData<Q>,
}

impl<Q: Quantity, const N: usize> Noisy<Q, N> {
    /// Noisy above an rms of `most`; a detector of fewer than two samples does not compile.
    ///
    /// # Errors
    /// Names a limit outside 0..1e9 SI units.
    pub fn new(most: Q) -> Result<Self, Error> {
        const { assert!(N > 1, "one sample does not scatter") };
        let most = within("limit of the noise detector (SI)", most.as_si(), 0.0, 1e9)?;
        Ok(Self { most, samples: Samples::new(), quantity: PhantomData })
    }

    /// Takes a sample and says whether the last `N` are noisy; one that is not finite changes nothing. Before there are
    /// `N` samples nothing is said.
    pub fn update(&mut self, sample: Q) -> Causes {
        self.samples.push(sample.as_si());
        let quiet = self.samples.variance().is_some_and(|square| square <= self.most * self.most);
        if quiet || !self.samples.is_full() { Causes::empty() } else { Causes::NOISY }
    }
}

/// Raises [`Causes::CALIBRATION_DUE`] from the day on on which the calibration is due; both dates as YYYYMMDD.
///
/// ```
/// use evenbore::health::{Causes, detectors::calibration_due};
/// assert_eq!(calibration_due(20271130, 20271201), Causes::empty());
/// assert_eq!(calibration_due(20271201, 20271201), Causes::CALIBRATION_DUE);
/// ```
pub const fn calibration_due(today: u32, due: u32) -> Causes {
    if today >= due { Causes::CALIBRATION_DUE } else { Causes::empty() }
}
