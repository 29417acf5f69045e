//! The march along one channel: at each position momentum, mass and energy together fix velocity, temperature and the
//! one pressure of the section.
//!
//! Boundary-layer form (Prandtl 1904) in the share s of the open area, with m = rho u, V the mass flux across s,
//! `g(s)` from [`Section::spreading`](super::section::Section::spreading) and H = h + u^2/2:
//!
//! - mass `dm/dz + dV/ds = 0`, `int m ds = 1`;
//! - momentum `d(m u)/dz + d(V u)/ds = -dp/dz + d(g mu du/ds)/ds`;
//! - energy `d(m H)/dz + d(V H)/ds = d(g mu u du/ds + g k dT/ds)/ds`.
//!
//! Weak form on the grid, so that momentum and energy are conserved to rounding; wall: slip, and a temperature jump or
//! no heat. Backward differences of third order along z; Newton's method at each position.

use super::channel::{Channel, Scales, Wall};
use super::differences::{derivative, extrapolation, positions};
use super::grid::Grid;
use super::inlet::{Entrance, Place, enter};
use super::profile::{Carried, Profile};
use super::refused::Refused;
use super::step::{Past, Step};
use nalgebra::DVector;

/// Mean velocity over the speed of sound up to which the solution is given.
pub(crate) const MACH_LIMIT: f64 = 0.3;
/// Positions before the newest that a difference reaches back to: three stay stable on steps that grow by 1.5.
const ORDER: usize = 3;

/// How finely the channel is resolved.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Resolution {
    /// Degree of the polynomial across the channel.
    pub degree: usize,
    /// Length of the first step, in units of the hydraulic diameter times the Reynolds number.
    pub first_step: f64,
    /// Ratio of successive steps.
    pub growth: f64,
    /// Longest step, as a share of the length.
    pub longest_step: f64,
}

impl Resolution {
    /// Enough for 20 ppm of the flow (shown by `tests/virtual_element.rs`).
    pub const FINE: Self = Self { degree: 24, first_step: 1e-7, growth: 1.1, longest_step: 1.0 / 40.0 };
    /// A first approach.
    pub const COARSE: Self = Self { degree: 24, first_step: 1e-6, growth: 1.3, longest_step: 0.1 };

    /// Twice the points and half the steps.
    pub fn doubled(self) -> Self {
        Self {
            degree: 2 * self.degree,
            first_step: 0.1 * self.first_step,
            growth: self.growth.sqrt(),
            longest_step: 0.5 * self.longest_step,
        }
    }
}

/// Where the march passed.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Station {
    /// Distance from the inlet, m.
    pub position: f64,
    /// Absolute pressure, Pa.
    pub pressure: f64,
    /// Mixed mean temperature, K.
    pub temperature: f64,
    /// Mixed mean total enthalpy above that of the plenum, J/kg.
    pub enthalpy_rise: f64,
    /// Mach number of the mean velocity; 0 for a liquid.
    pub mach: f64,
}

impl Channel<'_> {
    /// Marches a mass flow (kg/s, positive) from the plenum to the outlet and reports every position.
    ///
    /// # Errors
    /// The flow cannot be driven, chokes, or leaves the fluid's table.
    pub fn march(&self, mass_flow: f64, grid: &Grid, resolution: &Resolution) -> Result<Vec<Station>, Refused> {
        self.substance.check(self.temperature, self.pressure)?;
        self.substance.check(self.wall_temperature, self.pressure)?;
        let reference = self.substance.reference(self.wall_temperature, self.pressure);
        let state = self.substance.state(self.temperature, self.pressure, &reference);
        let plenum = Place { pressure: self.pressure, temperature: self.temperature, state };
        let flux = mass_flow / self.section.area();
        let scales =
            Scales { flux, density: state.density, speed: flux / state.density, pressure: self.pressure, reference };
        let heat = if self.wall == Wall::UnlimitedCapacity { Entrance::Isothermal } else { Entrance::Isentropic };
        let entered = enter(&self.substance, &reference, &plenum, flux, heat)?;
        let loss = entered.fall / (scales.density * scales.speed * scales.speed);
        let first = Profile::uniform(grid.len(), loss, entered.velocity / scales.speed, &entered.place);
        let entry = self.section.hydraulic_diameter().powi(2) * flux / state.viscosity; // Dh Re
        let along = positions(
            self.length,
            (resolution.first_step * entry).min(0.01 * self.length),
            resolution.growth,
            resolution.longest_step * self.length,
        );
        self.walk(first, &along, &scales, grid, state.enthalpy)
    }

    fn walk(
        &self,
        first: Profile,
        along: &[f64],
        scales: &Scales,
        grid: &Grid,
        enthalpy: f64,
    ) -> Result<Vec<Station>, Refused> {
        let mut stations = Vec::with_capacity(along.len());
        let carried = first.carried(scales.density, scales.speed);
        stations.push(self.station(&first, &carried, scales, grid, enthalpy)?);
        let mut past = vec![(first, carried)]; // newest first
        for &z in along.iter().skip(1) {
            let places: Vec<f64> = past.iter().map(|(profile, _)| profile.position).collect();
            let history = Past::new(&derivative(z, &places), &past);
            let mut guess = predict(z, &places, &past);
            if self.wall == Wall::UnlimitedCapacity {
                guess.temperature.copy_from(&past[0].0.temperature); // nothing would correct what a guess adds
            }
            let step = Step { channel: self, scales, grid, past: &history };
            let profile = step.solve(guess)?;
            let carried = profile.carried(scales.density, scales.speed);
            stations.push(self.station(&profile, &carried, scales, grid, enthalpy)?);
            past.insert(0, (profile, carried));
            past.truncate(ORDER);
        }
        Ok(stations)
    }

    /// Reports a profile, or refuses it.
    fn station(
        &self,
        profile: &Profile,
        carried: &Carried,
        scales: &Scales,
        grid: &Grid,
        enthalpy: f64,
    ) -> Result<Station, Refused> {
        let (position, pressure) = (profile.position, scales.pressure_at(profile.loss));
        let share = position / self.length;
        let temperature = grid.weight.dot(&carried.mass.component_mul(&profile.temperature));
        let state = self.substance.state(temperature, pressure, &scales.reference);
        let speed = self.substance.speed_of_sound(&state, pressure);
        let mach = speed.map_or(0.0, |speed| scales.flux / (state.density * speed));
        if mach > MACH_LIMIT {
            return Err(Refused::Choking { mach, position: share, limit: MACH_LIMIT });
        }
        let enthalpy_rise = grid.weight.dot(&carried.energy) - enthalpy;
        Ok(Station { position, pressure, temperature, enthalpy_rise, mach })
    }
}

/// The next profile by extrapolation of the last ones.
fn predict(z: f64, places: &[f64], past: &[(Profile, Carried)]) -> Profile {
    let reach = places.len().min(3);
    let weights = extrapolation(z, &places[..reach]);
    let mix = |pick: fn(&Profile) -> &DVector<f64>| {
        let parts = weights.iter().zip(past).map(|(w, (profile, _))| pick(profile) * *w);
        parts.fold(DVector::zeros(pick(&past[0].0).len()), |sum, part| sum + part)
    };
    Profile {
        position: z,
        loss: weights.iter().zip(past).map(|(w, (profile, _))| w * profile.loss).sum(),
        velocity: mix(|profile| &profile.velocity),
        temperature: mix(|profile| &profile.temperature),
        states: past[0].0.states.clone(),
    }
}
