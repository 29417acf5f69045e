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

use crate::error::{Error, Limit, all_within, within};
use crate::math::Real;
use crate::quantity::{AbsolutePressure, Temperature};

/// Nodes of a viscosity curve: 32 segments.
pub const FINE_NODES: usize = 33;

/// Nodes of every other curve: 8 segments.
pub const COARSE_NODES: usize = 9;

/// Kelvin over which a viscosity ratio's uncertainty grows from nothing to its stated value.
const RATIO_SPAN: f32 = 50.0;

/// Viscosity whose logarithm a liquid's table counts from, Pa s.
pub(crate) const LIQUID_SCALE: f64 = 0.01;

/// Longest fluid name, in bytes.
pub const NAME_LENGTH: usize = 24;

const BAD_NAME: Error = Error::BadText { field: "fluid name", most: NAME_LENGTH };

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
        let name = Self::new(text);
        name.check()?;
        if name.text().len() == text.len() { Ok(name) } else { Err(BAD_NAME) }
    }

    /// Accepts a name that is not empty and printable ASCII up to its padding.
    pub(crate) fn check(&self) -> Result<(), Error> {
        let printable = self.text().iter().all(|c| (b' '..=b'~').contains(c));
        if self.text().is_empty() || !printable { Err(BAD_NAME) } else { Ok(()) }
    }

    /// The name as text.
    pub fn as_str(&self) -> &str {
        core::str::from_utf8(self.text()).unwrap_or("")
    }

    /// The bytes before the padding.
    fn text(&self) -> &[u8] {
        let length = self.bytes.iter().position(|&c| c == 0).unwrap_or(NAME_LENGTH);
        self.bytes.get(..length).unwrap_or(&[])
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

    /// The place at `share` of the way from the first node to the last, 0 to 1.
    pub(crate) fn place<F: Real>(share: F) -> Place<F> {
        let (segment, along) = F::along(share, Self::SEGMENTS as u32);
        Place { segment, along }
    }

    /// Value at a place.
    pub(crate) fn value<F: Real>(&self, place: &Place<F>) -> F {
        F::cubic(self.ends(place), &place.along)
    }

    /// Slope at a place, per segment: between the nodes' own, which is enough for an uncertainty.
    pub(crate) fn slope<F: Real>(&self, place: &Place<F>) -> F {
        F::slope(self.ends(place), &place.along)
    }

    /// Values and slopes at the ends of a place's segment.
    fn ends<F: Real>(&self, place: &Place<F>) -> [&[f32; 2]; 2] {
        match (self.nodes.get(place.segment), self.nodes.get(place.segment + 1)) {
            (Some(start), Some(end)) => [start, end],
            _ => [&[0.0; 2]; 2], // not reached: a place's segment is at most NODES - 2
        }
    }
}

