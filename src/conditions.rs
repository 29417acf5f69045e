//! The slow half: all that depends on temperature, line pressure and humidity, prepared once per change.

use crate::element::law::Solution;
use crate::math::Real;
use crate::quantity::{Density, MassFlow, PressureDrop, RelativeHumidity, Viscosity, VolumeFlow};
use crate::reading::Reading;
use crate::regime::{LAMINAR_LIMIT, LARGEST_EXPANSION, RANGE_MARGIN, SLIP_LIMIT, judge};
use crate::state::State;
use crate::status::{Refusal, Status};
use crate::uncertainty::{Sensitivities, sensitivities};

/// The slow half of the walk: one temperature, one line pressure, one humidity.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Conditions {
    pub(crate) state: State<f32>,
    /// Reynolds number over x, 1/m.
    pub(crate) reynolds_per_metre: f32,
    /// Dry volume at the reference conditions that a kilogram carries, m3/kg; 0 where the fluid's table does not reach.
    pub(crate) standard_volume: f32,
    /// Largest calibrated x, m; 0 when there was no calibration.
    pub(crate) x_calibrated: f32,
    pub(crate) standing: Status,
}

impl Conditions {
    /// The flow that a pressure drop (trimmed) drives.
    ///
    /// # Errors
    /// Refuses a pressure drop that is not finite or leads to a pressure outside the fluid's table.
    pub fn sample(&self, pressure_drop: PressureDrop) -> Result<Sample, Refusal> {
        Ok(self.interpret(&self.solve(pressure_drop)?))
    }

    /// The pressure drop that drives a mass flow: the inverse of [`Conditions::sample`].
    ///
    /// Accuracy: 2e-6 of the drop while a gas loses less than 30 % of its pressure, 2e-5 to 50 %, where a flow rounded
    /// to single precision says less of the drop behind it (asserted in `tests/properties.rs`).
    ///
    /// # Errors
    /// Refuses a mass flow that is not finite, or that no outlet pressure within the fluid's table can drive.
    pub fn pressure_drop(&self, mass_flow: MassFlow) -> Result<PressureDrop, Refusal> {
        let flow = mass_flow.as_kilograms_per_second();
        if !flow.is_finite() {
            return Err(Refusal::NOT_FINITE);
        }
        let drop = self.state.law.pressure_drop(flow).ok_or(Refusal::OUTLET_VACUUM)?;
        self.state.check(drop)?;
        Ok(PressureDrop::from_pascals(drop))
    }

    /// Flows and pressure drops from which each flag is raised, for arithmetic that does not know x.
    pub(crate) fn limits(&self) -> Limits {
        let law = &self.state.law;
        let p1 = law.line_pressure;
        let mu = law.fluid.viscosity(p1);
        let [laminar, range] = self.x_limits().map(|x| x * mu / self.state.line_density);
        let gas = law.compressible > 0.0;
        Limits {
            laminar,
            range,
            expansion: if gas { p1 * LARGEST_EXPANSION } else { f32::INFINITY },
            slip: if gas { (2.0 * (p1 - law.slip * mu / SLIP_LIMIT)).at_least(0.0) } else { f32::INFINITY },
            standing: self.standing,
        }
    }

    /// A pressure drop (Pa) near the largest that is laminar, calibrated and not too strong an expansion: where a curve
    /// over pressure drop may end.
    pub(crate) fn curve_end(&self) -> f32 {
        let law = &self.state.law;
        let (p1, [lowest, _]) = (law.line_pressure, self.state.pressure_range);
        let gas = law.compressible;
        let most = (p1 - lowest) * 0.98;
        let most = if gas > 0.0 && most > p1 * LARGEST_EXPANSION { p1 * LARGEST_EXPANSION } else { most };
        let [laminar, range] = self.x_limits();
        let x = if range < laminar { range } else { laminar };
        let mu = law.fluid.viscosity(p1);
        let need = law.a * x * (1.0 + law.b_over_a * x) * mu / self.state.line_density * mu;
        let inside = p1 * (p1 - gas * 2.0 * need);
        if inside <= 0.0 || !inside.is_finite() {
            return most;
        }
        let drop = if gas > 0.0 { 2.0 * need * p1 / (p1 + inside.root()) } else { need };
        if drop < most { drop } else { most }
    }

    /// Largest laminar x and largest x within the calibration's reach, m; infinite when unknown.
    fn x_limits(&self) -> [f32; 2] {
        let per_x = self.reynolds_per_metre;
        let laminar = if per_x > 0.0 { LAMINAR_LIMIT / per_x } else { f32::INFINITY };
        let range = if self.x_calibrated > 0.0 { RANGE_MARGIN * self.x_calibrated } else { f32::INFINITY };
        [laminar, range]
    }

