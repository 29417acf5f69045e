//! The walk: a reading becomes a flow.
//!
//! reading -> trims -> conditions (fluid and law at this temperature and line pressure) -> law -> flows -> status and
//! uncertainty. [`Meter::flow`] does all of it; an instrument whose temperature and line pressure change slowly keeps
//! the [`Conditions`] and calls [`Conditions::sample`] for each pressure drop.

use crate::calibration::Quality;
use crate::conditions::{Conditions, Sample};
use crate::element::Element;
use crate::element::law::Channels;
use crate::error::Error;
use crate::flow_curve::{Arithmetic, by_curve};
use crate::fluid::StoredFluid;
use crate::fluid::properties::{PropertiesAt, outside};
use crate::quantity::{AbsolutePressure, RelativeHumidity, Temperature};
use crate::reading::{Reading, SensorUncertainty, Trims};
use crate::reference::ReferenceConditions;
use crate::state::State;
use crate::status::{Refusal, Status};
use crate::uncertainty::{Sensitivities, Uncertainty, common_part, fit_part, sensor_part};

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
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Meter<'a> {
    element: Element,
    channels: Channels<f32>,
    fluid: &'a StoredFluid,
    quality: Quality,
    calibrated_on_this_fluid: bool,
    trims: Trims,
    sensors: SensorUncertainty,
    reference: ReferenceConditions,
    /// Dry volume of a kilogram at the reference conditions, m3/kg; 0 where the fluid's table does not reach.
    standard_volume: f32,
    standing: Status,
    arithmetic: Arithmetic,
}

impl<'a> Meter<'a> {
    /// A meter of nominal geometry, flagged uncalibrated.
    ///
    /// # Errors
    /// Names the field of the element or fluid that makes no sense.
    pub fn nominal(element: Element, fluid: &'a StoredFluid) -> Result<Self, Error> {
        let quality = Quality::nominal(element.a, element.b);
        check(&element, fluid, &quality)?;
        Ok(Self::of_checked(element, fluid, quality, false, Status::UNCALIBRATED))
    }

    /// A calibrated meter, used on the fluid it was calibrated on.
    ///
    /// # Errors
    /// Names the field of the element, fluid or calibration that makes no sense.
    pub fn calibrated(element: Element, fluid: &'a StoredFluid, quality: Quality) -> Result<Self, Error> {
        check(&element, fluid, &quality)?;
        Ok(Self::of_checked(element, fluid, quality, true, Status::empty()))
    }

    /// A meter of parts that were found to make sense.
    pub(crate) fn of_checked(
        element: Element,
        fluid: &'a StoredFluid,
        quality: Quality,
        calibrated_on_this_fluid: bool,
        standing: Status,
    ) -> Self {
        let reference = ReferenceConditions::DIN_1343;
        Self {
            element,
            channels: Channels::new(&element),
            fluid,
            quality,
            calibrated_on_this_fluid,
            trims: Trims::NONE,
            sensors: SensorUncertainty::COMMON,
            reference,
            standard_volume: standard_volume(fluid, &reference),
            standing,
            arithmetic: Arithmetic::Single,
        }
    }

