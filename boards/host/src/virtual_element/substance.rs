//! What flows: local density, viscosity, conductivity, enthalpy and molecular speed from pressure and temperature.
//!
//! Density and viscosity come from the library's stored table in double precision; the rest follows from it:
//!
//! - gas: `h = h0(T) - (R/M) T^2 int_0^p (dZ/dT) dp/p` (Maxwell relation), `k = (1 + n/3) mu R/(M G)` with the stored
//!   conduction group G;
//! - liquid: `h = cp (T - Tr) + (1 - beta Tr)(p - pr)/rho_r` about a reference state r, `beta = -dln rho/dT`.

use super::heat::{IdealGas, LiquidHeat, MOLAR_GAS_CONSTANT};
use super::refused::Refused;
use evenbore::double::Properties;
use evenbore::fluid::{Phase, StoredFluid};

/// Velocity slip for diffusely reflecting walls (Sharipov 2004).
pub(crate) const VELOCITY_SLIP: f64 = 1.016;
/// Temperature jump of a monatomic gas at such walls (Sharipov 2004, from memory); used for every gas.
const TEMPERATURE_JUMP: f64 = 1.95;
/// Kelvin by which the table is differentiated.
const STEP: f64 = 4.0;

/// A fluid with all that momentum and energy need.
#[derive(Debug, Clone, Copy)]
pub struct Substance<'a> {
    fluid: &'a StoredFluid,
    heat: Heat,
}

#[derive(Debug, Clone, Copy)]
enum Heat {
    Gas(IdealGas),
    Liquid(Option<LiquidHeat>),
}

/// A state's properties, SI.
#[derive(Debug, Clone, Copy)]
pub(crate) struct State {
    /// kg/m3.
    pub density: f64,
    /// Pa s.
    pub viscosity: f64,
    /// W/(m K).
    pub conductivity: f64,
    /// J/kg.
    pub enthalpy: f64,
    /// J/(kg K); of the ideal gas, for a gas.
    pub capacity: f64,
}

/// About which enthalpy is expanded.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Reference {
    temperature: f64,
    pressure: f64,
    /// The table a step colder, at the reference, a step warmer.
    tables: [Properties; 3],
    /// Of a liquid.
    heat: LiquidHeat,
    /// (1 - beta T)/rho of a liquid, m3/kg.
    lift: f64,
}

impl<'a> Substance<'a> {
    /// A fluid of the catalogue or the user's own.
    ///
    /// Heat capacity goes by name for gases; a liquid called `water` is water, another is taken as a glycol mixture
    /// above 980 kg/m3 and as mineral oil below.
    pub fn new(fluid: &'a StoredFluid) -> Self {
        let heat = match fluid.phase() {
            Phase::Gas => Heat::Gas(IdealGas::named(fluid.name())),
            Phase::Liquid => Heat::Liquid(None),
        };
        Self { fluid, heat }
    }

    /// The same liquid with a stated heat capacity and conductivity; a gas stays as it is.
    pub fn with_liquid_heat(self, heat: LiquidHeat) -> Self {
        if self.is_gas() { self } else { Self { heat: Heat::Liquid(Some(heat)), ..self } }
    }

    /// Name of the fluid.
    pub fn name(&self) -> &str {
        self.fluid.name()
    }

    /// Whether density follows pressure.
    pub fn is_gas(&self) -> bool {
        matches!(self.heat, Heat::Gas(_))
    }

    /// R/M, J/(kg K).
    pub(crate) fn specific_gas_constant(&self) -> f64 {
        MOLAR_GAS_CONSTANT / f64::from(self.fluid.molar_mass())
    }

    /// Refuses a state (K, Pa) outside the fluid's table.
    pub(crate) fn check(&self, temperature: f64, pressure: f64) -> Result<(), Refused> {
        let [low, high] = self.fluid.temperature_range().map(|t| f64::from(t.as_kelvin()));
        let [bottom, top] = self.fluid.pressure_range().map(|p| f64::from(p.as_pascals()));
        if (low..=high).contains(&temperature) && (bottom..=top).contains(&pressure) {
            return Ok(());
        }
        let fluid = self.name().to_owned();
        Err(Refused::OutsideTable { fluid, temperature, pressure, low, high, bottom, top })
    }

