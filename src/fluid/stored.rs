//! The stored table: what a fluid is to an instrument, a few hundred bytes of flash.
//!
//! Properties are cubic Hermite curves over temperature on uniform segments, times short polynomials in pressure:
//!
//! | phase | viscosity | density |
//! |---|---|---|
//! | gas | `mu = mu0(T) (1 + k1 p + k2 p^2)` | `rho = p M / (R T Z)`, `Z = 1 + b p + c p^2 + d p^3` |
//! | liquid | `mu = 10 mPa s exp(lnmu0(T)) (1 + k1 p + k2 p^2)` | `rho = rho0(T) (1 + b p + c p^2 + d p^3)` |
//!
//! Liquids store the logarithm because their viscosity spans decades; gases do not, since the rounding of a
//! logarithm costs them 1 ppm. The logarithm is that of viscosity over 10 mPa s, which keeps it and its rounding small.

use crate::error::{Error, within};
use crate::math::Real;
use crate::quantity::{AbsolutePressure, Temperature};

/// Nodes of a viscosity curve: 32 segments.
pub const FINE_NODES: usize = 33;

/// Nodes of every other curve: 8 segments.
pub const COARSE_NODES: usize = 9;

/// Viscosity whose logarithm a liquid's table counts from, Pa s.
pub(crate) const LIQUID_SCALE: f64 = 0.01;

/// Longest fluid name, in bytes.
pub const NAME_LENGTH: usize = 24;

/// A fluid's name: 1 to 24 printable ASCII characters, padded with zeros.
#[derive(Clone, Copy, PartialEq, Eq)]
pub struct Name {
    pub(crate) bytes: [u8; NAME_LENGTH],
}

impl Name {
    /// The name of a catalogue fluid; longer text is cut (names there are checked by a test).
    pub(crate) const fn new(text: &str) -> Self {
        let from = text.as_bytes();
        let mut bytes = [0; NAME_LENGTH];
        let mut i = 0;
        while i < NAME_LENGTH && i < from.len() {
            bytes[i] = from[i];
            i += 1;
        }
        Self { bytes }
    }

    /// A name given by a user.
    ///
    /// # Errors
    /// Text that is empty, longer than 24 bytes or not printable ASCII.
    pub fn checked(text: &str) -> Result<Self, Error> {
        let printable = text.bytes().all(|c| (b' '..=b'~').contains(&c));
        if text.is_empty() || text.len() > NAME_LENGTH || !printable {
            return Err(Error::BadText { field: "fluid name", most: NAME_LENGTH });
        }
        Ok(Self::new(text))
    }

    /// The name as text.
    pub fn as_str(&self) -> &str {
        let length = self.bytes.iter().position(|&c| c == 0).unwrap_or(NAME_LENGTH);
        self.bytes.get(..length).and_then(|b| core::str::from_utf8(b).ok()).unwrap_or("")
    }
}

impl core::fmt::Debug for Name {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        core::fmt::Debug::fmt(self.as_str(), f)
    }
}

#[cfg(feature = "defmt")]
impl defmt::Format for Name {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "{=str}", self.as_str());
    }
}

/// Whether a table describes a gas or a liquid.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize), serde(rename_all = "kebab-case"))]
pub enum Phase {
    /// Compressible; density follows pressure.
    Gas,
    /// Nearly incompressible; no slip, no expansion.
    Liquid,
}

/// A cubic Hermite curve on uniform segments: value and slope (per segment) at each node.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Curve<const NODES: usize> {
    pub(crate) nodes: [[f32; 2]; NODES],
}

impl<const NODES: usize> Curve<NODES> {
    /// A curve that is `value` everywhere.
    pub const fn constant(value: f32) -> Self {
        Self { nodes: [[value, 0.0]; NODES] }
    }

    /// Number of segments.
    pub(crate) const SEGMENTS: usize = NODES - 1;

    /// Value and slope (per segment) at `position`, counted in segments from the first node; the end segments extend
    /// beyond the curve.
    ///
    /// Cubic Hermite interpolation in the form `y0 + t (m0 + t (c2 + t c3))`, whose small terms lose no digits.
    pub(crate) fn at<F: Real>(&self, position: F) -> (F, F) {
        let start = position.index().min(Self::SEGMENTS.saturating_sub(1));
        let (Some([y0, m0]), Some([y1, m1])) = (self.nodes.get(start), self.nodes.get(start + 1)) else {
            return (F::of(0.0), F::of(0.0)); // not reached: start is at most NODES - 2
        };
        let (y0, m0, y1, m1) = (F::stored(*y0), F::stored(*m0), F::stored(*y1), F::stored(*m1));
        let t = position - F::of(start as f64);
        let rise = y1 - y0;
        let c3 = m0 + m1 - (rise + rise);
        let c2 = rise - m0 - c3;
        let value = y0 + t * (m0 + t * (c2 + t * c3));
        let slope = m0 + t * (c2 + c2 + t * (c3 + c3 + c3));
        (value, slope)
    }
}

/// A fluid as an instrument stores it.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[cfg_attr(feature = "serde", derive(serde::Serialize, serde::Deserialize))]
pub struct StoredFluid {
    pub(crate) name: Name,
    pub(crate) phase: Phase,
    /// kg/mol.
    pub(crate) molar_mass: f32,
    /// K.
    pub(crate) temperature_range: [f32; 2],
    /// Pa.
    pub(crate) pressure_range: [f32; 2],
    pub(crate) u_viscosity: f32,
    pub(crate) u_viscosity_ratio: f32,
    pub(crate) viscosity: Curve<FINE_NODES>,
    pub(crate) viscosity_pressure: [Curve<COARSE_NODES>; 2],
    pub(crate) density_pressure: [Curve<COARSE_NODES>; 3],
    /// Gas: the conduction group `G = (1 + n/3) mu R/(M k)`; liquid: density towards zero pressure, kg/m3.
    pub(crate) extra: Curve<COARSE_NODES>,
}

