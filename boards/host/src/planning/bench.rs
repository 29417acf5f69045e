//! A bench run before it is made: the points it would have, through the same fit as the points of a real one.

use crate::calibrate::samples::{Sample, Setup};
use crate::calibrate::verdict::{best_fit, quality};
use crate::input::points::{Point, Reference};
use crate::input::readings::RowUncertainty;
use crate::input::uncertain::Parts;
use crate::planning::state::State;
use evenbore::Element;
use evenbore::calibration::Quality;
use evenbore::fluid::StoredFluid;
use evenbore::quantity::Temperature;
use evenbore::reading::SensorUncertainty;
use evenbore::status::Refusal;

/// A bench, an element on it and the fluid through both.
#[derive(Debug, Clone, Copy)]
pub struct Bench<'a> {
    /// The element of nominal geometry.
    pub element: &'a Element,
    /// The fluid.
    pub fluid: &'a StoredFluid,
    /// Temperature and line pressure of the run.
    pub state: State,
    /// Sensors of the bench; their errors are taken as independent from point to point.
    pub sensors: SensorUncertainty,
    /// Relative standard uncertainty of the reference flow, independent from point to point.
    pub u_reference: f64,
    /// The part of it that all points share.
    pub u_reference_common: f64,
}

/// Errors of one point: pressure drop (Pa), temperature (K), line pressure (Pa), reference flow (relative).
pub type Errors = [f64; 4];

impl Bench<'_> {
    /// Standard uncertainties of a point at a pressure drop (Pa), independent parts, in the order of [`Errors`].
    pub fn uncertainties(&self, drop: f64) -> Errors {
        let s = &self.sensors;
        let both = |absolute: f32, relative: f32, value: f64| f64::from(absolute).hypot(f64::from(relative) * value);
        [
            both(s.pressure_drop_pa, s.pressure_drop_rel, drop),
            f64::from(s.temperature_k),
            both(s.line_pressure_pa, s.line_pressure_rel, self.state.line_pressure),
            self.u_reference,
        ]
    }

    /// Volume flow (m3/s) at the element's inlet that a pressure drop (Pa) drives.
    ///
    /// # Errors
    /// Refuses what the device refuses.
    pub fn flow(&self, drop: f64) -> Result<f64, Refusal> {
        Ok(self.state.law(self.element, self.fluid)?.flow(drop)?.volume)
    }

    /// A point at a pressure drop (Pa), read with these errors.
    ///
    /// # Errors
    /// Refuses what the device refuses.
    pub fn point(&self, line: u64, drop: f64, errors: Errors) -> Result<Point, Refusal> {
        let [u_drop, u_t, u_p, u_flow] = self.uncertainties(drop);
        let [e_drop, e_t, e_p, e_flow] = errors;
        let flow = self.flow(drop)?;
        let stated = |u: f64| Parts { independent: (u > 0.0).then_some(u), common: None };
        let common = (self.u_reference_common > 0.0).then_some(self.u_reference_common * flow);
        Ok(Point {
            line,
            pressure_drop: drop + e_drop,
            temperature: self.state.temperature + e_t,
            line_pressure: self.state.line_pressure + e_p,
            relative_humidity: None,
            reference: Reference::Volume {
                flow: flow * (1.0 + e_flow),
                temperature: Some(self.state.temperature),
                pressure: Some(self.state.line_pressure),
                u_temperature: Parts::default(),
                u_pressure: Parts::default(),
            },
            u: RowUncertainty {
                pressure_drop: stated(u_drop),
                temperature: stated(u_t),
                line_pressure: stated(u_p),
                relative_humidity: Parts::default(),
            },
            u_reference: Parts { common, ..stated(u_flow * flow) },
            extra: Vec::new(),
        })
    }

    /// A point of this run as the fit sees it.
    ///
    /// # Errors
    /// Refuses what the device refuses.
    pub fn sample(&self, line: u64, drop: f64, errors: Errors) -> Result<Sample, Refusal> {
        let setup = Setup { element: self.element, fluid: self.fluid };
        Sample::new(&setup, &self.point(line, drop, errors)?)
    }

    /// Relative standard uncertainty of the fluid's viscosity at the plan's temperature.
    fn u_viscosity(&self) -> f64 {
        f64::from(self.fluid.u_viscosity_at(Temperature::from_kelvin(self.state.temperature as f32)))
    }

    /// What a fit to these samples says of the element; absent when they cannot fix the coefficients.
    pub fn quality(&self, samples: &[Sample]) -> Option<Quality> {
        let nominal = Some([self.element.a(), self.element.b()].map(f64::from));
        let solution = best_fit(samples, nominal, self.u_viscosity()).ok()?;
        Some(quality(&solution, samples))
    }
}
