//! The walk: a reading becomes a flow.
//!
//! reading -> trims -> conditions (fluid and law at this temperature and line pressure) -> law -> flows -> status and
//! uncertainty. [`Meter::flow`] does all of it; an instrument whose temperature and line pressure change slowly keeps
//! the [`Conditions`] and calls [`Conditions::sample`] for each pressure drop.

use crate::calibration::Quality;
use crate::conditions::State;
use crate::element::Element;
use crate::element::law::Solution;
use crate::error::Error;
use crate::fluid::StoredFluid;
use crate::fluid::properties::{PropertiesAt, outside};
use crate::math::Real;
use crate::quantity::{
    AbsolutePressure, Density, MassFlow, PressureDrop, RelativeHumidity, Temperature, Viscosity, VolumeFlow,
};
use crate::reading::{Reading, SensorUncertainty, Trims};
use crate::reference::ReferenceConditions;
use crate::regime::{LAMINAR_LIMIT, LARGEST_EXPANSION, RANGE_MARGIN, SLIP_LIMIT, judge};
use crate::status::{Refusal, Status};
use crate::uncertainty::{Sensitivities, Uncertainty, combine, common_part, fit_part, sensitivities, sensor_part};

/// Kelvin over which a viscosity ratio's uncertainty grows from nothing to its stated value.
const RATIO_SPAN: f32 = 50.0;

/// An element, the fluid in it and what is known of both: validated once, then it only answers.
///
/// ```
/// use evenbore::element::Element;
/// use evenbore::flow::Meter;
/// use evenbore::fluid::catalogue::NITROGEN;
/// use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, Temperature};
/// use evenbore::reading::Reading;
///
/// let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
/// let meter = Meter::nominal(element, NITROGEN.fluid())?;
/// let reading = Reading::new(
///     PressureDrop::from_pascals(1500.0),
///     Temperature::from_celsius(23.4),
///     AbsolutePressure::from_kilopascals(120.0),
/// );
/// let flow = meter.flow(&reading)?;
/// assert!((flow.volume.as_litres_per_minute() - 4.55).abs() < 0.05, "{:?}", flow.volume);
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone)]
pub struct Meter<'a> {
    element: Element,
    fluid: &'a StoredFluid,
    quality: Quality,
    calibrated_on_this_fluid: bool,
    trims: Trims,
    sensors: SensorUncertainty,
    reference: ReferenceConditions,
    standing: Status,
}

impl<'a> Meter<'a> {
    /// A meter of nominal geometry, flagged uncalibrated.
    ///
    /// # Errors
    /// Names the field of the element or fluid that makes no sense.
    pub fn nominal(element: Element, fluid: &'a StoredFluid) -> Result<Self, Error> {
        let quality = Quality::nominal(element.a, element.b);
        let meter = Self::calibrated(element, fluid, quality)?;
        Ok(Self { calibrated_on_this_fluid: false, standing: Status::UNCALIBRATED, ..meter })
    }

    /// A calibrated meter, used on the fluid it was calibrated on.
    ///
    /// # Errors
    /// Names the field of the element, fluid or calibration that makes no sense.
    pub fn calibrated(element: Element, fluid: &'a StoredFluid, quality: Quality) -> Result<Self, Error> {
        element.check()?;
        fluid.check()?;
        quality.check()?;
        Ok(Self {
            element,
            fluid,
            quality,
            calibrated_on_this_fluid: true,
            trims: Trims::NONE,
            sensors: SensorUncertainty::COMMON,
            reference: ReferenceConditions::DIN_1343,
            standing: Status::empty(),
        })
    }