impl StoredFluid {
    /// The fluid's name.
    pub fn name(&self) -> &str {
        self.name.as_str()
    }

    /// Gas or liquid.
    pub const fn phase(&self) -> Phase {
        self.phase
    }

    /// Molar mass, kg/mol.
    pub const fn molar_mass(&self) -> f32 {
        self.molar_mass
    }

    /// Lowest and highest temperature of the table.
    pub const fn temperature_range(&self) -> [Temperature; 2] {
        let [low, high] = self.temperature_range;
        [Temperature::from_kelvin(low), Temperature::from_kelvin(high)]
    }

    /// Lowest and highest absolute pressure of the table.
    pub const fn pressure_range(&self) -> [AbsolutePressure; 2] {
        let [low, high] = self.pressure_range;
        [AbsolutePressure::from_pascals(low), AbsolutePressure::from_pascals(high)]
    }

    /// Relative standard uncertainty of the viscosity.
    pub const fn u_viscosity(&self) -> f32 {
        self.u_viscosity
    }

    /// Relative standard uncertainty of the viscosity's ratio to its value at 25 C: what remains at another
    /// temperature of an element calibrated on the same fluid.
    pub const fn u_viscosity_ratio(&self) -> f32 {
        self.u_viscosity_ratio
    }

    /// Accepts a table whose every number makes sense, whatever its origin.
    ///
    /// # Errors
    /// Names the field that is not finite or outside its limits.
    pub fn check(&self) -> Result<(), Error> {
        let [t_low, t_high] = self.temperature_range;
        let [p_low, p_high] = self.pressure_range;
        within("molar mass (kg/mol)", self.molar_mass, 1e-3, 10.0)?;
        within("lowest table temperature (K)", t_low, 1.0, 2000.0)?;
        within("highest table temperature (K)", t_high, t_low + 1.0, 3000.0)?;
        within("lowest table pressure (Pa)", p_low, 0.0, 1e9)?;
        within("highest table pressure (Pa)", p_high, p_low + 1.0, 1e9)?;
        within("relative uncertainty of viscosity", self.u_viscosity, 0.0, 1.0)?;
        within("relative uncertainty of viscosity ratio", self.u_viscosity_ratio, 0.0, 1.0)?;
        self.check_curves()
    }

    fn check_curves(&self) -> Result<(), Error> {
        let (least, most) = match self.phase {
            Phase::Gas => (1e-7, 1e-2),
            Phase::Liquid => (-10.0, 14.0),
        };
        for [value, slope] in self.viscosity.nodes {
            within("stored viscosity", value, least, most)?;
            within("stored viscosity slope", slope, -10.0, 10.0)?;
        }
        let (least, most) = match self.phase {
            Phase::Gas => (0.0, 10.0),
            Phase::Liquid => (1.0, 1e5),
        };
        for [value, slope] in self.extra.nodes {
            within("stored density or conduction group", value, least, most)?;
            within("stored density slope", slope, -1e5, 1e5)?;
        }
        let pressure_curves = self.viscosity_pressure.iter().chain(self.density_pressure.iter());
        for [value, slope] in pressure_curves.flat_map(|curve| curve.nodes) {
            within("stored pressure coefficient (1/Pa)", value, -1e-4, 1e-4)?;
            within("stored pressure coefficient slope", slope, -1e-4, 1e-4)?;
        }
        Ok(())
    }
}

/// A fluid of the catalogue: its stored table and where its numbers come from.
#[derive(Debug)]
pub struct CatalogueEntry {
    pub(crate) fluid: StoredFluid,
    pub(crate) viscosity_source: &'static str,
    pub(crate) density_source: &'static str,
    pub(crate) scale: f32,
    pub(crate) scale_basis: &'static str,
    pub(crate) residual_viscosity_ppm: f32,
    pub(crate) residual_density_ppm: f32,
    pub(crate) uncertainty_basis: &'static str,
}

impl CatalogueEntry {
    /// The stored table.
    pub const fn fluid(&self) -> &StoredFluid {
        &self.fluid
    }
    /// Publication the viscosity formulation is taken from.
    pub const fn viscosity_source(&self) -> &'static str {
        self.viscosity_source
    }
    /// Publication the equation of state is taken from.
    pub const fn density_source(&self) -> &'static str {
        self.density_source
    }
    /// Factor between the stored viscosity and the formulation's: recommended over formulated at 298.15 K.
    pub const fn scale(&self) -> f32 {
        self.scale
    }
    /// Where the recommended value behind `scale` comes from.
    pub const fn scale_basis(&self) -> &'static str {
        self.scale_basis
    }
    /// Worst relative difference of table and formulation in viscosity, ppm.
    pub const fn residual_viscosity_ppm(&self) -> f32 {
        self.residual_viscosity_ppm
    }
    /// Worst relative difference of table and formulation in density, ppm.
    pub const fn residual_density_ppm(&self) -> f32 {
        self.residual_density_ppm
    }
    /// What the stated uncertainties rest on.
    pub const fn uncertainty_basis(&self) -> &'static str {
        self.uncertainty_basis
    }
}
