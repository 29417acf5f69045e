//! Element geometry: what shape and size say about the law's constants.
//!
//! For N channels in parallel, total open area a, hydraulic diameter Dh and length L, with x = mdot/mu:
//!
//! | constant | round tubes | parallel plates | source |
//! |---|---|---|---|
//! | f Re (Fanning) | 16 | 24 | exact (Poiseuille 1840; Shah & London 1978) |
//! | A = 2 fRe L/(a Dh^2) | 8 L/(N pi R^4) | 12 L/(w s^3) | exact |
//! | B = K1/a^2, K1 = (1 + Kinf)/2 | Kinf 1.2475 | Kinf 0.670 | two-dimensional solution; Shah & London 1978 print 1.25 and 0.674 (from memory) |
//! | kinetic-energy factor | 2 | 54/35 | exact, from the profile |
//! | thermal factor | 1 | 27/35 | exact, from the profile |
//! | entrance h0, k | 0.302, 67.6 | 0.241, 299.8 | fitted to a two-dimensional solution |
//! | entrance c, d | 0.0754, 0.0768 | 0.0261, 0.084 | fitted to the bench's own two-dimensional solution (`virtual_element`) |
//! | slip factor on xi/Dh | 8 | 12 | fRe/2, exact to first order |
//!
//! The entrance of a real, sharp-edged inlet is not in these constants; a calibration absorbs it.

use crate::error::{Error, Limit, all_within, within};
use crate::quantity::{Length, Temperature};

/// Shape of the channels.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize), serde(rename_all = "kebab-case"))]
pub enum Shape {
    /// Straight round tubes in parallel.
    RoundTubes,
    /// Wide flat slots.
    ParallelPlates,
    /// Any other matrix: A and B come from calibration alone.
    Other,
}

/// The constants by which shape enters the law.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct ShapeConstants {
    /// Fanning friction factor times Reynolds number.
    pub friction_reynolds: f32,
    /// K1 = (1 + Kinf)/2, kinetic loss in units of rho u^2.
    pub kinetic_loss: f32,
    /// Kinetic-energy factor of the developed profile.
    pub kinetic_energy_factor: f32,
    /// Thermal factor kt.
    pub thermal_factor: f32,
    /// Entrance constants h0, k, c, d.
    pub entrance: [f32; 4],
}

const ROUND_TUBES: ShapeConstants = ShapeConstants {
    friction_reynolds: 16.0,
    kinetic_loss: 1.123_75,
    kinetic_energy_factor: 2.0,
    thermal_factor: 1.0,
    entrance: [0.302, 67.6, 0.0754, 0.0768],
};

const PARALLEL_PLATES: ShapeConstants = ShapeConstants {
    friction_reynolds: 24.0,
    kinetic_loss: 0.835,
    kinetic_energy_factor: 54.0 / 35.0,
    thermal_factor: 27.0 / 35.0,
    entrance: [0.241, 299.8, 0.0261, 0.084],
};

// The middle of tubes and plates; the entrance part is off because nothing is known of it.
const OTHER: ShapeConstants = ShapeConstants {
    friction_reynolds: 20.0,
    kinetic_loss: 1.0,
    kinetic_energy_factor: 1.75,
    thermal_factor: 0.875,
    entrance: [0.0, 0.0, 0.0, 1.0],
};

impl Shape {
    /// The shape's constants in the law.
    pub const fn constants(self) -> ShapeConstants {
        match self {
            Self::RoundTubes => ROUND_TUBES,
            Self::ParallelPlates => PARALLEL_PLATES,
            Self::Other => OTHER,
        }
    }
}

impl ShapeConstants {
    fn check(&self) -> Result<(), Error> {
        const LIMITS: [Limit; 4] = [
            ("friction factor times Reynolds number", 1.0, 100.0),
            ("kinetic loss", 0.1, 10.0),
            ("kinetic-energy factor", 0.0, 10.0),
            ("thermal factor", 0.0, 10.0),
        ];
        const ENTRANCE: [Limit; 4] =
            [("entrance h0", 0.0, 0.9), ("entrance k", 0.0, 1e4), ("entrance c", 0.0, 1.0), ("entrance d", 1e-3, 10.0)];
        all_within(
            &LIMITS,
            [self.friction_reynolds, self.kinetic_loss, self.kinetic_energy_factor, self.thermal_factor],
        )?;
        all_within(&ENTRANCE, self.entrance)
    }
}

/// A laminar flow element: its channels, and A and B of the law, nominal or calibrated.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct Element {
    pub(crate) shape: Shape,
    /// Constants of the law for this shape.
    pub(crate) constants: ShapeConstants,
    /// A at the reference temperature, 1/m3.
    pub(crate) a: f32,
    /// B at the reference temperature, 1/m4.
    pub(crate) b: f32,
    /// Total open area, m2; 0 when unknown.
    pub(crate) open_area: f32,
    /// Hydraulic diameter, m; 0 when unknown.
    pub(crate) hydraulic_diameter: f32,
    /// Channel length, m; 0 when unknown.
    pub(crate) length: f32,
    /// Linear thermal expansion, 1/K.
    pub(crate) expansion: f32,
    /// Temperature at which A, B and the sizes hold, K.
    pub(crate) reference_temperature: f32,
}

