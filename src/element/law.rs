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
//! q depends on x, so x is found by Newton's method on the whole law, from the root at an undisturbed entrance: in two
//! steps, or three where the channels are so short that the exponential counts. Worst error of the steps: 0.01 ppm
//! (asserted in `tests/accuracy.rs`).

use super::geometry::Element;
use crate::fluid::properties::PropertiesAt;
use crate::math::Real;

/// Velocity slip coefficient for diffusely reflecting walls (Sharipov 2004).
const SLIP_COEFFICIENT: f64 = 1.016;

/// Newton steps on x where the entrance does not count, and where it does.
const STEPS: [usize; 2] = [2, 3];

/// Rounds of the inverse; each gains a factor of four or more, and two where a gas that loses half its pressure nears the
/// largest flow it can have, see [`Prepared::pressure_drop`].
const INVERSE_ROUNDS: usize = 32;

/// What of the law the element alone decides.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
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
    /// h0.
    pub entrance_height: F,
    /// k X_L, m, and the x up to which the entrance does not count.
    pub entrance_depth: F,
    pub entrance_reach: F,
    /// (c/K1)/X_L and d/X_L, 1/m.
    pub developing_gain: F,
    pub shrinking: F,
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
        let per_scale = if element.length > 0.0 { dh * dh / x_l } else { one };
        let entrance_depth = k / per_scale;
        Self {
            a: F::stored(element.a),
            b_over_a: F::stored(element.b / element.a),
            thermal_expansion: F::stored(element.expansion),
            reference_temperature: F::stored(element.reference_temperature),
            slip: if element.hydraulic_diameter > 0.0 { factor / dh } else { zero },
            expansion: [F::stored(shape.kinetic_energy_factor) / k1, F::stored(shape.thermal_factor) / k1],
            entrance_height: h0,
            entrance_depth,
            entrance_reach: if h0 > zero { entrance_depth * F::of(1.0 / 30.0) } else { F::of(f64::INFINITY) },
            developing_gain: c / k1 * per_scale,
            shrinking: d * per_scale,
            reynolds: F::stored(element.reynolds(1.0)),
        }
    }
}

/// The law at one temperature, line pressure and fluid.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
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
    /// h0.
    pub entrance_height: F,
    /// k X_L, m, and the x up to which the entrance does not count.
    pub entrance_depth: F,
    pub entrance_reach: F,
    /// (c/K1)/X_L and d/X_L, 1/m.
    pub developing_gain: F,
    pub shrinking: F,
    /// 1 for a gas, 0 for a liquid: whether density follows pressure.
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
            let thermal_speed = (F::of(2.0) / fluid.base).root();
            (channels.slip * thermal_speed, kinetic - thermal * fluid.conduction, one)
        } else {
            (zero, zero, zero)
        };
        let shrink = one / stretch;
        Self {
            fluid,
            line_pressure,
            stretch,
            a: channels.a * (shrink * shrink * shrink),
            b_over_a: channels.b_over_a * shrink,
            slip,
            expansion_gain,
            entrance_height: channels.entrance_height,
            entrance_depth: channels.entrance_depth,
            entrance_reach: channels.entrance_reach,
            developing_gain: channels.developing_gain,
            shrinking: channels.shrinking,
            compressible,
        }
    }

    /// Mean pressure, its inverse, and l = ln(p1/p2) as a polynomial in `dP/pm`, fitted so that l is met within 3e-7
    /// until the pressure halves.
    fn pressures(&self, drop: F) -> (F, F, F) {
        let mean = self.line_pressure - drop * F::of(0.5);
        let inverse = F::of(1.0) / mean;
        if !self.fluid.gas {
            return (mean, inverse, F::of(0.0));
        }
        let x = drop.magnitude() * inverse;
        let w = x * x;
        let series = F::of(0.083_341_888_65) + w * (F::of(0.012_385_927_71) + w * F::of(0.002_655_571_43));
        (mean, inverse, x + x * (w * series))
    }

    /// q at x (m, positive) and l.
    pub fn q(&self, x: F, log_ratio: F) -> F {
        let developed = F::of(1.0) + self.expansion_gain * log_ratio;
        self.q_and_fall(x, developed, self.developing_gain * log_ratio).0
    }

    /// q, and how it falls with x: -dq/dln x; of q far from the entrance, and of (c/K1) l/X_L.
    fn q_and_fall(&self, x: F, developed: F, gain: F) -> (F, F) {
        let one = F::of(1.0);
        let shrink = one / (one + self.shrinking * x); // x+/(x+ + d)
        let developing = gain * x * shrink; // c/(x+ + d) l
        let (q, fall) = (developed - developing, developing * shrink);
        // Further down the channels than 30 the entrance has vanished: h0 exp(-30) is 3e-14.
        if x <= self.entrance_reach {
            return (q, fall);
        }
        let depth = self.entrance_depth / x; // k x+
        let entrance = self.entrance_height * (-depth).exponential();
        (q - entrance, fall + entrance * depth)
    }

    /// Forward: the flow that a pressure drop (Pa, signed) drives.
    ///
    /// The first root is taken as `x = x0/(1/2 + sqrt(1/4 + b q x0))`, which neither cancels at small flow nor squares A;
    /// Newton's step on `x + b q x^2 = x0` is `(x0 + b (q - fall) x^2)/(1 + b (2 q - fall) x)`, free of differences of
    /// large terms as well.
    pub fn solve(&self, drop: F) -> Solution<F> {
        let (one, half, quarter) = (F::of(1.0), F::of(0.5), F::of(0.25));
        let (mean, inverse_mean, l) = self.pressures(drop);
        let (mu, [over, under]) = (self.fluid.viscosity(mean), self.fluid.density_ratio(mean));
        let slip = self.slip * mu * inverse_mean;
        let more = one + slip;
        let x0 = over * drop.magnitude() * more / (mu * mu * self.a * under);
        let b = self.b_over_a * more;
        let (developed, gain) = (one + self.expansion_gain * l, self.developing_gain * l);
        let mut q = developed;
        let mut x = x0 / (half + (quarter + b * x0 * q).root());
        let [long, short] = STEPS;
        for _ in 0..if x <= self.entrance_reach { long } else { short } {
            let fall;
            (q, fall) = self.q_and_fall(x, developed, gain);
            let (eps, rest) = (b * x, q - fall);
            x = (x0 + eps * x * rest) / (one + eps * (q + rest));
        }
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
