//! The law of a laminar flow element, forward and inverse, one kernel for both precisions.
//!
//! With x = mdot/mu and F = rho_m dP/mu_m^2, both at the mean pressure `pm = p1 - dP/2`,
//!
//! `A' x + B' x^2 = F` (Hagenbach 1860 and Boussinesq 1891 for the second term; the gas form integrates rho dP),
//!
//! - `A' = A (1 + alpha dT)^-3/(1 + s)`: thermal expansion; slip `s = (fRe/2) xi/Dh`,
//!   `xi = sigma_p mu sqrt(2 R T/M)/pm`, sigma_p = 1.016 (Sharipov 2004, diffuse walls);
//! - `B' = B (1 + alpha dT)^-4 q`, `q = 1 - h0 exp(-k x+) + (Cexp - c/(x+ + d))/K1 l`: developing flow and expansion,
//!   `l = ln(p1/p2)`, `x+ = X_L/x`, `X_L = a L/Dh^2`;
//! - `Cexp = alpha_ke - kt (1 + n/3) Pr R/(M cp)`: van den Berg, ten Seldam & van der Gulik (1993), and the gas being
//!   colder than the wall.
//!
//! q depends on x, so it is found by Newton's method in a fixed number of steps: two, always, the same for every
//! reading. Worst error of the two steps: 0.2 ppm, in tubes of L/D 50 near Re 1800 where the gas loses 45 % of its
//! pressure.

use super::geometry::Element;
use crate::fluid::properties::PropertiesAt;
use crate::math::Real;

/// Velocity slip coefficient for diffusely reflecting walls (Sharipov 2004).
const SLIP_COEFFICIENT: f64 = 1.016;

/// Newton steps on q.
const UPDATES: usize = 2;

/// Rounds of the inverse; each gains a factor of four or more, and two where a gas that loses half its pressure nears the
/// largest flow it can have, see [`Prepared::pressure_drop`].
const INVERSE_ROUNDS: usize = 32;

/// What of the law the element alone decides.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Channels<F> {
    /// A at the reference temperature, 1/m3.
    pub a: F,
    /// B/A at the reference temperature, 1/m.
    pub b_over_a: F,
    /// Linear thermal expansion, 1/K.
    pub thermal_expansion: F,
    /// K.
    pub reference_temperature: F,
    /// Slip over `mu v/pm`, v the thermal speed, 1/m; zero when the channels are unknown.
    pub slip: F,
    /// alpha_ke/K1 and kt/K1.
    pub expansion: [F; 2],
    /// h0, k, c/K1, d.
    pub entrance: [F; 4],
    /// 1/X_L, 1/m.
    pub inverse_entrance_scale: F,
    /// Reynolds number over x, 1/m.
    pub reynolds: F,
}

impl<F: Real> Channels<F> {
    /// Takes from the element what the law needs of it.
    pub fn new(element: &Element) -> Self {
        let shape = &element.constants;
        let (one, zero) = (F::of(1.0), F::of(0.0));
        let dh = F::stored(element.hydraulic_diameter);
        let k1 = F::stored(shape.kinetic_loss);
        let factor = F::of(SLIP_COEFFICIENT * 0.5) * F::stored(shape.friction_reynolds);
        let [h0, k, c, d] = shape.entrance.map(F::stored);
        let x_l = F::stored(element.open_area) * F::stored(element.length);
        Self {
            a: F::stored(element.a),
            b_over_a: F::stored(element.b / element.a),
            thermal_expansion: F::stored(element.expansion),
            reference_temperature: F::stored(element.reference_temperature),
            slip: if element.hydraulic_diameter > 0.0 { factor / dh } else { zero },
            expansion: [F::stored(shape.kinetic_energy_factor) / k1, F::stored(shape.thermal_factor) / k1],
            entrance: [h0, k, c / k1, d],
            inverse_entrance_scale: if element.length > 0.0 { dh * dh / x_l } else { one },
            reynolds: F::stored(element.reynolds(1.0)),
        }
    }
}

/// The law at one temperature, line pressure and fluid.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Prepared<F> {
    /// Fluid properties at the element's temperature.
    pub fluid: PropertiesAt<F>,
    /// Line pressure p1, Pa.
    pub line_pressure: F,
    /// 1 + alpha dT: the element's linear growth.
    pub stretch: F,
    /// A (1 + alpha dT)^-3, 1/m3.
    pub a: F,
    /// (B/A)/(1 + alpha dT), 1/m.
    pub b_over_a: F,
    /// s pm/mu, Pa/(Pa s): zero for a liquid.
    pub slip: F,
    /// Cexp/K1: zero for a liquid.
    pub expansion_gain: F,
    /// h0, k, c/K1, d.
    pub entrance: [F; 4],
    /// 1/X_L, 1/m.
    pub inverse_entrance_scale: F,
    /// 1 for a gas, 0 for a liquid: whether the logarithm of the pressure ratio counts.
    pub compressible: F,
}

/// What the law says at one pressure drop.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Solution<F> {
    /// x = mdot/mu, m, with the sign of the pressure drop.
    pub x: F,
    /// Mean pressure, Pa.
    pub mean_pressure: F,
    /// Viscosity at the mean pressure, Pa s.
    pub viscosity: F,
    /// Slip s.
    pub slip: F,
    /// l = ln(p1/p2), taken positive.
    pub log_ratio: F,
    /// q at the solution.
    pub q: F,
    /// eps = B' x/A', the kinetic share over the viscous one.
    pub kinetic_share: F,
}