    /// The nearest temperature (K) that the fluid's table holds.
    pub(crate) fn nearest_temperature(&self, temperature: f64) -> f64 {
        let [low, high] = self.fluid.temperature_range().map(|t| f64::from(t.as_kelvin()));
        temperature.clamp(low, high)
    }

    /// The reference about which enthalpy is expanded (K, Pa).
    pub(crate) fn reference(&self, temperature: f64, pressure: f64) -> Reference {
        let tables = [-STEP, 0.0, STEP].map(|d| Properties::at(self.fluid, temperature + d));
        let [cold, rho, warm] = tables.map(|table| table.density(pressure));
        let beta = (cold / warm).ln() / (2.0 * STEP);
        let heat = match self.heat {
            Heat::Liquid(Some(stated)) => stated,
            _ if self.name() == "water" => LiquidHeat::water(temperature),
            _ if rho > 980.0 => LiquidHeat::WATER_GLYCOL,
            _ => LiquidHeat::mineral_oil(temperature, rho),
        };
        Reference { temperature, pressure, tables, heat, lift: (1.0 - beta * temperature) / rho }
    }

    /// Density, kg/m3, at K and Pa.
    pub(crate) fn density(&self, temperature: f64, pressure: f64) -> f64 {
        Properties::at(self.fluid, temperature).density(pressure)
    }

    /// All properties at a state (K, Pa).
    pub(crate) fn state(&self, temperature: f64, pressure: f64, reference: &Reference) -> State {
        let here = Properties::at(self.fluid, temperature);
        let (density, viscosity) = (here.density(pressure), here.viscosity(pressure));
        let (enthalpy, capacity, conductivity) = match self.heat {
            Heat::Gas(gas) => {
                let r = self.specific_gas_constant();
                let rise = 1.0 + here.viscosity_exponent() / 3.0;
                let conductivity = rise * here.viscosity(0.0) * r / here.conduction_group();
                let enthalpy = r * (gas.enthalpy(temperature) - self.departure(temperature, pressure, reference));
                (enthalpy, r * gas.capacity(temperature), conductivity)
            }
            Heat::Liquid(_) => {
                let heat = reference.heat;
                let warmth = heat.capacity * (temperature - reference.temperature);
                (warmth + reference.lift * (pressure - reference.pressure), heat.capacity, heat.conductivity)
            }
        };
        State { density, viscosity, conductivity, enthalpy, capacity }
    }

    /// `T^2 int_0^p (dZ/dT) dp/p`, K: two Gauss points are exact for the table's cubic Z, and dZ/dT is that of the
    /// parabola through the reference's three temperatures.
    fn departure(&self, temperature: f64, pressure: f64, reference: &Reference) -> f64 {
        let r = self.specific_gas_constant();
        let away = temperature - reference.temperature;
        let offset = 0.5 / 3f64.sqrt();
        let slope = |share: f64| {
            let p = share * pressure;
            let z = |k: usize, step: f64| p / (r * (reference.temperature + step) * reference.tables[k].density(p));
            let [cold, here, warm] = [z(0, -STEP), z(1, 0.0), z(2, STEP)];
            ((warm - cold) / (2.0 * STEP) + away * (warm - 2.0 * here + cold) / (STEP * STEP)) / share
        };
        temperature * temperature * 0.5 * (slope(0.5 - offset) + slope(0.5 + offset))
    }

    /// Distances over which the wall's velocity and temperature are felt away from it, m: slip and jump lengths
    /// `sigma mu sqrt(2 R T/M)/p`; zero for a liquid.
    pub(crate) fn wall_lengths(&self, temperature: f64, pressure: f64, viscosity: f64) -> [f64; 2] {
        if !self.is_gas() {
            return [0.0, 0.0];
        }
        let path = viscosity * (2.0 * self.specific_gas_constant() * temperature).sqrt() / pressure;
        [VELOCITY_SLIP * path, TEMPERATURE_JUMP * path]
    }

    /// Speed of sound, m/s: `sqrt(gamma p/rho)`, gamma of the ideal gas; absent for a liquid.
    pub(crate) fn speed_of_sound(&self, state: &State, pressure: f64) -> Option<f64> {
        let gamma = state.capacity / (state.capacity - self.specific_gas_constant());
        self.is_gas().then(|| (gamma * pressure / state.density).sqrt())
    }
}