    pub(crate) fn solve(&self, pressure_drop: PressureDrop) -> Result<Solution<f32>, Refusal> {
        let drop = pressure_drop.as_pascals();
        self.state.check(drop)?;
        let at = self.state.law.solve(drop);
        if at.x.is_finite() { Ok(at) } else { Err(Refusal::NOT_FINITE) }
    }

    pub(crate) fn interpret(&self, at: &Solution<f32>) -> Sample {
        let mass = at.x * at.viscosity;
        let standard = if self.standard_volume > 0.0 { Some(mass * self.standard_volume) } else { None };
        let reynolds = at.x.abs() * self.reynolds_per_metre;
        Sample {
            volume: VolumeFlow::from_cubic_metres_per_second(mass / self.state.line_density),
            mass: MassFlow::from_kilograms_per_second(mass),
            standard: standard.map(VolumeFlow::from_cubic_metres_per_second),
            viscosity: Viscosity::from_pascal_seconds(at.viscosity),
            density: Density::from_kilograms_per_cubic_metre(self.state.line_density),
            reynolds,
            kinetic_share: at.kinetic_share,
            status: self.standing | judge(reynolds, self.x_calibrated, at),
        }
    }

    /// Relative standard uncertainty of viscosity from the air's water.
    pub(crate) fn u_viscosity_of_water(&self) -> f32 {
        self.state.moisture.u_viscosity
    }

    /// Volume flow into mass flow and standard flow, at these conditions.
    pub(crate) fn other_flows(&self, volume: VolumeFlow) -> (MassFlow, Option<VolumeFlow>) {
        let mass = volume.as_cubic_metres_per_second() * self.state.line_density;
        let standard = if self.standard_volume > 0.0 { Some(mass * self.standard_volume) } else { None };
        (MassFlow::from_kilograms_per_second(mass), standard.map(VolumeFlow::from_cubic_metres_per_second))
    }

    /// Sensitivities of mass flow and of dry flow at reference conditions, from those of volume flow.
    pub(crate) fn amounts(&self, volume: &Sensitivities, reading: &Reading) -> [Sensitivities; 2] {
        let moist = &self.state.moisture;
        let humidity = reading.relative_humidity.map_or(0.0, RelativeHumidity::as_fraction);
        let water_per_humidity = if humidity > 0.0 { moist.water / humidity } else { 0.0 };
        let z = self.state.law.fluid.density_exponent(self.state.law.line_pressure);
        let with_density = |per_water: f32| Sensitivities {
            temperature: volume.temperature + self.state.law.fluid.expansion() + per_water * moist.water_by_temperature,
            line_pressure: volume.line_pressure + z - per_water * moist.water,
            relative_humidity: volume.relative_humidity + per_water * water_per_humidity,
            ..*volume
        };
        // A mole of water takes the place of a mole of dry air.
        [with_density(moist.density_slope), with_density(-1.0 / (1.0 - moist.water))]
    }

    pub(crate) fn sensitivities(&self, at: &Solution<f32>, reading: &Reading) -> Sensitivities {
        let humidity = reading.relative_humidity.map_or(0.0, RelativeHumidity::as_fraction);
        sensitivities(&self.state, at, reading.pressure_drop.as_pascals(), humidity)
    }
}

/// See [`Conditions::limits`].
pub(crate) struct Limits {
    /// Volume flow at the laminar limit, m3/s.
    pub laminar: f32,
    /// Volume flow at the end of the calibrated range, m3/s.
    pub range: f32,
    /// Pressure drop at the expansion limit, Pa.
    pub expansion: f32,
    /// Pressure drop at the slip limit, Pa.
    pub slip: f32,
    /// Flags of every flow.
    pub standing: Status,
}

/// A flow and its status; [`Flow`](crate::flow::Flow) adds the uncertainty.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Sample {
    /// Volume flow at the temperature and line pressure that were read.
    pub volume: VolumeFlow,
    /// Mass flow, of moist air with its water.
    pub mass: MassFlow,
    /// Volume flow at the reference conditions, dry; absent where the fluid's table does not reach them.
    pub standard: Option<VolumeFlow>,
    /// Viscosity at the mean pressure.
    pub viscosity: Viscosity,
    /// Density at the line pressure.
    pub density: Density,
    /// Reynolds number; 0 when the channels are unknown.
    pub reynolds: f32,
    /// Kinetic over viscous pressure drop.
    pub kinetic_share: f32,
    /// What the flow is worth.
    pub status: Status,
}
