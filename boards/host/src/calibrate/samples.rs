//! A point of the bench as the law sees it: the columns of the fit, and how each source of error moves them.
//!
//! The law is linear in A and B: `Y = A u + B v` (DEVELOPERS.md, "Calibration"). Errors of flow and viscosity enter x
//! and Y together, so what counts for the fit is how a source moves the residual `r = Y - A u - B v`. The derivatives
//! of the three columns are taken numerically through the very kernels that make the columns.

use crate::input::points::{Point, Reference};
use crate::input::uncertain::Parts;
use evenbore::Element;
use evenbore::double::{Columns, Conditions, Properties};
use evenbore::fluid::StoredFluid;
use evenbore::status::Refusal;

/// Something a point was measured with.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Source {
    /// Pressure drop, Pa.
    PressureDrop,
    /// Element temperature, K.
    Temperature,
    /// Line pressure, Pa.
    LinePressure,
    /// Relative humidity, 1.
    RelativeHumidity,
    /// Reference flow, m3/s or kg/s.
    ReferenceFlow,
    /// Temperature at the reference, K.
    ReferenceTemperature,
    /// Pressure at the reference, Pa.
    ReferencePressure,
}

impl Source {
    /// All sources.
    pub const ALL: [Self; 7] = [
        Self::PressureDrop,
        Self::Temperature,
        Self::LinePressure,
        Self::RelativeHumidity,
        Self::ReferenceFlow,
        Self::ReferenceTemperature,
        Self::ReferencePressure,
    ];
}

/// What was measured at a point, one value per source; absent ones are not part of the point.
#[derive(Debug, Clone, Copy, PartialEq)]
struct Measured {
    values: [Option<f64>; 7],
    by_mass: bool,
}

impl Measured {
    fn new(point: &Point) -> Self {
        let (by_mass, temperature, pressure) = match point.reference {
            Reference::Mass(_) => (true, None, None),
            Reference::Volume { temperature, pressure, .. } => (false, temperature, pressure),
        };
        let values = [
            Some(point.pressure_drop),
            Some(point.temperature),
            Some(point.line_pressure),
            point.relative_humidity,
            Some(point.reference.flow()),
            temperature,
            pressure,
        ];
        Self { values, by_mass }
    }

    fn get(&self, source: Source) -> Option<f64> {
        self.values[source as usize]
    }

    fn moved(mut self, source: Source, by: f64) -> Self {
        self.values[source as usize] = self.values[source as usize].map(|value| value + by);
        self
    }
}

/// Element and fluid of a run.
#[derive(Debug, Clone, Copy)]
pub struct Setup<'a> {
    /// The element; only its geometry counts here.
    pub element: &'a Element,
    /// The fluid.
    pub fluid: &'a StoredFluid,
}

impl Setup<'_> {
    /// The law at the temperature, line pressure and humidity of a point.
    ///
    /// # Errors
    /// Refuses a state outside the fluid's table, and a humidity that cannot be.
    pub fn conditions(&self, point: &Point) -> Result<Conditions, Refusal> {
        Conditions::new(self.element, self.fluid, point.temperature, point.line_pressure, point.relative_humidity)
    }

    /// Mass flow (kg/s) that the reference of a point measured.
    fn mass_flow(&self, measured: &Measured, conditions: &Conditions, t: f64, p: f64) -> f64 {
        let flow = measured.get(Source::ReferenceFlow).unwrap_or_default();
        if measured.by_mass {
            return flow;
        }
        // Moist air keeps its composition from the element to the reference.
        let dry_here = Properties::at(self.fluid, t).density(p);
        let moisture = conditions.line_density() / dry_here;
        let t_reference = measured.get(Source::ReferenceTemperature).unwrap_or(t);
        let p_reference = measured.get(Source::ReferencePressure).unwrap_or(p);
        flow * moisture * Properties::at(self.fluid, t_reference).density(p_reference)
    }

    fn columns(&self, measured: &Measured) -> Result<(Columns, f64), Refusal> {
        let of = |source| measured.get(source).unwrap_or_default();
        let (t, p) = (of(Source::Temperature), of(Source::LinePressure));
        let humidity = measured.get(Source::RelativeHumidity);
        let conditions = Conditions::new(self.element, self.fluid, t, p, humidity)?;
        let mass = self.mass_flow(measured, &conditions, t, p);
        Ok((conditions.columns(of(Source::PressureDrop), mass)?, mass))
    }
}

