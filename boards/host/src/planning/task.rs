//! What an element is sized for.

use evenbore::fluid::StoredFluid;
use evenbore::reading::SensorUncertainty;

/// Shapes to look at.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Shapes {
    /// Round tubes.
    pub tubes: bool,
    /// Parallel plates.
    pub plates: bool,
}

/// What an element is sized for.
#[derive(Debug, Clone, Copy)]
pub struct Task<'a> {
    /// The fluid.
    pub fluid: &'a StoredFluid,
    /// Full-scale volume flow at line conditions, m3/s.
    pub flow: f64,
    /// Pressure drop that full scale may need, Pa.
    pub pressure_drop: f64,
    /// Lowest and highest temperature, K.
    pub range: [f64; 2],
    /// Absolute line pressure, Pa.
    pub line_pressure: f64,
    /// Shapes to look at.
    pub shapes: Shapes,
    /// Sensors of the instrument.
    pub sensors: SensorUncertainty,
    /// Common part of the reference flow of the calibration to come, relative.
    pub u_common: f64,
    /// Type A part that its fit is expected to leave, relative.
    pub u_fit: f64,
    /// Most channels.
    pub most_channels: u32,
}

impl Task<'_> {
    /// Temperatures at which a design is judged: the ends of the range and its middle.
    pub fn temperatures(&self) -> Vec<f64> {
        let [low, high] = self.range;
        if high > low { vec![low, 0.5 * (low + high), high] } else { vec![low] }
    }
}
