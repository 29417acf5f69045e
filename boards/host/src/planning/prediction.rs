//! What a calibrated element is worth on another fluid, at another temperature: flows, uncertainty, budget.

use crate::planning::budget::{Budget, Known, budget, coverage};
use crate::planning::state::State;
use evenbore::flow::Flow;
use evenbore::fluid::StoredFluid;
use evenbore::reading::SensorUncertainty;
use evenbore::status::Refusal;
use evenbore::{Meter, Record};
use serde::Serialize;

/// Shares of full scale, in pressure drop, that a budget is made for.
pub const BUDGET_AT: [f64; 2] = [1.0, 0.1];
/// Flows below this share of full scale are not predicted.
const LOWEST_SHARE: f64 = 0.01;

/// The curve covers a decade at least.
const LARGEST_LOW: f64 = 0.1;

/// What is asked.
#[derive(Debug, Clone, Copy)]
pub struct Question<'a> {
    /// The record of the calibrated element.
    pub record: &'a Record,
    /// The fluid in use.
    pub fluid: &'a StoredFluid,
    /// Temperature, line pressure and humidity in use.
    pub state: State,
    /// Sensors in use.
    pub sensors: SensorUncertainty,
    /// Largest pressure drop, Pa; that of the largest calibrated flow, here or at calibration, if absent.
    pub full_scale: Option<f64>,
    /// Points of the curve, 2 or more.
    pub points: usize,
}

/// The instrument's flow at a pressure drop.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Row {
    /// Pressure drop, Pa.
    pub pressure_drop: f64,
    /// The flow, with status and uncertainty.
    pub flow: Flow,
    /// Coverage factor for 95.45 %.
    pub coverage_factor: f64,
}

impl Row {
    /// Expanded relative uncertainty.
    pub fn expanded(&self) -> f64 {
        self.coverage_factor * f64::from(self.flow.uncertainty.combined())
    }

    /// Volume flow at line conditions, m3/s.
    pub fn volume(&self) -> f64 {
        f64::from(self.flow.volume.as_cubic_metres_per_second())
    }
}

/// The answer.
#[derive(Debug, Clone, PartialEq)]
pub struct Prediction {
    /// The curve, from small flow to large.
    pub rows: Vec<Row>,
    /// The budget at full scale and at a tenth of it in pressure drop.
    pub budgets: Vec<Budget>,
    /// Whether the fluid in use is that of the calibration.
    pub same_fluid: bool,
}

