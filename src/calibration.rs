//! What a calibration says of an element beyond A and B: how sure they are, how far they reach.
//!
//! Uncertainties are kept relative to A, so that no square of A (up to 1e20 1/m3 for one fine capillary) can
//! overflow single precision: `u_A/A` without unit and `u_B/A` per metre, since `B x/A` is the kinetic share and x is a length.

use crate::error::{Error, Limit, all_within, within};
use crate::quantity::Temperature;
use heapless::Vec;

/// Most common parts a record carries.
pub const MOST_COMMON_PARTS: usize = 6;

/// What all points of a calibration shared, so that it did not average away.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize), serde(rename_all = "kebab-case"))]
pub enum Cause {
    /// The reference flow standard.
    ReferenceFlow,
    /// The viscosity data of the calibration fluid; cancels when the same fluid is measured.
    Viscosity,
    /// The gain of the bench's pressure-drop sensor.
    PressureDrop,
    /// Density or line pressure on the bench.
    Density,
    /// The offset of the bench's thermometer.
    Temperature,
    /// The zero of the bench's pressure-drop sensor.
    PressureDropZero,
    /// Nominal geometry instead of a calibration.
    Geometry,
    /// What the water in the bench's air did to its viscosity.
    Moisture,
}

impl Cause {
    pub(crate) const ALL: [Self; 8] = [
        Self::ReferenceFlow,
        Self::Viscosity,
        Self::PressureDrop,
        Self::Density,
        Self::Temperature,
        Self::PressureDropZero,
        Self::Geometry,
        Self::Moisture,
    ];

    /// The cause's name, lower case with hyphens.
    pub const fn name(self) -> &'static str {
        match self {
            Self::ReferenceFlow => "reference-flow",
            Self::Viscosity => "viscosity",
            Self::PressureDrop => "pressure-drop",
            Self::Density => "density",
            Self::Temperature => "temperature",
            Self::PressureDropZero => "pressure-drop-zero",
            Self::Geometry => "geometry",
            Self::Moisture => "moisture",
        }
    }
}

/// One common part: what one standard uncertainty of its cause does to A and B.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct CommonPart {
    /// What is shared.
    pub cause: Cause,
    /// Change of A over A.
    pub effect_a: f32,
    /// Change of B over A, 1/m.
    pub effect_b_m: f32,
}

/// How well A and B are known, and over what range.
#[derive(Debug, Clone, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct Quality {
    /// Standard uncertainty of A from the fit, over A.
    pub u_a: f32,
    /// Standard uncertainty of B from the fit, over A, 1/m.
    pub u_b_m: f32,
    /// Correlation of A and B in the fit.
    pub correlation: f32,
    /// Degrees of freedom of the fit's scale; 0 when the points' uncertainties were stated beforehand.
    pub degrees_of_freedom: f32,
    /// Parts common to all points.
    pub common: Vec<CommonPart, MOST_COMMON_PARTS>,
    /// Smallest calibrated x = mdot/mu, m.
    pub x_min_m: f32,
    /// Largest calibrated x, m; 0 when there was no calibration.
    pub x_max_m: f32,
    /// Mean temperature of the calibration.
    pub temperature_k: Temperature,
}

/// Rectangular limits of a nominal A and B, from the bores and slots a workshop delivers (common practice).
const NOMINAL_LIMITS: [f32; 2] = [0.10, 0.30];
/// 1/sqrt(3): a rectangular distribution's standard deviation over its half-width.
const RECTANGULAR: f32 = 0.577_350_26;

impl Quality {
    /// What nominal geometry is worth: A within 10 %, B within 30 %, both rectangular.
    pub fn nominal(a: f32, b: f32) -> Self {
        let [limit_a, limit_b] = NOMINAL_LIMITS;
        let parts = [(limit_a * RECTANGULAR, 0.0), (0.0, limit_b * RECTANGULAR * (b / a))];
        let mut common = Vec::new();
        for (effect_a, effect_b_m) in parts {
            // There is room for both; collecting them would leave a panic in firmware optimised for size.
            let _ = common.push(CommonPart { cause: Cause::Geometry, effect_a, effect_b_m });
        }
        Self {
            u_a: 0.0,
            u_b_m: 0.0,
            correlation: 0.0,
            degrees_of_freedom: 0.0,
            common,
            x_min_m: 0.0,
            x_max_m: 0.0,
            temperature_k: Temperature::from_celsius(20.0),
        }
    }

    /// Accepts a statement whose every number makes sense, whatever its origin.
    ///
    /// # Errors
    /// Names the field that is not finite or outside its limits.
    pub fn check(&self) -> Result<(), Error> {
        const LIMITS: [Limit; 6] = [
            ("u of a (rel)", 0.0, 10.0),
            ("u of b over a (1/m)", 0.0, 1e6),
            ("correlation", -1.0, 1.0),
            ("degrees of freedom", 0.0, 1e9),
            ("largest x (m)", 0.0, 1e9),
            ("calibration temperature (K)", 100.0, 1000.0),
        ];
        const COMMON: [Limit; 2] =
            [("common effect on a (rel)", -10.0, 10.0), ("common effect on b over a (1/m)", -1e6, 1e6)];
        let t = self.temperature_k.as_kelvin();
        all_within(&LIMITS, [self.u_a, self.u_b_m, self.correlation, self.degrees_of_freedom, self.x_max_m, t])?;
        within("smallest x (m)", self.x_min_m, 0.0, self.x_max_m)?;
        for part in &self.common {
            all_within(&COMMON, [part.effect_a, part.effect_b_m])?;
        }
        Ok(())
    }
}