    /// The same meter carrying another fluid.
    ///
    /// # Errors
    /// Names the field of the fluid that makes no sense.
    pub fn with_fluid<'b>(self, fluid: &'b StoredFluid) -> Result<Meter<'b>, Error> {
        fluid.check()?;
        let same = self.calibrated_on_this_fluid && fluid == self.fluid;
        Ok(Meter { fluid, calibrated_on_this_fluid: same, ..self })
    }

    /// The same meter quoting standard flow at other reference conditions.
    pub fn with_reference(self, reference: ReferenceConditions) -> Self {
        Self { reference, ..self }
    }

    /// The same meter with trims and uncertainties of its sensors.
    ///
    /// # Errors
    /// Names the trim or uncertainty outside its limits.
    pub fn with_sensors(self, trims: Trims, sensors: SensorUncertainty) -> Result<Self, Error> {
        trims.check()?;
        sensors.check()?;
        Ok(Self { trims, sensors, ..self })
    }

    /// The same meter with uncertainties of its sensors.
    ///
    /// # Errors
    /// Names the uncertainty outside its limits.
    pub fn with_sensor_uncertainty(self, sensors: SensorUncertainty) -> Result<Self, Error> {
        let trims = self.trims;
        self.with_sensors(trims, sensors)
    }

    /// The same meter with a status that stands beside every flow.
    pub fn with_standing(self, standing: Status) -> Self {
        Self { standing, ..self }
    }

    /// The element.
    pub fn element(&self) -> &Element {
        &self.element
    }
    /// The fluid in it.
    pub fn fluid(&self) -> &'a StoredFluid {
        self.fluid
    }
    /// Uncertainties of the sensors.
    pub fn sensors(&self) -> &SensorUncertainty {
        &self.sensors
    }
    /// Conditions at which standard flow is quoted.
    pub fn reference(&self) -> &ReferenceConditions {
        &self.reference
    }

    /// The whole walk for one reading.
    ///
    /// # Errors
    /// The reasons for which no flow can be given.
    pub fn flow(&self, reading: &Reading) -> Result<Flow, Refusal> {
        self.flow_with(reading, &self.sensors)
    }

    /// The whole walk with the uncertainties of this reading's sensors.
    ///
    /// # Errors
    /// The reasons for which no flow can be given.
    pub fn flow_with(&self, reading: &Reading, sensors: &SensorUncertainty) -> Result<Flow, Refusal> {
        let reading = self.trims.apply(reading);
        reading.check()?;
        let conditions = self.conditions(reading.temperature, reading.line_pressure, reading.relative_humidity)?;
        let solution = conditions.solve(reading.pressure_drop)?;
        let sample = conditions.interpret(&solution);
        let sensitivities = conditions.sensitivities(&solution, &reading);
        let u_water = conditions.state.moisture.u_viscosity;
        let u_viscosity = combine(self.u_viscosity(reading.temperature), u_water);
        let uncertainty = self.uncertainty(&sensitivities, sensors, &reading, u_viscosity);
        Ok(Flow { sample, sensitivities, uncertainty })
    }

    /// Relative standard uncertainty of the viscosity at a reading, as far as it does not cancel against the
    /// calibration: of the fluid's data, and of the water in moist air.
    ///
    /// # Errors
    /// The reasons for which no flow can be given.
    pub fn viscosity_uncertainty(&self, reading: &Reading) -> Result<[f32; 2], Refusal> {
        let reading = self.trims.apply(reading);
        let conditions = self.conditions(reading.temperature, reading.line_pressure, reading.relative_humidity)?;
        Ok([self.u_viscosity(reading.temperature), conditions.state.moisture.u_viscosity])
    }

    /// Prepares all that depends on temperature, line pressure and humidity (trimmed values).
    ///
    /// # Errors
    /// Refuses a state outside the fluid's table, and a humidity that cannot be.
    pub fn conditions(
        &self,
        temperature: Temperature,
        line_pressure: AbsolutePressure,
        humidity: Option<RelativeHumidity>,
    ) -> Result<Conditions, Refusal> {
        let (t, p) = (temperature.as_kelvin(), line_pressure.as_pascals());
        let humidity = humidity.map(RelativeHumidity::as_fraction);
        let state = State::new(&self.element, self.fluid, t, p, humidity)?;
        Ok(Conditions {
            state,
            element: self.element,
            standard_density: self.standard_density(),
            x_calibrated: self.quality.x_max_m,
            standing: self.standing,
        })
    }

    /// Density at the reference conditions, kg/m3; 0 where the fluid's table does not reach.
    fn standard_density(&self) -> f32 {
        let (t, p) = (self.reference.temperature.as_kelvin(), self.reference.pressure.as_pascals());
        if outside(self.fluid, t, p).is_empty() { PropertiesAt::new(self.fluid, t).density(p) } else { 0.0 }
    }

    fn uncertainty(
        &self,
        s: &Sensitivities,
        sensors: &SensorUncertainty,
        reading: &Reading,
        u_viscosity: f32,
    ) -> Uncertainty {
        let (drop, p) = (reading.pressure_drop.as_pascals(), reading.line_pressure.as_pascals());
        Uncertainty {
            fit: fit_part(s, &self.quality),
            common: common_part(s, &self.quality, u_viscosity, self.calibrated_on_this_fluid),
            sensors: sensor_part(s, sensors, drop, p),
        }
    }

    /// What of the fluid's viscosity uncertainty does not cancel against the calibration: on the same fluid only that
    /// of the ratio between temperatures, growing from nothing to its stated value over 50 K.
    fn u_viscosity(&self, temperature: Temperature) -> f32 {
        if self.calibrated_on_this_fluid {
            let away = (temperature.as_kelvin() - self.quality.temperature_k.as_kelvin()).abs() / RATIO_SPAN;
            self.fluid.u_viscosity_ratio * if away < 1.0 { away } else { 1.0 }
        } else {
            self.fluid.u_viscosity
        }
    }
}