/// Derivatives of the three columns with respect to one source.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Slope {
    y: f64,
    u: f64,
    v: f64,
}

impl Slope {
    /// Change of the residual `Y - A u - B v` per unit of the source.
    pub fn of_residual(&self, a: f64, b: f64) -> f64 {
        self.y - a * self.u - b * self.v
    }
}

/// A point ready for the fit.
#[derive(Debug, Clone)]
pub struct Sample {
    /// Line in the points file.
    pub line: u64,
    /// The law's columns.
    pub columns: Columns,
    /// Mass flow, kg/s.
    pub mass_flow: f64,
    /// Standard uncertainties and slopes of the sources that state any.
    pub sources: Vec<(Source, Parts, Slope)>,
    /// Pressure drop, Pa.
    pub pressure_drop: f64,
    /// Element temperature, K.
    pub temperature: f64,
    /// Line pressure, Pa.
    pub line_pressure: f64,
    /// Relative humidity, 0 to 1.
    pub relative_humidity: Option<f64>,
    /// Relative standard uncertainty of viscosity from the air's water, known or not; 0 for other fluids.
    pub u_viscosity_of_water: f64,
    /// Reference flow as the file gives it, m3/s or kg/s.
    pub reference_flow: f64,
}

/// Step of the numerical derivatives, relative.
const STEP: f64 = 1e-5;

impl Sample {
    /// Prepares a point.
    ///
    /// # Errors
    /// Refuses what the device would refuse.
    pub fn new(setup: &Setup<'_>, point: &Point) -> Result<Self, Refusal> {
        let measured = Measured::new(point);
        let (columns, mass_flow) = setup.columns(&measured)?;
        let mut sources = Vec::new();
        for (source, parts) in stated(point) {
            if parts != Parts::default() {
                sources.push((source, parts, slope(setup, &measured, source)?));
            }
        }
        Ok(Self {
            line: point.line,
            columns,
            mass_flow,
            sources,
            pressure_drop: point.pressure_drop,
            temperature: point.temperature,
            line_pressure: point.line_pressure,
            relative_humidity: point.relative_humidity,
            u_viscosity_of_water: setup.conditions(point)?.u_viscosity_of_water(),
            reference_flow: point.reference.flow(),
        })
    }

    /// Change of the residual per relative change of the fluid's viscosity: x falls and Y falls with it.
    pub fn viscosity_slope(&self, a: f64) -> f64 {
        -a * self.columns.u
    }
}

/// Derivative of the columns with respect to a source: a central difference, one-sided at the edge of a table.
fn slope(setup: &Setup<'_>, measured: &Measured, source: Source) -> Result<Slope, Refusal> {
    let Some(value) = measured.get(source) else { return Ok(Slope::default()) };
    let (above, below) = match source {
        Source::RelativeHumidity => ((1.0 - value).min(STEP), value.min(STEP)),
        _ => (STEP * value.abs(), STEP * value.abs()),
    };
    let here = setup.columns(measured)?.0;
    let at = |by: f64| setup.columns(&measured.moved(source, by)).map_or((here, 0.0), |(columns, _)| (columns, by));
    let ((up, above), (down, below)) = (at(above), at(-below));
    if above == below {
        return Ok(Slope::default());
    }
    let per = |high: f64, low: f64| (high - low) / (above - below);
    Ok(Slope { y: per(up.y, down.y), u: per(up.u, down.u), v: per(up.v, down.v) })
}

/// The uncertainties a point states, by source.
fn stated(point: &Point) -> [(Source, Parts); 7] {
    let (u_temperature, u_pressure) = match point.reference {
        Reference::Mass(_) => (Parts::default(), Parts::default()),
        Reference::Volume { u_temperature, u_pressure, .. } => (u_temperature, u_pressure),
    };
    [
        (Source::PressureDrop, point.u.pressure_drop),
        (Source::Temperature, point.u.temperature),
        (Source::LinePressure, point.u.line_pressure),
        (Source::RelativeHumidity, point.u.relative_humidity),
        (Source::ReferenceFlow, point.u_reference),
        (Source::ReferenceTemperature, u_temperature),
        (Source::ReferencePressure, u_pressure),
    ]
}