const PI: f64 = core::f64::consts::PI;

const COEFFICIENTS: [Limit; 2] = [("a (1/m3)", 1.0, 1e30), ("b (1/m4)", 0.0, 1e30)];

const GROWTH: [Limit; 2] = [("expansion (1/K)", -1e-4, 1e-3), ("reference temperature (K)", 100.0, 1000.0)];

impl Element {
    /// `count` straight round tubes of one bore and length.
    ///
    /// `A = 8 L/(N pi R^4)` (Poiseuille, 1840), `B = K1/(N pi R^2)^2`.
    ///
    /// # Errors
    /// Names the size outside 1 um..50 mm (bore), 0.1 mm..10 m (length) or 1..1e6 (count), or an A below 1 1/m3.
    ///
    /// ```
    /// use evenbore::element::Element;
    /// use evenbore::quantity::Length;
    /// let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
    /// assert!((element.a() / 1.087e12 - 1.0).abs() < 1e-3);
    /// # Ok::<(), evenbore::error::Error>(())
    /// ```
    pub fn round_tubes(count: u32, bore: Length, length: Length) -> Result<Self, Error> {
        let n = f64::from(within("count", count as f32, 1.0, 1e6)?);
        let diameter = f64::from(within("bore (m)", bore.as_metres(), 1e-6, 0.05)?);
        let area = n * PI * diameter * diameter / 4.0;
        Self::from_sizes(Shape::RoundTubes, ROUND_TUBES, [area, diameter], length)
    }

    /// Flat slots of one full gap and a total width.
    ///
    /// `A = 12 L/(w s^3)`, `B = K1/(w s)^2`; side walls are neglected, so the width should exceed 100 gaps.
    ///
    /// # Errors
    /// Names the size outside 1 um..10 mm (gap), 0.1 mm..1000 m (width) or 0.1 mm..10 m (length).
    pub fn parallel_plates(gap: Length, width: Length, length: Length) -> Result<Self, Error> {
        let s = f64::from(within("gap (m)", gap.as_metres(), 1e-6, 0.01)?);
        let w = f64::from(within("width (m)", width.as_metres(), 1e-4, 1000.0)?);
        Self::from_sizes(Shape::ParallelPlates, PARALLEL_PLATES, [s * w, 2.0 * s], length)
    }

    /// A matrix of other channels whose friction is known: f Re from [`ducts`](super::ducts), hydraulic diameter, total
    /// open area (m2) and length.
    ///
    /// `A = 2 fRe L/(a Dh^2)`, `B = K1/a^2` with K1 = 1, the middle of tubes and plates; slip factor fRe/2, entrance off.
    ///
    /// # Errors
    /// Names the value outside 10..30 (f Re), 1 um..50 mm, 1e-12..10 m2 or 0.1 mm..10 m (length).
    ///
    /// ```
    /// use evenbore::element::{Element, ducts};
    /// use evenbore::quantity::Length;
    /// // 500 square channels of 0.5 mm side, 80 mm long.
    /// let side = Length::from_millimetres(0.5);
    /// let element = Element::duct(ducts::rectangle(1.0)?, side, 500.0 * 0.25e-6, Length::from_millimetres(80.0))?;
    /// assert!((element.a() / 7.284e10 - 1.0).abs() < 1e-3);
    /// # Ok::<(), evenbore::error::Error>(())
    /// ```
    pub fn duct(
        friction_reynolds: f32,
        hydraulic_diameter: Length,
        open_area_m2: f32,
        length: Length,
    ) -> Result<Self, Error> {
        let friction_reynolds = within("friction factor times Reynolds number", friction_reynolds, 10.0, 30.0)?;
        let diameter = within("hydraulic diameter (m)", hydraulic_diameter.as_metres(), 1e-6, 0.05)?;
        let area = within("open area (m2)", open_area_m2, 1e-12, 10.0)?;
        let constants = ShapeConstants { friction_reynolds, ..OTHER };
        Self::from_sizes(Shape::Other, constants, [area, diameter].map(f64::from), length)
    }

    fn from_sizes(
        shape: Shape,
        constants: ShapeConstants,
        [area, diameter]: [f64; 2],
        length: Length,
    ) -> Result<Self, Error> {
        let metres = f64::from(within("length (m)", length.as_metres(), 1e-4, 10.0)?);
        let a = 2.0 * f64::from(constants.friction_reynolds) * metres / (area * diameter * diameter);
        let b = f64::from(constants.kinetic_loss) / (area * area);
        let nominal = Self {
            shape,
            constants,
            a: 1.0,
            b: 0.0,
            open_area: area as f32,
            hydraulic_diameter: diameter as f32,
            length: metres as f32,
            expansion: 0.0,
            reference_temperature: 293.15,
        };
        nominal.with_coefficients(a as f32, b as f32)
    }

