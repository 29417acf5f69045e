//! The virtual element over a range of states: tabulated where many samples share one, computed where few do.
//!
//! Tabulated is `ln(mdot mu/(rho dP))`, mu and rho at the mean pressure, which is nearly constant; between Chebyshev
//! points of the first kind it is interpolated by the barycentric formula (Berrut & Trefethen 2004). Checks between the
//! points state the error; a table worse than [`LARGEST_ERROR`] is refined, and not used if that does not help.

use crate::parallel::each;
use crate::virtual_element::{Refused, Substance, Upstream, VirtualElement};
use evenbore::double::Properties;
use evenbore::fluid::StoredFluid;

/// Largest relative error of an interpolated flow.
pub const LARGEST_ERROR: f64 = 1e-5;
/// Points along pressure drop, tried in turn; along temperature and along line pressure.
const DROPS: [usize; 3] = [9, 17, 33];
const STATES: usize = 4;
/// Where a table is checked, as shares of its ranges of pressure drop, temperature and line pressure.
const CHECKS: [[f64; 3]; 4] = [[0.04, 0.3, 0.8], [0.35, 0.7, 0.2], [0.7, 0.15, 0.4], [0.96, 0.85, 0.65]];

/// Points of one variable.
#[derive(Debug, Clone)]
struct Axis {
    range: [f64; 2],
    points: Vec<f64>,
    weights: Vec<f64>,
}

impl Axis {
    fn new([low, high]: [f64; 2], n: usize) -> Self {
        let n = if high > low { n } else { 1 };
        let angle = |k: usize| std::f64::consts::PI * (2 * k + 1) as f64 / (2 * n) as f64;
        let points = (0..n).map(|k| 0.5 * (low + high) - 0.5 * (high - low) * angle(k).cos()).collect();
        let weights = (0..n).map(|k| if k % 2 == 0 { angle(k).sin() } else { -angle(k).sin() }).collect();
        Self { range: [low, high], points, weights }
    }

    /// Share of each point in the value at `x`.
    fn shares(&self, x: f64) -> Vec<f64> {
        if let Some(hit) = self.points.iter().position(|point| (point - x).abs() < 1e-13 * x.abs()) {
            return (0..self.points.len()).map(|k| if k == hit { 1.0 } else { 0.0 }).collect();
        }
        let terms: Vec<f64> = self.points.iter().zip(&self.weights).map(|(point, w)| w / (x - point)).collect();
        let sum: f64 = terms.iter().sum();
        terms.iter().map(|term| term / sum).collect()
    }

    fn at(&self, share: f64) -> f64 {
        self.range[0] + share * (self.range[1] - self.range[0])
    }
}

/// Mass flows (kg/s) of an element and fluid over ranges of pressure drop (Pa), temperature (K) and line pressure (Pa).
#[derive(Debug, Clone)]
pub struct Truth<'a> {
    element: &'a VirtualElement,
    fluid: &'a StoredFluid,
    table: Option<([Axis; 3], Vec<f64>)>,
    /// Relative error found between the points of the table; 0 where every flow is computed.
    pub error: f64,
}

impl<'a> Truth<'a> {
    /// Prepares for `samples` flows within ranges of pressure drop, temperature and line pressure.
    ///
    /// # Errors
    /// A flow within the ranges is impossible.
    pub fn new(
        element: &'a VirtualElement,
        fluid: &'a StoredFluid,
        ranges: [[f64; 2]; 3],
        samples: usize,
    ) -> Result<Self, Refused> {
        let mut truth = Self { element, fluid, table: None, error: 0.0 };
        for drops in DROPS {
            let axes = [Axis::new(ranges[0], drops), Axis::new(ranges[1], STATES), Axis::new(ranges[2], STATES)];
            let points: usize = axes.iter().map(|axis| axis.points.len()).product();
            if points > 1 && samples <= points + CHECKS.len() {
                break;
            }
            truth.fill(axes)?;
            truth.error = truth.worst(ranges)?;
            if truth.error <= LARGEST_ERROR {
                return Ok(truth);
            }
        }
        Ok(Self { table: None, error: 0.0, ..truth })
    }

