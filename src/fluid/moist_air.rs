//! Water vapour in air: how it lowers viscosity and density.
//!
//! `x_w = RH f p_sv/p`, with p_sv and the enhancement factor f of CIPM-2007 (Picard, Davis, Glaser & Fujii,
//! Metrologia 45 (2008) 149). Density scales with the molar mass `1 - x_w (1 - Mw/Ma)` and
//! `Z = Z_dry + p/T (e1 x_w + (e2 + e3 (T - 293.15)) x_w^2)`, fitted to the real-gas humid air of ASHRAE RP-1485:
//! within 27 ppm of it from 0 to 60 C and of CIPM-2007 from 15 to 27 C. Viscosity scales with
//! `1 - x_w (m0 + m1 (T - 293.15))`, within 0.1 % of the same source to 40 C and 0.25 % to 60 C; sources disagree on
//! m0 (0.10 to 0.51, from memory), so its uncertainty is 0.12 x_w. Air whose humidity is not given is taken as dry and
//! its viscosity as uncertain by 0.2 % at 20 C, 0.6 % at 40 C.

use super::properties::{PropertiesAt, outside};
use super::stored::{Name, StoredFluid};
use crate::math::Real;
use crate::quantity::{AbsolutePressure, Density, RelativeHumidity, Temperature, Viscosity};
use crate::status::Refusal;

/// The fluid that carries humidity.
const MOIST_FLUID: Name = Name::new("air");

/// Molar mass of water, kg/mol.
const WATER_MOLAR_MASS: f64 = 0.018_015_28;

/// Coldest and warmest air a humidity is accepted for, K.
const TEMPERATURE_RANGE: [f64; 2] = [253.15, 333.15];

/// Largest mole fraction of water vapour accepted.
const MOST_WATER: f64 = 0.25;

/// What a share of water vapour does to dry air.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub(crate) struct Moisture<F> {
    /// Mole fraction of water vapour.
    pub water: F,
    /// Moist over dry viscosity.
    pub viscosity_factor: F,
    /// Moist over dry molar mass.
    pub mass_factor: F,
    /// Mass of dry air in a mass of moist air.
    pub dry_share: F,
    /// dln mu/dx_w.
    pub viscosity_slope: F,
    /// dln rho/dx_w.
    pub density_slope: F,
    /// dx_w/dT at constant relative humidity, 1/K.
    pub water_by_temperature: F,
    /// dln mu/dT at constant x_w, beyond that of dry air, 1/K.
    pub viscosity_by_temperature: F,
    /// What is added to the pressure coefficient of Z, 1/Pa.
    pub compressibility: F,
    /// Relative standard uncertainty of viscosity from the water.
    pub u_viscosity: F,
}

impl<F: Real> Moisture<F> {
    /// Dry air.
    pub fn none() -> Self {
        let (zero, one) = (F::of(0.0), F::of(1.0));
        Self {
            water: zero,
            viscosity_factor: one,
            mass_factor: one,
            dry_share: one,
            viscosity_slope: zero,
            density_slope: zero,
            water_by_temperature: zero,
            viscosity_by_temperature: zero,
            compressibility: zero,
            u_viscosity: zero,
        }
    }

    /// Air that nobody measured the humidity of: taken as dry, its viscosity uncertain by any humidity alike (m0 x_w of
    /// saturated air over sqrt(12), rectangular).
    pub fn unknown(temperature: F, pressure: F) -> Self {
        let most = saturation_pressure(temperature) / pressure;
        let most = if most > F::of(MOST_WATER) { F::of(MOST_WATER) } else { most };
        Self { u_viscosity: F::of(VISCOSITY_TERMS[0] / 3.464_101_6) * most, ..Self::none() }
    }

    /// Moist air: `humidity` a fraction of saturation over water, `temperature` K, `pressure` Pa, `molar_mass` of dry
    /// air in kg/mol.
    pub fn new(humidity: F, temperature: F, pressure: F, molar_mass: F) -> Self {
        let one = F::of(1.0);
        let celsius = temperature - F::of(273.15);
        let warmer = temperature - F::of(293.15);
        let water = humidity * saturation_pressure(temperature) * enhancement(celsius, pressure) / pressure;
        let lighter = one - F::of(WATER_MOLAR_MASS) / molar_mass;
        let mass_factor = one - water * lighter;
        let m = F::of(VISCOSITY_TERMS[0]) + F::of(VISCOSITY_TERMS[1]) * warmer;
        let viscosity_factor = one - water * m;
        let [e1, e2, e3] = COMPRESSIBILITY_TERMS.map(F::of);
        Self {
            water,
            viscosity_factor,
            mass_factor,
            dry_share: (one - water) / mass_factor,
            viscosity_slope: -m / viscosity_factor,
            density_slope: -lighter / mass_factor,
            water_by_temperature: water * saturation_exponent(temperature) / temperature,
            viscosity_by_temperature: -water * F::of(VISCOSITY_TERMS[1]) / viscosity_factor,
            compressibility: water * (e1 + water * (e2 + e3 * warmer)) / temperature,
            u_viscosity: F::of(U_VISCOSITY) * water,
        }
    }

