//! Freshness: how old a sample is, and how far apart the samples of one reading were taken.

use crate::error::{Error, within};

/// A reading of a free-running millisecond counter, which starts again at zero after 49.7 days.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Millis(pub u32);

impl Millis {
    /// Milliseconds since `earlier`, right across the counter's restart for up to 49.7 days.
    ///
    /// ```
    /// use evenbore::conditioning::freshness::Millis;
    /// assert_eq!(Millis(5).since(Millis(u32::MAX - 4)), 10);
    /// ```
    pub const fn since(self, earlier: Self) -> u32 {
        self.0.wrapping_sub(earlier.0)
    }
}

/// The age of a sensor's last good sample; it stays at its largest value instead of starting again.
///
/// ```
/// use evenbore::conditioning::freshness::{Age, Millis};
/// let mut age = Age::new(Millis(0));
/// assert_eq!(age.at(Millis(10)), u32::MAX, "no sample yet");
/// age.sampled(Millis(4_294_967_290));
/// assert_eq!(age.at(Millis(4)), 10);
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Age {
    seen: Millis,
    age_ms: u32,
}

impl Age {
    /// A sensor that has delivered nothing yet.
    pub const fn new(now: Millis) -> Self {
        Self { seen: now, age_ms: u32::MAX }
    }

    /// Notes a good sample.
    pub const fn sampled(&mut self, now: Millis) {
        *self = Self { seen: now, age_ms: 0 };
    }

    /// The age in milliseconds; to be asked at least once in 49 days.
    pub const fn at(&mut self, now: Millis) -> u32 {
        self.age_ms = self.age_ms.saturating_add(now.since(self.seen));
        self.seen = now;
        self.age_ms
    }
}

/// What is wrong with the ages of one reading's samples.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Lateness {
    /// The oldest sample is too old.
    Stale,
    /// The samples are fresh but were taken too far apart to be one state of the fluid.
    Skewed,
}

/// How old samples may be and how far apart.
///
/// ```
/// use evenbore::conditioning::freshness::{Freshness, Lateness};
/// let freshness = Freshness::new(500, 100)?;
/// assert_eq!(freshness.judge(&[20, 90, 120]), None);
/// assert_eq!(freshness.judge(&[20, 90, 130]), Some(Lateness::Skewed));
/// assert_eq!(freshness.judge(&[450, 501]), Some(Lateness::Stale));
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Freshness {
    age_ms: u32,
    skew_ms: u32,
}

impl Freshness {
    /// Samples may be `age_ms` old and lie `skew_ms` apart.
    ///
    /// # Errors
    /// Names an age outside 1 ms..1 h, or a skew beyond the age.
    pub fn new(age_ms: u32, skew_ms: u32) -> Result<Self, Error> {
        within("largest age of a sample (ms)", age_ms as f32, 1.0, 3.6e6)?;
        within("largest skew of samples (ms)", skew_ms as f32, 0.0, age_ms as f32)?;
        Ok(Self { age_ms, skew_ms })
    }

    /// Judges the ages (ms) of the samples of one reading; without samples they are stale.
    pub fn judge(&self, ages_ms: &[u32]) -> Option<Lateness> {
        let oldest = ages_ms.iter().copied().max().unwrap_or(u32::MAX);
        let newest = ages_ms.iter().copied().min().unwrap_or(0);
        if oldest > self.age_ms {
            Some(Lateness::Stale)
        } else if oldest.saturating_sub(newest) > self.skew_ms {
            Some(Lateness::Skewed)
        } else {
            None
        }
    }
}