    /// A matrix of unknown channels: A (1/m3) and B (1/m4) from a calibration, entrance and slip terms off.
    ///
    /// # Errors
    /// Names the coefficient outside 1..1e30 (A) or 0..1e30 (B).
    pub fn other(a: f32, b: f32) -> Result<Self, Error> {
        let unknown = Self {
            shape: Shape::Other,
            constants: Shape::Other.constants(),
            a,
            b,
            open_area: 0.0,
            hydraulic_diameter: 0.0,
            length: 0.0,
            expansion: 0.0,
            reference_temperature: 293.15,
        };
        unknown.with_coefficients(a, b)
    }

    /// The same element with linear thermal expansion `per_kelvin` (1/K), its sizes holding at `reference`.
    ///
    /// # Errors
    /// Names the value outside -1e-4..1e-3 1/K or 100..1000 K.
    pub fn with_expansion(self, per_kelvin: f32, reference: Temperature) -> Result<Self, Error> {
        let (expansion, reference_temperature) = (per_kelvin, reference.as_kelvin());
        all_within(&GROWTH, [expansion, reference_temperature])?;
        Ok(Self { expansion, reference_temperature, ..self })
    }

    /// The same element with calibrated A (1/m3) and B (1/m4) instead of nominal ones.
    ///
    /// # Errors
    /// Names the coefficient outside 1..1e30 (A) or 0..1e30 (B).
    pub fn with_coefficients(self, a: f32, b: f32) -> Result<Self, Error> {
        all_within(&COEFFICIENTS, [a, b])?;
        Ok(Self { a, b, ..self })
    }

    /// A matrix of shape "other" with known hydraulic diameter (m) and open area (m2), which switch on the slip term
    /// and the Reynolds number.
    ///
    /// # Errors
    /// Names the size outside 1 um..50 mm or 1e-12..10 m2.
    pub fn with_hydraulic_size(self, diameter: Length, open_area_m2: f32) -> Result<Self, Error> {
        let hydraulic_diameter = within("hydraulic diameter (m)", diameter.as_metres(), 1e-6, 0.05)?;
        Ok(Self { hydraulic_diameter, open_area: within("open area (m2)", open_area_m2, 1e-12, 10.0)?, ..self })
    }

    /// Accepts an element whose every number makes sense, whatever its origin.
    ///
    /// # Errors
    /// Names the field that is not finite or outside its limits.
    pub fn check(&self) -> Result<(), Error> {
        const SIZES: [Limit; 3] =
            [("open area (m2)", 5e-13, 1e6), ("hydraulic diameter (m)", 1e-6, 0.05), ("length (m)", 1e-4, 10.0)];
        // What is unknown is 0: all three sizes, or the length alone.
        let sizes = [self.open_area, self.hydraulic_diameter, self.length];
        if sizes != [0.0; 3] {
            let known = if self.length == 0.0 { SIZES[2].1 } else { self.length };
            all_within(&SIZES, [self.open_area, self.hydraulic_diameter, known])?;
        }
        self.constants.check()?;
        all_within(&COEFFICIENTS, [self.a, self.b])?;
        within("b over a (1/m)", self.b / self.a, 0.0, 1e6)?;
        all_within(&GROWTH, [self.expansion, self.reference_temperature])
    }

    /// Shape of the channels.
    pub const fn shape(&self) -> Shape {
        self.shape
    }
    /// Viscous coefficient A at the reference temperature, 1/m3.
    pub const fn a(&self) -> f32 {
        self.a
    }
    /// Kinetic coefficient B at the reference temperature, 1/m4.
    pub const fn b(&self) -> f32 {
        self.b
    }
    /// Total open area, m2; 0 when unknown.
    pub const fn open_area(&self) -> f32 {
        self.open_area
    }
    /// Hydraulic diameter; 0 when unknown.
    pub const fn hydraulic_diameter(&self) -> Length {
        Length::from_metres(self.hydraulic_diameter)
    }
    /// Channel length; 0 when unknown.
    pub const fn length(&self) -> Length {
        Length::from_metres(self.length)
    }
    /// Linear thermal expansion, 1/K.
    pub const fn expansion(&self) -> f32 {
        self.expansion
    }
    /// Temperature at which A, B and the sizes hold.
    pub const fn reference_temperature(&self) -> Temperature {
        Temperature::from_kelvin(self.reference_temperature)
    }
    /// Reynolds number `Re = X Dh/a` for x = mdot/mu in metres; 0 when the sizes are unknown.
    pub fn reynolds(&self, x: f32) -> f32 {
        if self.open_area > 0.0 { x.abs() * self.hydraulic_diameter / self.open_area } else { 0.0 }
    }
}
