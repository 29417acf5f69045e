//! Standard uncertainty of a flow, in closed form, in three parts (JCGM 100:2008, section 5).
//!
//! With eps the kinetic share, D = 1 + 2 eps + eps dln q/dln x, gam = (1 + eps)/D and s' = s/(1 + s), the law differentiated gives
//!
//! - `dln Q/dln dP = gam (1 - z dP/2pm) - eps dq/dl |dP|/(p2 q D)`
//! - `dln Q/dT = (gam - 1) dln rho/dT - n/(T D) + (3 + 4 eps) alpha/D + s' (n + 1/2)/(T D)`
//! - `dln Q/dln p1 = z (gam p1/pm - 1) - s' p1/(pm D) + eps dq/dl |dP|/(p2 q D) - k1 p1/D` (gas)
//! - `dln Q/dln mu = -1/D`, `dln Q/dln A = -1/D`, `dln Q/dB = -q x (1 + s)/(A (1 + alpha dT) D)`
//! - moist air: `dln Q/dx_w = (gam - 1) dln rho/dx_w - dln mu/dx_w/D`, and at constant relative humidity x_w follows
//!   temperature (6 % per kelvin) and the inverse of line pressure
//!
//! for the volume flow Q at line conditions, z = dln rho/dln p. Against numerical derivatives: within 0.25 % of the largest
//! of them, each taken per relative change, and temperature within 1.6 %, reached by carbon dioxide (asserted in
//! `tests/accuracy_uncertainty.rs` up to a third of the line pressure lost; left out is how Z and Cexp change with
//! temperature).

use crate::calibration::{Cause, Quality};
use crate::element::law::Solution;
use crate::math::Real;
use crate::reading::SensorUncertainty;
use crate::state::State;

/// Relative standard uncertainty of a flow in three parts.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Uncertainty {
    /// From the fit of the calibration (type A).
    pub fit: f32,
    /// From what the calibration's points shared, and from fluid data.
    pub common: f32,
    /// From the sensors at use.
    pub sensors: f32,
}

impl Uncertainty {
    /// The combined relative standard uncertainty: root of the sum of squares.
    ///
    /// ```
    /// let parts = evenbore::uncertainty::Uncertainty { fit: 0.002, common: 0.003, sensors: 0.006 };
    /// assert!((parts.combined() - 0.007).abs() < 1e-8);
    /// ```
    pub fn combined(&self) -> f32 {
        (self.fit * self.fit + self.common * self.common + self.sensors * self.sensors).root()
    }
}

/// Relative changes of volume flow at line conditions for unit changes of what it depends on.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Sensitivities {
    /// Per relative change of pressure drop.
    pub pressure_drop: f32,
    /// Per kelvin.
    pub temperature: f32,
    /// Per relative change of line pressure.
    pub line_pressure: f32,
    /// Per relative change of viscosity; the same for A.
    pub viscosity: f32,
    /// Per unit of relative humidity.
    pub relative_humidity: f32,
    /// q x (1 + s)/(1 + alpha dT), m: what multiplies B/A.
    pub x: f32,
}

/// Differentiates the law at a solution.
pub(crate) fn sensitivities(state: &State<f32>, at: &Solution<f32>, drop: f32, humidity: f32) -> Sensitivities {
    let (law, fluid) = (&state.law, &state.law.fluid);
    let eps = at.kinetic_share;
    let per_d = 1.0 / (1.0 + 2.0 * eps - eps * at.fall / at.q);
    let gam = (1.0 + eps) * per_d;
    let slip = at.slip / (1.0 + at.slip) * per_d;
    let t = fluid.temperature;
    let n = fluid.exponent();
    let per_mean = 1.0 / at.mean_pressure;
    let stretch = law.line_pressure * per_mean;
    let per_log = drop.magnitude() / (law.line_pressure - drop); // dl/dln|dP|
    let gas = law.compressible;
    let expansion = gas * eps * law.q_by_log(at.x.magnitude()) * per_log / at.q * per_d;
    let z = fluid.density_exponent(at.mean_pressure);
    let moist = &state.moisture;
    let per_water = (gam - 1.0) * moist.density_slope - moist.viscosity_slope * per_d;
    let water_per_humidity = if humidity > 0.0 { moist.water / humidity } else { 0.0 };
    Sensitivities {
        pressure_drop: gam * (1.0 - z * 0.5 * drop * per_mean) - expansion,
        temperature: (gam - 1.0) * fluid.expansion()
            + (slip * (n + 0.5) - n * per_d) / t
            + (3.0 + 4.0 * eps) * state.element_expansion * per_d
            + per_water * moist.water_by_temperature
            - moist.viscosity_by_temperature * per_d,
        line_pressure: z * (gam * stretch - 1.0) + gas * (expansion - slip * stretch)
            - fluid.k[0] * law.line_pressure * per_d
            - per_water * moist.water,
        viscosity: -per_d,
        relative_humidity: per_water * water_per_humidity,
        x: at.x.magnitude() * at.q * (1.0 + at.slip) / law.stretch,
    }
}

/// Relative variance of the pressure drop; below a thousandth of its absolute part it stays at 1e6, so that it is
/// finite through zero.
fn relative_variance_of_drop(sensors: &SensorUncertainty, drop: f32) -> f32 {
    let floor = drop.magnitude().at_least(1e-3 * sensors.pressure_drop_pa).at_least(f32::MIN_POSITIVE);
    let (absolute, relative) = (sensors.pressure_drop_pa / floor, sensors.pressure_drop_rel);
    absolute * absolute + relative * relative
}

/// Part of the sensors.
pub(crate) fn sensor_part(s: &Sensitivities, sensors: &SensorUncertainty, drop: f32, line_pressure: f32) -> f32 {
    let p = sensors.line_pressure_pa / line_pressure;
    let parts = [
        s.temperature * sensors.temperature_k,
        s.line_pressure * p,
        s.line_pressure * sensors.line_pressure_rel,
        s.relative_humidity * sensors.relative_humidity,
    ];
    let of_drop = s.pressure_drop * s.pressure_drop * relative_variance_of_drop(sensors, drop);
    parts.iter().fold(of_drop, |sum, u| sum + u * u).quick_root()
}

/// Part of the fit.
pub(crate) fn fit_part(s: &Sensitivities, quality: &Quality) -> f32 {
    let (u_a, u_b) = (quality.u_a, quality.u_b_m * s.x);
    let variance = u_a * u_a + u_b * u_b + 2.0 * quality.correlation * u_a * u_b;
    variance.at_least(0.0).quick_root() * s.viscosity.magnitude()
}

/// Part of what was common, and of fluid data. `u_viscosity` holds the parts of the viscosity at use that do not cancel
/// against the calibration; `same_fluid` drops the calibration's own viscosity part, which then cancels.
pub(crate) fn common_part(s: &Sensitivities, quality: &Quality, u_viscosity: [f32; 2], same_fluid: bool) -> f32 {
    let of_fluids = u_viscosity.iter().fold(0.0, |sum, u| sum + u * u);
    let variance = quality
        .common
        .iter()
        .filter(|part| !(same_fluid && part.cause == Cause::Viscosity))
        .map(|part| part.effect_a + part.effect_b_m * s.x)
        .fold(of_fluids, |sum, u| sum + u * u);
    variance.quick_root() * s.viscosity.magnitude()
}