/// A place on every curve of the same number of nodes.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Place<F: Real> {
    segment: usize,
    along: F::Along,
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

    /// Relative standard uncertainty of the viscosity at 25 C.
    pub const fn u_viscosity(&self) -> f32 {
        self.u_viscosity
    }

    /// Relative standard uncertainty of the viscosity at a temperature: that at 25 C, and that of the ratio to it, which
    /// grows from nothing to its stated value over 50 K (a convention of this library).
    ///
    /// ```
    /// use evenbore::{fluid::catalogue::HELIUM, quantity::Temperature};
    /// let helium = HELIUM.fluid();
    /// let (near, far) = (Temperature::from_celsius(25.0), Temperature::from_celsius(75.0));
    /// assert!((helium.u_viscosity_at(near) / helium.u_viscosity() - 1.0).abs() < 1e-5);
    /// assert!(helium.u_viscosity_at(far) > 1.3 * helium.u_viscosity());
    /// ```
    pub fn u_viscosity_at(&self, temperature: Temperature) -> f32 {
        let ratio = self.u_ratio_between(temperature, Temperature::from_celsius(25.0));
        (self.u_viscosity * self.u_viscosity + ratio * ratio).quick_root()
    }

    /// Relative standard uncertainty of the ratio of viscosities at two temperatures.
    pub(crate) fn u_ratio_between(&self, one: Temperature, other: Temperature) -> f32 {
        let away = (one.as_kelvin() - other.as_kelvin()).abs() / RATIO_SPAN;
        self.u_viscosity_ratio * if away < 1.0 { away } else { 1.0 }
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
        const LIMITS: [Limit; 5] = [
            ("molar mass (kg/mol)", 1e-3, 10.0),
            ("lowest table temperature (K)", 1.0, 2000.0),
            ("lowest table pressure (Pa)", 0.0, 1e9),
            ("relative uncertainty of viscosity", 0.0, 1.0),
            ("relative uncertainty of viscosity ratio", 0.0, 1.0),
        ];
        let [t_low, t_high] = self.temperature_range;
        let [p_low, p_high] = self.pressure_range;
        all_within(&LIMITS, [self.molar_mass, t_low, p_low, self.u_viscosity, self.u_viscosity_ratio])?;
        within("highest table temperature (K)", t_high, t_low + 1.0, 3000.0)?;
        within("highest table pressure (Pa)", p_high, p_low + 1.0, 1e9)?;
        self.check_curves()
    }

    fn check_curves(&self) -> Result<(), Error> {
        const GAS: [[Limit; 2]; 2] = [
            [("stored viscosity", 1e-7, 1e-2), ("stored viscosity slope", -5e-3, 5e-3)],
            [("stored conduction group", 0.0, 10.0), ("stored conduction group slope", -10.0, 10.0)],
        ];
        const LIQUID: [[Limit; 2]; 2] = [
            [("stored viscosity", -10.0, 14.0), ("stored viscosity slope", -10.0, 10.0)],
            [("stored density", 1.0, 1e5), ("stored density slope", -1e4, 1e4)],
        ];
        const PRESSURE: [Limit; 2] =
            [("stored pressure coefficient (1/Pa)", -1e-4, 1e-4), ("stored pressure coefficient slope", -1e-4, 1e-4)];
        let [viscosity, extra] = match self.phase {
            Phase::Gas => &GAS,
            Phase::Liquid => &LIQUID,
        };
        nodes_within(viscosity, &self.viscosity.nodes)?;
        nodes_within(extra, &self.extra.nodes)?;
        // A curve stays positive between nodes whose slope, per segment, is no larger than their value.
        if matches!(self.phase, Phase::Gas) {
            no_steeper_than_high("stored viscosity slope", &self.viscosity.nodes)?;
        } else {
            no_steeper_than_high("stored density slope", &self.extra.nodes)?;
        }
        for curve in self.viscosity_pressure.iter().chain(&self.density_pressure) {
            nodes_within(&PRESSURE, &curve.nodes)?;
        }
        let [_, highest] = self.pressure_range;
        series_within("viscosity over its value at no pressure", &self.viscosity_pressure, highest)?;
        series_within("Z or density over its value at no pressure", &self.density_pressure, highest)
    }
}

fn no_steeper_than_high(field: &'static str, nodes: &[[f32; 2]]) -> Result<(), Error> {
    nodes.iter().try_for_each(|[value, slope]| within(field, *slope, -value, *value).map(|_| ()))
}

/// Share by which a series in pressure may change its property up to the highest pressure, between nodes too.
const SERIES_LIMIT: f32 = 0.5;

fn series_within(field: &'static str, curves: &[Curve<COARSE_NODES>], highest: f32) -> Result<(), Error> {
    for node in 0..COARSE_NODES {
        let mut power = 1.0;
        let mut change = 0.0;
        for [value, slope] in curves.iter().filter_map(|curve| curve.nodes.get(node)) {
            power *= highest;
            change += (value.abs() + 0.3 * slope.abs()) * power;
        }
        within(field, change, 0.0, SERIES_LIMIT)?;
    }
    Ok(())
}

#[inline(never)] // as `all_within`
fn nodes_within(limits: &[Limit; 2], nodes: &[[f32; 2]]) -> Result<(), Error> {
    nodes.iter().try_for_each(|node| all_within(limits, *node))
}

/// A fluid of the catalogue: its stored table and where its numbers come from.
#[derive(Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
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
