//! Running totals: each step added exactly, forward and reverse apart.

use super::counter::{Counter, NotCounted, Step, step};
use crate::conditions::Sample;
use crate::quantity::{MassFlow, VolumeFlow};

/// Nanolitres in a cubic metre per second that flows for a millisecond.
const NANOLITRES: u64 = 1_000_000_000;
/// Micrograms in a kilogram per second that flows for a millisecond.
const MICROGRAMS: u64 = 1_000_000;

/// Forward and reverse total of one quantity.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Total {
    /// What flowed forward.
    pub forward: Counter,
    /// What flowed in reverse.
    pub reverse: Counter,
}

impl Total {
    /// Forward minus reverse, in whole sub-units, rollovers included.
    ///
    /// ```
    /// assert_eq!(evenbore::total::Total::default().net(), 0);
    /// ```
    pub const fn net(&self) -> i128 {
        self.forward.whole().wrapping_sub(self.reverse.whole())
    }

    fn add(&mut self, step: Step) {
        if step.reverse { self.reverse.add(step.size) } else { self.forward.add(step.size) }
    }
}

/// Totals of volume, mass and reference volume.
///
/// Each step is exact but for what lies below 2^-64 of a sub-unit, and errs towards zero: after 20 years at 10 Hz
/// (6.3e9 steps) less than 1e-9 of a sub-unit is missing (asserted in `tests/signal_total.rs`). Counters roll over at
/// [`ROLLOVER`](super::ROLLOVER) and count that.
///
/// ```
/// use evenbore::quantity::{MassFlow, VolumeFlow};
/// use evenbore::total::Totals;
/// let mut totals = Totals::default();
/// let (litre_per_second, gram_per_second) =
///     (VolumeFlow::from_litres_per_second(1.0), MassFlow::from_grams_per_second(1.25));
/// totals.add_flows(litre_per_second, gram_per_second, None, 500)?;
/// assert!((499_999_900..=500_000_100).contains(&totals.volume().net()), "half a litre in nanolitres");
/// assert!((624_999..=625_001).contains(&totals.mass().net()), "micrograms");
/// # Ok::<(), evenbore::total::NotCounted>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Totals {
    pub(super) volume: Total,
    pub(super) mass: Total,
    pub(super) reference: Total,
    pub(super) missed: u32,
}

impl Totals {
    /// Volume at line conditions, in nanolitres.
    pub const fn volume(&self) -> &Total {
        &self.volume
    }
    /// Mass, in micrograms.
    pub const fn mass(&self) -> &Total {
        &self.mass
    }
    /// Volume at reference conditions, in nanolitres.
    pub const fn reference(&self) -> &Total {
        &self.reference
    }
    /// Steps that were refused since the beginning; it stays at its largest value.
    pub const fn missed(&self) -> u32 {
        self.missed
    }

    /// Adds a sample that held for `elapsed_ms`.
    ///
    /// # Errors
    /// As [`Totals::add_flows`].
    pub fn add(&mut self, sample: &Sample, elapsed_ms: u32) -> Result<(), NotCounted> {
        self.add_flows(sample.volume, sample.mass, sample.standard, elapsed_ms)
    }

    /// Adds flows that held for `elapsed_ms`: all or none of them. Without a reference flow that total stands still.
    ///
    /// # Errors
    /// A flow that is not finite or above 1000 SI units, or a time above an hour; the totals stay, the miss is counted.
    pub fn add_flows(
        &mut self,
        volume: VolumeFlow,
        mass: MassFlow,
        reference: Option<VolumeFlow>,
        elapsed_ms: u32,
    ) -> Result<(), NotCounted> {
        let steps = steps(volume, mass, reference, elapsed_ms);
        match steps {
            Ok([volume, mass, reference]) => {
                self.volume.add(volume);
                self.mass.add(mass);
                self.reference.add(reference);
            }
            Err(_) => self.missed = self.missed.saturating_add(1),
        }
        steps.map(|_| ())
    }
}

fn steps(
    volume: VolumeFlow,
    mass: MassFlow,
    reference: Option<VolumeFlow>,
    elapsed_ms: u32,
) -> Result<[Step; 3], NotCounted> {
    let reference = reference.map_or(0.0, VolumeFlow::as_cubic_metres_per_second);
    Ok([
        step(volume.as_cubic_metres_per_second(), elapsed_ms, NANOLITRES)?,
        step(mass.as_kilograms_per_second(), elapsed_ms, MICROGRAMS)?,
        step(reference, elapsed_ms, NANOLITRES)?,
    ])
}
