//! What is carried along the channel: profiles at one position, and what of them the next step needs.

use super::inlet::Place;
use super::substance::State;
use nalgebra::DVector;

/// Pressure, velocity and temperature across the channel at one position.
#[derive(Debug, Clone)]
pub(crate) struct Profile {
    /// Position from the inlet, m.
    pub position: f64,
    /// Pressure lost since the plenum, in units of `G^2/rho1`.
    pub loss: f64,
    /// Velocity, in units of `G/rho1`, at the points of the grid.
    pub velocity: DVector<f64>,
    /// Temperature, K.
    pub temperature: DVector<f64>,
    /// What the fluid is at each point.
    pub states: Vec<State>,
}

/// What the equations difference along the channel.
#[derive(Debug, Clone)]
pub(crate) struct Carried {
    /// Mass flux over its mean.
    pub mass: DVector<f64>,
    /// Momentum flux.
    pub momentum: DVector<f64>,
    /// Flux of total enthalpy, J/kg.
    pub energy: DVector<f64>,
}

impl Profile {
    /// A uniform profile behind the inlet.
    pub fn uniform(points: usize, loss: f64, velocity: f64, place: &Place) -> Self {
        Self {
            position: 0.0,
            loss,
            velocity: DVector::from_element(points, velocity),
            temperature: DVector::from_element(points, place.temperature),
            states: vec![place.state; points],
        }
    }

    /// One property at every point.
    pub fn property(&self, pick: impl Fn(&State) -> f64) -> DVector<f64> {
        DVector::from_iterator(self.states.len(), self.states.iter().map(pick))
    }

    /// What is carried past this position; `density` and `speed` are the units of density and velocity.
    pub fn carried(&self, density: f64, speed: f64) -> Carried {
        let mass = self.property(|state| state.density / density).component_mul(&self.velocity);
        let momentum = mass.component_mul(&self.velocity);
        let kinetic = 0.5 * speed * speed;
        let total = self.property(|state| state.enthalpy) + self.velocity.map(|u| kinetic * u * u);
        let energy = mass.component_mul(&total);
        Carried { mass, momentum, energy }
    }
}
