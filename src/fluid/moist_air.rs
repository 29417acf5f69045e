//! Water vapour in air: how it lowers viscosity and density.
//!
//! `x_w = RH f p_sv/p`, with p_sv and the enhancement factor f of CIPM-2007 (Picard, Davis, Glaser & Fujii,
//! Metrologia 45 (2008) 149); density scales with the molar mass `1 - x_w (1 - Mw/Ma)`; viscosity with
//! `1 - x_w (m0 + m1 t) - m2 x_w^2`, fitted to Wilke's mixture rule over 0..60 C.

use super::properties::{PropertiesAt, outside};
use super::stored::StoredFluid;
use crate::math::Real;
use crate::quantity::{AbsolutePressure, Density, RelativeHumidity, Temperature, Viscosity};
use crate::status::Refusal;

/// The fluid that carries humidity.
const MOIST_FLUID: &str = "air";

/// Molar mass of water, kg/mol.
const WATER_MOLAR_MASS: f64 = 0.018_015_28;

/// Coldest and warmest air a humidity is accepted for, K.
const TEMPERATURE_RANGE: [f32; 2] = [253.15, 333.15];

/// Largest mole fraction of water vapour accepted.
const MOST_WATER: f64 = 0.25;

/// What a share of water vapour does to dry air.
#[derive(Debug, Clone, Copy)]
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
        }
    }

    /// Moist air: `humidity` a fraction of saturation over water, `temperature` K, `pressure` Pa, `molar_mass` of dry
    /// air in kg/mol.
    pub fn new(humidity: F, temperature: F, pressure: F, molar_mass: F) -> Self {
        let one = F::of(1.0);
        let celsius = temperature - F::of(273.15);
        let water = humidity * saturation_pressure(temperature) * enhancement(celsius, pressure) / pressure;
        let lighter = one - F::of(WATER_MOLAR_MASS) / molar_mass;
        let mass_factor = one - water * lighter;
        let m0 = F::of(VISCOSITY_TERMS[0]) + F::of(VISCOSITY_TERMS[1]) * celsius;
        let m2 = F::of(VISCOSITY_TERMS[2]);
        let viscosity_factor = one - water * (m0 + m2 * water);
        Self {
            water,
            viscosity_factor,
            mass_factor,
            dry_share: (one - water) / mass_factor,
            viscosity_slope: -(m0 + F::of(2.0) * m2 * water) / viscosity_factor,
            density_slope: -lighter / mass_factor,
        }
    }

    /// Properties of the moist air whose dry properties are given.
    pub fn moisten(&self, dry: PropertiesAt<F>) -> PropertiesAt<F> {
        PropertiesAt { mu0: dry.mu0 * self.viscosity_factor, base: dry.base * self.mass_factor, ..dry }
    }
}

/// Moisture of air at `temperature` (K) and `pressure` (Pa), or the reason why it cannot be.
pub(crate) fn moisture<F: Real>(
    fluid: &StoredFluid,
    fraction: F,
    temperature: F,
    pressure: F,
) -> Result<Moisture<F>, Refusal> {
    let [low, high] = TEMPERATURE_RANGE.map(F::stored);
    let possible = fraction >= F::of(0.0) && fraction <= F::of(1.0) && temperature >= low && temperature <= high;
    if !possible || fluid.name() != MOIST_FLUID {
        return Err(Refusal::HUMIDITY_INVALID);
    }
    let moisture = Moisture::new(fraction, temperature, pressure, F::stored(fluid.molar_mass));
    if moisture.water <= F::of(MOST_WATER) { Ok(moisture) } else { Err(Refusal::HUMIDITY_INVALID) }
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

/// m0, m1 (1/K), m2 of the viscosity of moist air; residual against Wilke's rule 0.03 % over 0..60 C, all humidities.
const VISCOSITY_TERMS: [f64; 3] = [0.30, 0.0, 0.0];

/// Saturation pressure over water, Pa: CIPM-2007, equation A1.1.
fn saturation_pressure<F: Real>(t: F) -> F {
    let [a, b, c, d] = [1.237_884_7e-5, -1.912_131_6e-2, 33.937_110_47, -6.343_164_5e3].map(F::of);
    (a * t * t + b * t + c + d / t).exponential()
}

/// Enhancement factor f: CIPM-2007, equation A1.2.
fn enhancement<F: Real>(celsius: F, pressure: F) -> F {
    let [alpha, beta, gamma] = [1.000_62, 3.14e-8, 5.6e-7].map(F::of);
    alpha + beta * pressure + gamma * celsius * celsius
}