    /// Properties of the moist air whose dry properties are given.
    pub fn moisten(&self, dry: PropertiesAt<F>) -> PropertiesAt<F> {
        let [b, c, d] = dry.z;
        PropertiesAt {
            mu0: dry.mu0 * self.viscosity_factor,
            viscosity_slope: dry.viscosity_slope * self.viscosity_factor,
            base: dry.base * self.mass_factor,
            z: [b + self.compressibility, c, d],
            ..dry
        }
    }
}

/// Moisture of air at `temperature` (K) and `pressure` (Pa), or the reason why it cannot be.
fn moisture<F: Real>(fluid: &StoredFluid, fraction: F, temperature: F, pressure: F) -> Result<Moisture<F>, Refusal> {
    let [low, high] = TEMPERATURE_RANGE.map(F::of);
    let possible = fraction >= F::of(0.0) && fraction <= F::of(1.0) && temperature >= low && temperature <= high;
    if !possible || fluid.name != MOIST_FLUID {
        return Err(Refusal::HUMIDITY_INVALID);
    }
    let moisture = Moisture::new(fraction, temperature, pressure, F::stored(fluid.molar_mass));
    if moisture.water <= F::of(MOST_WATER) { Ok(moisture) } else { Err(Refusal::HUMIDITY_INVALID) }
}

/// Moisture of a fluid whose humidity is given or not, at `temperature` (K) and `pressure` (Pa).
///
/// # Errors
/// Refuses a humidity that is not 0 to 1, not of air, or of air outside -20 to 60 C.
pub(crate) fn moisture_of<F: Real>(
    fluid: &StoredFluid,
    humidity: Option<F>,
    temperature: F,
    pressure: F,
) -> Result<Moisture<F>, Refusal> {
    match humidity {
        Some(fraction) => moisture(fluid, fraction, temperature, pressure),
        None if fluid.name == MOIST_FLUID => Ok(Moisture::unknown(temperature, pressure)),
        None => Ok(Moisture::none()),
    }
}

impl StoredFluid {
    /// Viscosity and density together, of air with its humidity where one is given.
    ///
    /// # Errors
    /// Refuses what is not finite or outside the table, and a humidity that is not 0 to 1, not of air, or of air outside
    /// -20 to 60 C.
    ///
    /// ```
    /// use evenbore::fluid::catalogue::AIR;
    /// use evenbore::quantity::{AbsolutePressure, RelativeHumidity, Temperature};
    /// let (t, p) = (Temperature::from_celsius(20.0), AbsolutePressure::from_kilopascals(101.325));
    /// let (_, dry) = AIR.fluid().properties(t, p, None)?;
    /// let (_, moist) = AIR.fluid().properties(t, p, Some(RelativeHumidity::from_percent(50.0)))?;
    /// let lighter = 1.0 - moist.as_kilograms_per_cubic_metre() / dry.as_kilograms_per_cubic_metre();
    /// assert!((lighter - 0.0044).abs() < 1e-4);
    /// # Ok::<(), evenbore::status::Refusal>(())
    /// ```
    pub fn properties(
        &self,
        temperature: Temperature,
        pressure: AbsolutePressure,
        humidity: Option<RelativeHumidity>,
    ) -> Result<(Viscosity, Density), Refusal> {
        let (t, p) = (temperature.as_kelvin(), pressure.as_pascals());
        let refusal = outside(self, t, p);
        if !refusal.is_empty() {
            return Err(refusal);
        }
        let dry = PropertiesAt::new(self, t);
        let at = match humidity {
            Some(humidity) => moisture(self, humidity.as_fraction(), t, p)?.moisten(dry),
            None => dry,
        };
        Ok((Viscosity::from_pascal_seconds(at.viscosity(p)), Density::from_kilograms_per_cubic_metre(at.density(p))))
    }
}

/// m0, m1 (1/K) of the viscosity of moist air.
const VISCOSITY_TERMS: [f64; 2] = [0.304_709_4, 0.002_095_645];
/// Standard uncertainty of m0.
const U_VISCOSITY: f64 = 0.12;
/// e1, e2 (K/Pa), e3 (1/Pa) of the compressibility of moist air.
const COMPRESSIBILITY_TERMS: [f64; 3] = [-4.981_153e-6, -1.398_023e-4, 1.454_626e-6];

/// Coefficients of the saturation pressure, by power of temperature 2 to -1.
const SATURATION: [f64; 4] = [1.237_884_7e-5, -1.912_131_6e-2, 33.937_110_47, -6.343_164_5e3];

/// Saturation pressure over water, Pa: CIPM-2007, equation A1.1.
fn saturation_pressure<F: Real>(t: F) -> F {
    let [a, b, c, d] = SATURATION.map(F::of);
    (a * t * t + b * t + c + d / t).exponential()
}

/// dln p_sv/dln T.
fn saturation_exponent<F: Real>(t: F) -> F {
    let [a, b, _, d] = SATURATION.map(F::of);
    (a + a) * t * t + b * t - d / t
}

/// Enhancement factor f: CIPM-2007, equation A1.2.
fn enhancement<F: Real>(celsius: F, pressure: F) -> F {
    let [alpha, beta, gamma] = [1.000_62, 3.14e-8, 5.6e-7].map(F::of);
    alpha + beta * pressure + gamma * celsius * celsius
}