impl<'a> Question<'a> {
    /// The meter in use.
    ///
    /// # Errors
    /// Names what makes no sense in the record, the fluid or the sensors.
    pub fn meter(&self) -> Result<Meter<'a>, evenbore::error::Error> {
        self.record.meter()?.with_fluid(self.fluid)?.with_sensor_uncertainty(self.sensors)
    }

    fn known(&self) -> Known<'a> {
        let same_fluid = *self.fluid == self.record.fluid;
        Known { quality: &self.record.quality, same_fluid, trims: self.record.trims }
    }

    /// Pressure drop (Pa) at the largest calibrated x, on this fluid or on that of the calibration, whichever is less:
    /// neither the calibrated range nor that of the pressure-drop sensor is left.
    fn calibrated_drop(&self) -> Result<f64, Refusal> {
        let there = f64::from(self.record.quality.temperature_k.as_kelvin());
        let calibration = self.drop_at_largest(&self.record.fluid, &State::dry(there, self.state.line_pressure));
        let here = self.drop_at_largest(self.fluid, &self.state);
        match (here, calibration) {
            (Ok(here), Ok(there)) => Ok(here.min(there)),
            (here, there) => here.or(there),
        }
    }

    fn drop_at_largest(&self, fluid: &StoredFluid, state: &State) -> Result<f64, Refusal> {
        let law = state.law(&self.record.element, fluid)?;
        let x = f64::from(self.record.quality.x_max_m);
        // x counts viscosity at the mean pressure; three rounds find it to 1e-9.
        let mut drop = 0.0;
        for _ in 0..3 {
            drop = law.pressure_drop(x * law.viscosity(state.line_pressure - 0.5 * drop))?;
        }
        Ok(drop)
    }

    /// Answers.
    ///
    /// # Errors
    /// Says why, with values and limits.
    pub fn answer(&self) -> Result<Prediction, String> {
        let meter = self.meter().map_err(|error| error.to_string())?;
        let full = match self.full_scale {
            Some(drop) => drop,
            None => self.calibrated_drop().map_err(|refusal| self.no_range(refusal))?,
        };
        let refused = |refusal| self.state.refused(self.fluid, refusal);
        let rows = self.drops(full).map_err(refused)?.into_iter().map(|drop| self.row(&meter, drop));
        let rows = rows.collect::<Result<Vec<Row>, Refusal>>().map_err(refused)?;
        let known = self.known();
        let budgets = BUDGET_AT.iter().map(|&at| budget(&meter, &known, &self.state, at, single(at * full)));
        let budgets = budgets.collect::<Result<Vec<Budget>, Refusal>>().map_err(refused)?;
        Ok(Prediction { rows, budgets, same_fluid: known.same_fluid })
    }

    fn row(&self, meter: &Meter<'_>, drop: f64) -> Result<Row, Refusal> {
        let flow = meter.flow(&self.state.reading(drop))?;
        Ok(Row { pressure_drop: drop, flow, coverage_factor: coverage(&flow, &self.record.quality) })
    }

    /// Pressure drops (Pa) of the curve: geometric in flow, from the smallest calibrated one (or a tenth, where that is
    /// more) to full scale.
    fn drops(&self, full: f64) -> Result<Vec<f64>, Refusal> {
        let law = self.state.law(&self.record.element, self.fluid)?;
        let largest = law.flow(full)?;
        let x_min = f64::from(self.record.quality.x_min_m);
        let low = (x_min / largest.x).clamp(LOWEST_SHARE, LARGEST_LOW);
        let last = self.points.saturating_sub(1).max(1);
        let at = |i: usize| match i {
            i if i == last => Ok(single(full)),
            i => Ok(single(law.pressure_drop(largest.mass * low.powf(1.0 - i as f64 / last as f64))?)),
        };
        (0..=last).map(at).collect()
    }

    fn no_range(&self, refusal: Refusal) -> String {
        if refusal == Refusal::OUTLET_VACUUM || refusal == Refusal::PRESSURE_OUTSIDE_TABLE {
            let p = self.state.line_pressure / 1e3;
            let name = self.fluid.name();
            return format!(
                "{refusal}: no pressure drop below {p} kPa drives the largest calibrated flow of {name}; give the largest \
                 pressure drop of interest with --pressure-drop"
            );
        }
        self.state.refused(self.fluid, refusal)
    }
}

/// A number as the instrument holds it, so that a file of it is read back to the same bits.
fn single(value: f64) -> f64 {
    f64::from(value as f32)
}

/// A row as JSON.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(non_snake_case)]
pub struct RowSummary {
    /// Pressure drop, Pa.
    pub pressure_drop_Pa: f64,
    /// Volume flow at line conditions, m3/s.
    pub volume_flow_m3_s: f32,
    /// Mass flow, kg/s.
    pub mass_flow_kg_s: f32,
    /// Reynolds number.
    pub reynolds: f32,
    /// Relative standard uncertainty.
    pub u_volume_flow_rel: f32,
    /// Coverage factor.
    pub coverage_factor: f64,
    /// Relative expanded uncertainty.
    pub expanded_rel: f64,
    /// Status, as `flow` writes it.
    pub status: String,
}

impl From<&Row> for RowSummary {
    fn from(row: &Row) -> Self {
        Self {
            pressure_drop_Pa: row.pressure_drop,
            volume_flow_m3_s: row.flow.volume.as_cubic_metres_per_second(),
            mass_flow_kg_s: row.flow.mass.as_kilograms_per_second(),
            reynolds: row.flow.reynolds,
            u_volume_flow_rel: row.flow.uncertainty.combined(),
            coverage_factor: row.coverage_factor,
            expanded_rel: row.expanded(),
            status: row.flow.status.to_string(),
        }
    }
}