impl<F: Real> Prepared<F> {
    /// Prepares the law for `channels` carrying `fluid` at a line pressure (Pa).
    ///
    /// The thermal speed is `v = sqrt(2 R T/M)`, and a gas has `base = M/(R T)`.
    pub fn new(channels: &Channels<F>, fluid: PropertiesAt<F>, line_pressure: F) -> Self {
        let (one, zero) = (F::of(1.0), F::of(0.0));
        let growth = channels.thermal_expansion * (fluid.temperature - channels.reference_temperature);
        let stretch = one + growth;
        let [kinetic, thermal] = channels.expansion;
        let (slip, expansion_gain, compressible) = if fluid.gas {
            let thermal_speed = (F::of(2.0) / fluid.base).quick_root();
            (channels.slip * thermal_speed, kinetic - thermal * fluid.conduction, one)
        } else {
            (zero, zero, zero)
        };
        Self {
            fluid,
            line_pressure,
            stretch,
            a: channels.a / (stretch * stretch * stretch),
            b_over_a: channels.b_over_a / stretch,
            slip,
            expansion_gain,
            entrance: channels.entrance,
            inverse_entrance_scale: channels.inverse_entrance_scale,
            compressible,
        }
    }

    /// Mean pressure, its inverse, and l = ln(p1/p2) by its series in `dP/pm` (five terms: 2e-6 of l where the pressure
    /// halves).
    fn pressures(&self, drop: F) -> (F, F, F) {
        let mean = self.line_pressure - drop * F::of(0.5);
        let inverse = F::of(1.0) / mean;
        let x = drop.magnitude() * inverse;
        let w = x * x;
        let series = F::of(1.0 / 12.0) + w * (F::of(1.0 / 80.0) + w * (F::of(1.0 / 448.0) + w * F::of(1.0 / 2304.0)));
        (mean, inverse, self.compressible * (x + x * (w * series)))
    }

    /// q at x (m, positive) and l.
    pub fn q(&self, x: F, log_ratio: F) -> F {
        self.q_and_fall(x, log_ratio).0
    }

    /// q, and how it falls with x: -dq/dln x.
    fn q_and_fall(&self, x: F, log_ratio: F) -> (F, F) {
        let [h0, k, c, d] = self.entrance;
        let (zero, one) = (F::of(0.0), F::of(1.0));
        let y = (x * self.inverse_entrance_scale).at_least(F::of(1e-6)); // 1/x+
        // Further down the channels than this the entrance has vanished: h0 exp(-30) is 3e-14.
        let depth = k / y;
        let entrance = if depth > F::of(30.0) { zero } else { h0 * (-depth).exponential() };
        let shrink = one / (one + d * y);
        let developing = c * y * shrink * log_ratio; // c/(x+ + d) l
        (one - entrance + self.expansion_gain * log_ratio - developing, entrance * depth + developing * shrink)
    }

    /// Forward: the flow that a pressure drop (Pa, signed) drives.
    ///
    /// The root is taken as `x = 2 x0/(1 + sqrt(1 + 4 b x0))`, which neither cancels at small flow nor squares A.
    pub fn solve(&self, drop: F) -> Solution<F> {
        let (one, two, four) = (F::of(1.0), F::of(2.0), F::of(4.0));
        let (mean, inverse_mean, l) = self.pressures(drop);
        let (mu, rho) = (self.fluid.viscosity(mean), self.fluid.density(mean));
        let slip = self.slip * mu * inverse_mean;
        let x0 = rho * drop.magnitude() * (one + slip) / (mu * mu * self.a);
        let b = self.b_over_a * (one + slip);
        let mut q = one + self.expansion_gain * l;
        let root = |q: F| two * x0 / (one + (one + four * (b * x0) * q).root());
        for _ in 0..UPDATES {
            let x = root(q);
            let eps = b * q * x;
            let (target, fall) = self.q_and_fall(x, l);
            // Newton's step on target(q) = q, with dln x/dln q = -eps/(1 + 2 eps).
            let stiffness = q * (one + two * eps);
            q = q + (target - q) * stiffness / (stiffness - fall * eps);
        }
        let x = root(q);
        let signed = if drop < F::of(0.0) { -x } else { x };
        Solution { x: signed, mean_pressure: mean, viscosity: mu, slip, log_ratio: l, q, kinetic_share: b * q * x }
    }

    /// Inverse: the pressure drop (Pa, signed) that drives a mass flow (kg/s, signed); absent when no outlet pressure
    /// is low enough.
    ///
    /// Density makes `(p1 - dP/2) dP` the natural unknown of a gas, which is solved for in closed form; viscosity,
    /// slip, l and q follow by substitution in a fixed number of rounds.
    pub fn pressure_drop(&self, mass_flow: F) -> Option<F> {
        let (zero, one, two) = (F::of(0.0), F::of(1.0), F::of(2.0));
        let flow = mass_flow.magnitude();
        let sign = if mass_flow < zero { -one } else { one };
        let p1 = self.line_pressure;
        let mut drop = zero;
        for _ in 0..INVERSE_ROUNDS {
            let (mean, inverse_mean, l) = self.pressures(sign * drop);
            let (mu, rho) = (self.fluid.viscosity(mean), self.fluid.density(mean));
            let slip = self.slip * mu * inverse_mean;
            let x = flow / mu;
            let head = self.a / (one + slip) * x * (one + self.b_over_a * (one + slip) * self.q(x, l) * x);
            let need = head * mu / rho * mu; // dP were density that of the mean pressure
            let inside = p1 * p1 - sign * self.compressible * two * need * mean;
            if inside <= zero || !inside.finite() {
                return None;
            }
            drop = if self.fluid.gas { two * need * mean / (p1 + inside.root()) } else { need };
        }
        Some(sign * drop)
    }
}