    fn fill(&mut self, axes: [Axis; 3]) -> Result<(), Refused> {
        let [drops, temperatures, pressures] = &axes;
        let (n, m) = (drops.points.len(), temperatures.points.len());
        let value = |i: usize| {
            let state = [drops.points[i % n], temperatures.points[i / n % m], pressures.points[i / n / m]];
            Ok((self.computed(state)? / self.scale(state)).ln())
        };
        let values: Result<Vec<f64>, Refused> = each(n * m * pressures.points.len(), value).into_iter().collect();
        self.table = Some((axes, values?));
        Ok(())
    }

    /// Largest error at the checks; none for a single point.
    fn worst(&self, ranges: [[f64; 2]; 3]) -> Result<f64, Refused> {
        if ranges.iter().all(|[low, high]| low == high) {
            return Ok(0.0);
        }
        let Some((axes, _)) = &self.table else { return Ok(0.0) };
        let check = |i: usize| {
            let state = std::array::from_fn(|k| axes[k].at(CHECKS[i][k]));
            Ok((self.mass_flow(state)? / self.computed(state)? - 1.0).abs())
        };
        let errors: Result<Vec<f64>, Refused> = each(CHECKS.len(), check).into_iter().collect();
        Ok(errors?.into_iter().fold(0.0, f64::max))
    }

    /// `rho dP/mu` at the mean pressure.
    fn scale(&self, [drop, t, p]: [f64; 3]) -> f64 {
        let (fluid, mean) = (Properties::at(self.fluid, t), p - 0.5 * drop);
        fluid.density(mean) * drop / fluid.viscosity(mean)
    }

    fn computed(&self, [drop, t, p]: [f64; 3]) -> Result<f64, Refused> {
        Ok(self.element.flow(&Substance::new(self.fluid), &Upstream::at(p, t), drop)?.mass_flow)
    }

    /// Mass flow (kg/s) at a pressure drop (0 or more), temperature and line pressure.
    ///
    /// # Errors
    /// The case is impossible.
    pub fn mass_flow(&self, state: [f64; 3]) -> Result<f64, Refused> {
        if state[0] <= 0.0 {
            return Ok(0.0);
        }
        let Some((axes, values)) = &self.table else { return self.computed(state) };
        let shares: [Vec<f64>; 3] = std::array::from_fn(|k| axes[k].shares(state[k]));
        let mut sum = 0.0;
        let mut value = values.iter();
        for pressure in &shares[2] {
            for temperature in &shares[1] {
                for drop in &shares[0] {
                    sum += pressure * temperature * drop * value.next().copied().unwrap_or(f64::NAN);
                }
            }
        }
        Ok(self.scale(state) * sum.exp())
    }

    /// Pressure drop (Pa) that drives a mass flow (kg/s, 0 or more).
    ///
    /// # Errors
    /// No pressure drop does.
    pub fn pressure_drop(&self, mass_flow: f64, [t, p]: [f64; 2]) -> Result<f64, Refused> {
        if mass_flow <= 0.0 {
            return Ok(0.0);
        }
        let mut drop = mass_flow / self.scale([1.0, t, p]) * 1e9; // any start: the first steps are those of proportion
        drop = drop.min(0.01 * p);
        let (mut slope, mut last) = (1.0, None::<(f64, f64)>);
        let mut miss = f64::NAN;
        for _ in 0..60 {
            miss = (mass_flow / self.mass_flow([drop, t, p])?).ln();
            if miss.abs() < 1e-9 {
                return Ok(drop);
            }
            let x = drop.ln();
            if let Some((x0, miss0)) = last
                && (x - x0).abs() > 1e-12
            {
                slope = ((miss0 - miss) / (x - x0)).clamp(0.2, 1.2);
            }
            last = Some((x, miss));
            drop = (x + miss / slope).exp().min(0.5 * (drop + p));
        }
        Err(Refused::NotSettled { what: "the search for the pressure drop", change: miss })
    }
}
