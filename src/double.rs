//! The same kernels in double precision, for the bench: calibration, checks of the device's arithmetic.
//!
//! Everything here is SI in plain `f64`. The tables and constants are those the device stores.

use crate::element::Element;
use crate::element::law::Channels;
use crate::fluid::StoredFluid;
use crate::fluid::properties::PropertiesAt;
use crate::state::State;
use crate::status::Refusal;

/// Fluid properties at one temperature.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Properties {
    at: PropertiesAt<f64>,
}

impl Properties {
    /// Evaluates `fluid` at `temperature` (K); outside its table the nearest curve is extended.
    pub fn at(fluid: &StoredFluid, temperature: f64) -> Self {
        Self { at: PropertiesAt::new(fluid, temperature) }
    }
    /// Dynamic viscosity at absolute `pressure` (Pa), Pa s.
    pub fn viscosity(&self, pressure: f64) -> f64 {
        self.at.viscosity(pressure)
    }
    /// Density at absolute `pressure` (Pa), kg/m3.
    pub fn density(&self, pressure: f64) -> f64 {
        self.at.density(pressure)
    }
    /// dln mu/dln T.
    pub fn viscosity_exponent(&self) -> f64 {
        self.at.exponent()
    }
    /// Conduction group of a gas, `G = (1 + n/3) mu R/(M k)` with its conductivity k; 0 for a liquid.
    pub fn conduction_group(&self) -> f64 {
        self.at.conduction
    }
}

/// The law at one temperature and line pressure, in double precision.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Conditions {
    state: State<f64>,
}

/// What a flow and its pressure drop contribute to a fit of `Y = A u + B v`.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Columns {
    /// x = mdot/mu_m, m.
    pub x: f64,
    /// Y = rho_m dP/(mu_m mdot), 1/m3.
    pub y: f64,
    /// u = (1 + alpha dT)^-3/(1 + s): what A is multiplied by.
    pub u: f64,
    /// v = (1 + alpha dT)^-4 q x, m: what B is multiplied by.
    pub v: f64,
}

/// A flow in double precision.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Flow {
    /// x = mdot/mu_m, m.
    pub x: f64,
    /// Mass flow, kg/s.
    pub mass: f64,
    /// Volume flow at line conditions, m3/s.
    pub volume: f64,
    /// Kinetic over viscous pressure drop.
    pub kinetic_share: f64,
    /// Slip s.
    pub slip: f64,
    /// ln(p1/p2), taken positive.
    pub log_ratio: f64,
}

impl Conditions {
    /// Prepares the law for `element` and `fluid` at `temperature` (K), `line_pressure` (Pa) and, for air, relative
    /// humidity (0 to 1).
    ///
    /// # Errors
    /// Refuses a state outside the fluid's table, and a humidity that cannot be.
    pub fn new(
        element: &Element,
        fluid: &StoredFluid,
        temperature: f64,
        line_pressure: f64,
        humidity: Option<f64>,
    ) -> Result<Self, Refusal> {
        Ok(Self { state: State::new(&Channels::new(element), fluid, temperature, line_pressure, humidity)? })
    }

    /// The flow that a pressure drop (Pa) drives.
    ///
    /// # Errors
    /// Refuses what the device refuses.
    pub fn flow(&self, drop: f64) -> Result<Flow, Refusal> {
        self.state.check(drop)?;
        let at = self.state.law.solve(drop);
        let mass = at.x * at.viscosity;
        Ok(Flow {
            x: at.x,
            mass,
            volume: mass / self.state.line_density,
            kinetic_share: at.kinetic_share,
            slip: at.slip,
            log_ratio: at.log_ratio,
        })
    }

    /// The pressure drop (Pa) that drives a mass flow (kg/s).
    ///
    /// # Errors
    /// Refuses a flow that no outlet pressure can drive.
    pub fn pressure_drop(&self, mass_flow: f64) -> Result<f64, Refusal> {
        let drop = self.state.law.pressure_drop(mass_flow).ok_or(Refusal::OUTLET_VACUUM)?;
        self.state.check(drop)?;
        Ok(drop)
    }

    /// The columns of a fit for a measured mass flow (kg/s) at a measured pressure drop (Pa), of one sign; the columns
    /// of a reverse flow are those of the element turned round.
    ///
    /// # Errors
    /// Refuses what the device refuses.
    pub fn columns(&self, drop: f64, mass_flow: f64) -> Result<Columns, Refusal> {
        self.state.check(drop)?;
        let law = &self.state.law;
        let at = law.solve(drop); // for the properties at the mean pressure; its x is not used
        let (mu, rho) = (at.viscosity, law.fluid.density(at.mean_pressure));
        let x = mass_flow.abs() / mu;
        let stretch = law.stretch;
        Ok(Columns {
            x,
            y: rho * drop / (mu * mass_flow),
            u: 1.0 / (stretch * stretch * stretch * (1.0 + at.slip)),
            v: law.q(x, at.log_ratio) * x / (stretch * stretch * stretch * stretch),
        })
    }

    /// Relative standard uncertainty of the viscosity from the water in air, known or not.
    pub fn u_viscosity_of_water(&self) -> f64 {
        self.state.moisture.u_viscosity
    }

    /// Density at the line pressure, kg/m3.
    pub fn line_density(&self) -> f64 {
        self.state.line_density
    }

    /// Viscosity at absolute `pressure` (Pa), Pa s.
    pub fn viscosity(&self, pressure: f64) -> f64 {
        self.state.law.fluid.viscosity(pressure)
    }

    /// Density at absolute `pressure` (Pa) and the conditions' temperature and humidity, kg/m3.
    pub fn density(&self, pressure: f64) -> f64 {
        self.state.law.fluid.density(pressure)
    }

    /// dln mu/dln T at the conditions' temperature.
    pub fn viscosity_exponent(&self) -> f64 {
        self.state.law.fluid.exponent()
    }
}
