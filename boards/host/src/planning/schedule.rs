//! The plan of a calibration: what is asked of it, where its points lie, what it reaches.

use crate::planning::spacing::Spacing;
use evenbore::calibration::Quality;
use serde::Serialize;

/// Fewest and most set-points: five let the laminar law be judged, more than fifteen are rarely set.
pub(crate) const SET_POINTS: [usize; 2] = [5, 15];
/// Fewest points that a calibration passes without remark.
pub const FEWEST_POINTS: usize = 8;
/// Shares of full scale at which the outcome is stated.
pub const STATED: [f64; 4] = [0.03, 0.10, 0.30, 1.00];

/// What counts against the target.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Counting {
    /// The flow as the instrument states it: fit, common parts and the sensors in use.
    Flow,
    /// Fit and common parts alone.
    Calibration,
}

/// What is asked of a calibration.
#[derive(Debug, Clone, Copy)]
pub struct Goal {
    /// Expanded relative uncertainty (k = 2).
    pub target: f64,
    /// Lowest and highest flow as shares of full scale.
    pub over: [f64; 2],
    /// Pressure drop at full scale, Pa.
    pub full_scale: f64,
    /// What counts against the target.
    pub counting: Counting,
    /// Most points.
    pub most_points: usize,
}

/// A set-point of the plan.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct SetPoint {
    /// Pressure drop to set, Pa.
    #[serde(rename = "pressure_drop_Pa")]
    pub pressure_drop: f64,
    /// Flow to expect at the element's inlet, m3/s.
    #[serde(rename = "flow_m3_s")]
    pub flow: f64,
    /// How often it is measured.
    pub repeats: usize,
}

/// What the meter will be worth at a share of full-scale flow.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Reached {
    /// Share of full-scale flow.
    pub share: f64,
    /// Pressure drop there, Pa.
    #[serde(rename = "pressure_drop_Pa")]
    pub pressure_drop: f64,
    /// Standard uncertainty from the fit, relative.
    pub fit: f64,
    /// From what all points share.
    pub common: f64,
    /// From the sensors in use.
    pub sensors: f64,
    /// Expanded (k = 2), all three.
    pub expanded: f64,
    /// Expanded (k = 2), fit and common parts alone.
    pub expanded_calibration: f64,
}

impl Reached {
    /// The expanded uncertainty that counts against the target.
    pub fn counted(&self, counting: Counting) -> f64 {
        match counting {
            Counting::Flow => self.expanded,
            Counting::Calibration => self.expanded_calibration,
        }
    }

    /// What stands however many points there are.
    pub fn floor(&self, counting: Counting) -> f64 {
        match counting {
            Counting::Flow => 2.0 * self.common.hypot(self.sensors),
            Counting::Calibration => 2.0 * self.common,
        }
    }
}

/// A plan that reaches its goal.
#[derive(Debug, Clone, PartialEq)]
pub struct Plan {
    /// How the set-points lie.
    pub spacing: Spacing,
    /// The set-points, ascending.
    pub set_points: Vec<SetPoint>,
    /// The worst counted uncertainty over the range.
    pub worst: f64,
    /// Outcome at 3, 10, 30 and 100 % of full scale.
    pub reached: Vec<Reached>,
    /// What the calibration will say of the element.
    pub quality: Quality,
}

impl Plan {
    /// Points of the run.
    pub fn points(&self) -> usize {
        self.set_points.iter().map(|p| p.repeats).sum()
    }

    /// Pressure drops (Pa) in the order of measuring: sweeps up and down in turn, so that drift and hysteresis show.
    pub fn sequence(&self) -> Vec<f64> {
        let most = self.set_points.iter().map(|p| p.repeats).max().unwrap_or(0);
        let sweep = |k: usize| {
            let mut drops: Vec<f64> =
                self.set_points.iter().filter(|p| p.repeats > k).map(|p| p.pressure_drop).collect();
            if k % 2 == 1 {
                drops.reverse();
            }
            drops
        };
        (0..most).flat_map(sweep).collect()
    }
}