/// The slow half of the walk: one temperature, one line pressure, one humidity.
#[derive(Debug, Clone, Copy)]
pub struct Conditions {
    state: State<f32>,
    element: Element,
    standard_density: f32,
    x_calibrated: f32,
    standing: Status,
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
        let volume = |x: f32| if x > 0.0 { x * mu / self.state.line_density } else { f32::INFINITY };
        let per_x = self.element.reynolds(1.0);
        let gas = law.compressible > 0.0;
        Limits {
            laminar: volume(if per_x > 0.0 { LAMINAR_LIMIT / per_x } else { 0.0 }),
            range: volume(RANGE_MARGIN * self.x_calibrated),
            expansion: if gas { p1 * LARGEST_EXPANSION } else { f32::INFINITY },
            slip: if gas { (2.0 * (p1 - law.slip * mu / SLIP_LIMIT)).at_least(0.0) } else { f32::INFINITY },
            standing: self.standing,
        }
    }

    fn solve(&self, pressure_drop: PressureDrop) -> Result<Solution<f32>, Refusal> {
        let drop = pressure_drop.as_pascals();
        self.state.check(drop)?;
        Ok(self.state.law.solve(drop))
    }

    fn interpret(&self, at: &Solution<f32>) -> Sample {
        let mass = at.x * at.viscosity;
        let dry = mass * self.state.moisture.dry_share;
        let standard = if self.standard_density > 0.0 { Some(dry / self.standard_density) } else { None };
        Sample {
            volume: VolumeFlow::from_cubic_metres_per_second(mass / self.state.line_density),
            mass: MassFlow::from_kilograms_per_second(mass),
            standard: standard.map(VolumeFlow::from_cubic_metres_per_second),
            viscosity: Viscosity::from_pascal_seconds(at.viscosity),
            density: Density::from_kilograms_per_cubic_metre(self.state.line_density),
            reynolds: self.element.reynolds(at.x),
            kinetic_share: at.kinetic_share,
            status: self.standing | judge(&self.element, self.x_calibrated, at),
        }
    }

    fn sensitivities(&self, at: &Solution<f32>, reading: &Reading) -> Sensitivities {
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

/// A flow and its status; [`Flow`] adds the uncertainty.
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

/// A flow with status and uncertainty.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Flow {
    sample: Sample,
    /// How the volume flow answers to each input.
    pub sensitivities: Sensitivities,
    /// Relative standard uncertainty of the volume flow.
    pub uncertainty: Uncertainty,
}

impl core::ops::Deref for Flow {
    type Target = Sample;
    fn deref(&self) -> &Sample {
        &self.sample
    }
}