    /// The same meter carrying another fluid.
    ///
    /// # Errors
    /// Names the field of the fluid that makes no sense.
    pub fn with_fluid<'b>(self, fluid: &'b StoredFluid) -> Result<Meter<'b>, Error> {
        fluid.check()?;
        let same = self.calibrated_on_this_fluid && fluid == self.fluid;
        let standard_volume = standard_volume(fluid, &self.reference);
        Ok(Meter { fluid, calibrated_on_this_fluid: same, standard_volume, ..self })
    }

    /// The same meter quoting standard flow at other reference conditions.
    pub fn with_reference(self, reference: ReferenceConditions) -> Self {
        Self { reference, standard_volume: standard_volume(self.fluid, &reference), ..self }
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

    /// The same meter computing by another arithmetic.
    pub fn with_arithmetic(self, arithmetic: Arithmetic) -> Self {
        Self { arithmetic, ..self }
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
    /// The arithmetic that computes the flow.
    pub fn arithmetic(&self) -> Arithmetic {
        self.arithmetic
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
        // Matched where it stands, since moving what was prepared would double the stack.
        match &self.conditions(reading.temperature, reading.line_pressure, reading.relative_humidity) {
            Ok(conditions) => self.answer(conditions, &reading, sensors),
            Err(refusal) => Err(*refusal),
        }
    }

    #[inline(never)] // its stack then lies where that of `conditions` lay, not on top of it
    fn answer(&self, at: &Conditions, reading: &Reading, sensors: &SensorUncertainty) -> Result<Flow, Refusal> {
        let solution = at.solve(reading.pressure_drop)?;
        let sensitivities = at.sensitivities(&solution, reading);
        let uncertainty = self.uncertainty(at, &sensitivities, reading, sensors);
        let [mass_uncertainty, standard_uncertainty] = at.amounts(&sensitivities, reading).map(|s| Uncertainty {
            sensors: sensor_part(&s, sensors, reading.pressure_drop.as_pascals(), reading.line_pressure.as_pascals()),
            ..uncertainty
        });
        let sample = match self.arithmetic {
            Arithmetic::Single => at.interpret(&solution),
            Arithmetic::Curve => by_curve(at, at.interpret(&solution), reading.pressure_drop)?,
        };
        Ok(Flow { sample, sensitivities, uncertainty, mass_uncertainty, standard_uncertainty })
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
        let state = State::new(&self.channels, self.fluid, t, p, humidity)?;
        let dry = self.standard_volume;
        Ok(Conditions {
            state,
            reynolds_per_metre: self.channels.reynolds,
            standard_volume: if humidity.is_some() { dry * state.moisture.dry_share } else { dry },
            x_calibrated: self.quality.x_max_m,
            standing: self.standing,
        })
    }

    fn uncertainty(&self, at: &Conditions, s: &Sensitivities, r: &Reading, sensors: &SensorUncertainty) -> Uncertainty {
        let u_viscosity = [self.u_viscosity(r.temperature), at.u_viscosity_of_water()];
        Uncertainty {
            fit: fit_part(s, &self.quality),
            common: common_part(s, &self.quality, u_viscosity, self.calibrated_on_this_fluid),
            sensors: sensor_part(s, sensors, r.pressure_drop.as_pascals(), r.line_pressure.as_pascals()),
        }
    }

    /// What of the fluid's viscosity uncertainty does not cancel against the calibration: on the same fluid only that
    /// of the ratio between temperatures, growing from nothing to its stated value over 50 K.
    fn u_viscosity(&self, temperature: Temperature) -> f32 {
        if self.calibrated_on_this_fluid {
            self.fluid.u_ratio_between(temperature, self.quality.temperature_k)
        } else {
            self.fluid.u_viscosity_at(temperature)
        }
    }
}

fn check(element: &Element, fluid: &StoredFluid, quality: &Quality) -> Result<(), Error> {
    element.check()?;
    fluid.check()?;
    quality.check()
}

/// Dry volume of a kilogram at reference conditions, m3/kg; 0 where the fluid's table does not reach.
#[inline(never)] // three callers, none in a hurry
fn standard_volume(fluid: &StoredFluid, reference: &ReferenceConditions) -> f32 {
    let (t, p) = (reference.temperature.as_kelvin(), reference.pressure.as_pascals());
    if outside(fluid, t, p).is_empty() { 1.0 / PropertiesAt::new(fluid, t).density(p) } else { 0.0 }
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
    /// Relative standard uncertainty of the mass flow, which answers to line pressure and temperature through density.
    pub mass_uncertainty: Uncertainty,
    /// Relative standard uncertainty of the flow at reference conditions, dry.
    pub standard_uncertainty: Uncertainty,
}

impl core::ops::Deref for Flow {
    type Target = Sample;
    fn deref(&self) -> &Sample {
        &self.sample
    }
}
