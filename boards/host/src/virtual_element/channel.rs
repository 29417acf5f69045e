//! One channel, its wall, and the units of a march along it.

use super::section::Section;
use super::substance::{Reference, Substance};

/// What the wall does to the fluid's temperature.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Wall {
    /// The wall has the element's temperature.
    Isothermal,
    /// No heat passes the wall.
    Adiabatic,
    /// The fluid keeps the temperature it enters with, as if its heat capacity were unlimited: no energy equation.
    UnlimitedCapacity,
}

/// One channel and what flows in it.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Channel<'a> {
    pub section: Section,
    /// m.
    pub length: f64,
    pub substance: Substance<'a>,
    pub wall: Wall,
    /// K.
    pub wall_temperature: f64,
    /// Absolute pressure of the upstream plenum, Pa.
    pub pressure: f64,
    /// Temperature of the upstream plenum, K.
    pub temperature: f64,
}

/// Units and constants of one march.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Scales {
    /// Mass flow per area, kg/(m2 s).
    pub flux: f64,
    /// Density of the plenum, kg/m3.
    pub density: f64,
    /// G/rho1, m/s.
    pub speed: f64,
    /// Pressure of the plenum, Pa.
    pub pressure: f64,
    pub reference: Reference,
}

impl Scales {
    /// Absolute pressure at a loss.
    pub fn pressure_at(&self, loss: f64) -> f64 {
        self.pressure - self.density * self.speed * self.speed * loss
    }
}
