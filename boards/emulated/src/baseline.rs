//! What a maker writes by hand: the simple model in single precision, as it would stand in C.
//!
//! Viscosity by a power law, ideal gas, A and B of the element; no entrance, no expansion, no slip, no checks, no
//! status, no uncertainty.

/// Constants of the model.
pub struct Simple {
    /// A, 1/m3.
    pub a: f32,
    /// B, 1/m4.
    pub b: f32,
    /// Viscosity at 300 K, Pa s.
    pub mu: f32,
    /// Exponent of viscosity in temperature.
    pub exponent: f32,
    /// Specific gas constant, J/(kg K).
    pub gas_constant: f32,
}

impl Simple {
    /// Volume flow at line conditions and at 0 C and 101.325 kPa, m3/s.
    pub fn flow(&self, drop: f32, t: f32, p: f32) -> [f32; 2] {
        let mu = self.mu * libm::powf(t / 300.0, self.exponent);
        let mean = p - 0.5 * drop;
        let rho = mean / (self.gas_constant * t);
        let am = self.a * mu;
        let q = (-am + libm::sqrtf(am * am + 4.0 * self.b * rho * drop)) / (2.0 * self.b * rho);
        [q * mean / p, q * mean / 101_325.0 * (273.15 / t)]
    }
}
