//! What may be averaged: quantities that are proportional to what is wanted.

use crate::quantity::{AbsolutePressure, MassFlow, Quantity, RelativeHumidity, Temperature, VolumeFlow};

/// A quantity whose mean is meaningful: a flow, a temperature, a line pressure, a humidity; not a pressure drop.
///
/// ```compile_fail
/// use evenbore::{conditioning::Damping, quantity::PressureDrop};
/// let _ = Damping::<PressureDrop>::new(1.0); // compensate first, then average
/// ```
pub trait Linear: Quantity {}

impl Linear for VolumeFlow {}
impl Linear for MassFlow {}
impl Linear for Temperature {}
impl Linear for AbsolutePressure {}
impl Linear for RelativeHumidity {}
