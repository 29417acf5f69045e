//! Low-flow cut-off: below the least flow that means something the flow is zero, so that a zero's noise is not
//! totalled.

use crate::conditions::Sample;
use crate::error::{Error, within};
use crate::math::Real;
use crate::quantity::{MassFlow, VolumeFlow};

/// A cut-off with hysteresis, for both directions alike.
///
/// ```
/// use evenbore::{conditioning::Cutoff, quantity::MassFlow};
/// let mg = MassFlow::from_milligrams_per_minute;
/// let mut cutoff = Cutoff::new(mg(2.0), mg(3.0))?;
/// assert!(!cutoff.flows(mg(2.5)));
/// assert!(cutoff.flows(mg(-3.5)));
/// assert!(cutoff.flows(mg(2.5)));
/// assert!(!cutoff.flows(mg(1.9)));
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Cutoff {
    stops: f32,
    starts: f32,
    flowing: bool,
}

impl Cutoff {
    /// A flow stops below `stops` and starts at `starts`. Two zeros let everything through.
    ///
    /// # Errors
    /// Names a flow outside 0..1000 kg/s, or `starts` when it is below `stops`.
    pub fn new(stops: MassFlow, starts: MassFlow) -> Result<Self, Error> {
        let stops = within("cut-off, flow stops (kg/s)", stops.as_kilograms_per_second(), 0.0, 1e3)?;
        let starts = within("cut-off, flow starts (kg/s)", starts.as_kilograms_per_second(), stops, 1e3)?;
        Ok(Self { stops, starts, flowing: false })
    }

    /// Whether `flow` counts as a flow. One that is not finite does not, and leaves the state as it was.
    pub fn flows(&mut self, flow: MassFlow) -> bool {
        let size = flow.as_kilograms_per_second().magnitude();
        if !size.is_finite() {
            return false;
        }
        let threshold = if self.flowing { self.stops } else { self.starts };
        self.flowing = size >= threshold;
        self.flowing
    }

    /// The sample, with its three flows at zero where they do not count as a flow: a zero is a measurement, not a
    /// failure.
    pub fn apply(&mut self, sample: &Sample) -> Sample {
        if self.flows(sample.mass) {
            return *sample;
        }
        let none = VolumeFlow::from_cubic_metres_per_second(0.0);
        let mass = MassFlow::from_kilograms_per_second(0.0);
        Sample { volume: none, mass, standard: sample.standard.map(|_| none), ..*sample }
    }
}
