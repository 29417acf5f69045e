//! The fewest points of a calibration that reach a target.
//!
//! For each spacing and number of set-points the fewest equal repeats that reach the target are found, then repeats are
//! taken away one at a time where the target still holds. Every trial run goes through the fit that a real run goes
//! through, and its uncertainty is the statement of the instrument after it (`Meter::flow`).

use crate::calibrate::samples::Sample;
use crate::planning::bench::Bench;
use crate::planning::budget::{Known, budget};
use crate::planning::spacing::Spacing;
use evenbore::Meter;
use evenbore::calibration::Quality;
use evenbore::reading::Trims;
use evenbore::status::Refusal;
use serde::Serialize;

/// Fewest and most set-points: five let the laminar law be judged, more than fifteen are rarely set.
const SET_POINTS: [usize; 2] = [5, 15];
/// Fewest points that a calibration passes without remark.
pub const FEWEST_POINTS: usize = 8;
/// Flows at which the target must hold.
const CHECKS: usize = 9;
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
    fn counted(&self, counting: Counting) -> f64 {
        match counting {
            Counting::Flow => self.expanded,
            Counting::Calibration => self.expanded_calibration,
        }
    }

    /// What stands however many points there are.
    fn floor(&self, counting: Counting) -> f64 {
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

/// Set-points with the fit's view of one point at each.
struct Trial {
    spacing: Spacing,
    samples: Vec<Sample>,
    set_points: Vec<SetPoint>,
}

/// A bench and what is asked of it, with what does not change between trials.
struct Search<'a> {
    bench: &'a Bench<'a>,
    goal: &'a Goal,
    /// Pressure drops at which the target must hold, with their shares of flow.
    checks: Vec<[f64; 2]>,
    stated: Vec<[f64; 2]>,
}

/// Finds the plan with the fewest points.
///
/// # Errors
/// Why no plan reaches the goal, or why no calibration is possible at all.
pub fn plan(bench: &Bench<'_>, goal: &Goal) -> Result<Plan, String> {
    let refused = |refusal: Refusal| bench.state.refused(bench.fluid, refusal);
    let search = Search::new(bench, goal).map_err(refused)?;
    let mut best: Option<Plan> = None;
    for spacing in Spacing::ALL {
        for n in SET_POINTS[0]..=SET_POINTS[1].min(goal.most_points) {
            let trial = search.trial(spacing, n).map_err(refused)?;
            let Some(found) = search.fewest(trial, best.as_ref().map(Plan::points)) else { continue };
            let key = |p: &Plan| (p.points(), p.worst);
            if best.as_ref().is_none_or(|best| key(&found) < key(best)) {
                best = Some(found);
            }
        }
    }
    match best {
        Some(plan) => Ok(plan),
        None => Err(search.why()),
    }
}

impl<'a> Search<'a> {
    fn new(bench: &'a Bench<'a>, goal: &'a Goal) -> Result<Self, Refusal> {
        let law = bench.state.law(bench.element, bench.fluid)?;
        let full = law.flow(goal.full_scale)?.mass;
        let drops = |shares: &[f64]| {
            let pair = |&share: &f64| Ok([share, law.pressure_drop(share * full)?]);
            shares.iter().map(pair).collect::<Result<Vec<[f64; 2]>, Refusal>>()
        };
        let checks = drops(&Spacing::Geometric.shares(CHECKS, goal.over))?;
        Ok(Self { bench, goal, checks, stated: drops(&STATED)? })
    }

    fn trial(&self, spacing: Spacing, n: usize) -> Result<Trial, Refusal> {
        let law = self.bench.state.law(self.bench.element, self.bench.fluid)?;
        let full = law.flow(self.goal.full_scale)?.mass;
        let set = |share: f64| {
            let drop = three_digits(law.pressure_drop(share * full)?);
            Ok(SetPoint { pressure_drop: drop, flow: law.flow(drop)?.volume, repeats: 0 })
        };
        let shares = spacing.shares(n, self.goal.over);
        let set_points = shares.into_iter().map(set).collect::<Result<Vec<SetPoint>, Refusal>>()?;
        let sample = |point: &SetPoint| self.bench.sample(0, point.pressure_drop, [0.0; 4]);
        let samples = set_points.iter().map(sample).collect::<Result<_, Refusal>>()?;
        Ok(Trial { spacing, samples, set_points })
    }

    /// The fewest points of a trial's set-points that reach the goal; absent when none does or `to_beat` is fewer.
    fn fewest(&self, trial: Trial, to_beat: Option<usize>) -> Option<Plan> {
        let n = trial.set_points.len();
        let equal = |r: usize| vec![r; n];
        let least = FEWEST_POINTS.div_ceil(n);
        let start = (least..=self.goal.most_points / n).find(|&r| self.reaches(&trial, &equal(r)))?;
        let mut repeats = equal(start);
        while let Some(fewer) = self.one_fewer(&trial, &repeats) {
            repeats = fewer;
        }
        if to_beat.is_some_and(|points| repeats.iter().sum::<usize>() > points) {
            return None;
        }
        self.finished(trial, &repeats)
    }

    /// The repeats with one taken away where that costs least, if the goal still holds.
    fn one_fewer(&self, trial: &Trial, repeats: &[usize]) -> Option<Vec<usize>> {
        if repeats.iter().sum::<usize>() <= FEWEST_POINTS {
            return None;
        }
        let without = |i: usize| {
            let mut fewer = repeats.to_vec();
            fewer[i] -= 1;
            let worst = self.worst(&self.quality(trial, &fewer)?)?;
            (worst <= self.goal.target).then_some((worst, fewer))
        };
        let found = (0..repeats.len()).filter(|&i| repeats[i] > 1).filter_map(without);
        found.min_by(|p, q| p.0.total_cmp(&q.0)).map(|(_, fewer)| fewer)
    }

    fn quality(&self, trial: &Trial, repeats: &[usize]) -> Option<Quality> {
        let times = trial.samples.iter().zip(repeats);
        let samples: Vec<Sample> = times.flat_map(|(s, &r)| std::iter::repeat_n(s, r).cloned()).collect();
        self.bench.quality(&samples)
    }

    fn reaches(&self, trial: &Trial, repeats: &[usize]) -> bool {
        let worst = self.quality(trial, repeats).and_then(|quality| self.worst(&quality));
        worst.is_some_and(|worst| worst <= self.goal.target)
    }

    fn meter(&self, quality: &Quality) -> Option<Meter<'a>> {
        let meter = Meter::calibrated(*self.bench.element, self.bench.fluid, quality.clone()).ok()?;
        meter.with_sensor_uncertainty(self.bench.sensors).ok()
    }

    fn worst(&self, quality: &Quality) -> Option<f64> {
        let reached = self.reached(quality, &self.checks)?;
        Some(reached.iter().map(|r| r.counted(self.goal.counting)).fold(0.0, f64::max))
    }

    fn reached(&self, quality: &Quality, at: &[[f64; 2]]) -> Option<Vec<Reached>> {
        let meter = self.meter(quality)?;
        let one = |&[share, drop]: &[f64; 2]| {
            let u = meter.flow(&self.bench.state.reading(drop)).ok()?.uncertainty;
            let [fit, common, sensors] = [u.fit, u.common, u.sensors].map(f64::from);
            Some(Reached {
                share,
                pressure_drop: drop,
                fit,
                common,
                sensors,
                expanded: 2.0 * fit.hypot(common).hypot(sensors),
                expanded_calibration: 2.0 * fit.hypot(common),
            })
        };
        at.iter().map(one).collect()
    }

    fn finished(&self, trial: Trial, repeats: &[usize]) -> Option<Plan> {
        let quality = self.quality(&trial, repeats)?;
        let set = |(point, &repeats): (&SetPoint, &usize)| SetPoint { repeats, ..*point };
        Some(Plan {
            spacing: trial.spacing,
            set_points: trial.set_points.iter().zip(repeats).map(set).collect(),
            worst: self.worst(&quality)?,
            reached: self.reached(&quality, &self.stated)?,
            quality,
        })
    }

    /// Why no plan reaches the goal: what remains with the most points allowed, and whether points could lower it.
    fn why(&self) -> String {
        let target = 100.0 * self.goal.target;
        let Some((quality, spacing)) = self.most_made_of() else {
            let least = SET_POINTS[0].max(FEWEST_POINTS);
            return format!("--max-points {}: a calibration needs {least} or more", self.goal.most_points);
        };
        let Some(reached) = self.reached(&quality, &self.checks) else {
            return "no calibration of this element can be fitted at these flows".into();
        };
        let counting = self.goal.counting;
        let by = |of: &dyn Fn(&Reached) -> f64| reached.iter().copied().max_by(|p, q| of(p).total_cmp(&of(q)));
        let (Some(floor), Some(worst)) = (by(&|r| r.floor(counting)), by(&|r| r.counted(counting))) else {
            return "no flow to check".into();
        };
        if floor.floor(counting) >= self.goal.target {
            return self.floor_words(&quality, &floor, target);
        }
        format!(
            "{} points, {}, reach {:.3} % at {:.0} % of full scale, the target is {target:.3} %: the fit alone stands \
             at {:.3} % (k = 2) there; raise --max-points, or lower what varies from point to point \
             (--u-reference-flow, --u-pressure-drop)",
            self.goal.most_points,
            spacing.words(),
            100.0 * worst.counted(counting),
            100.0 * worst.share,
            200.0 * worst.fit
        )
    }

    /// The lowest uncertainty that the most points allowed can give.
    fn most_made_of(&self) -> Option<(Quality, Spacing)> {
        let n = SET_POINTS[0].max(FEWEST_POINTS);
        let repeats = vec![self.goal.most_points / n; n];
        let one = |spacing: Spacing| {
            let quality = self.quality(&self.trial(spacing, n).ok()?, &repeats)?;
            Some((self.worst(&quality)?, quality, spacing))
        };
        let all = Spacing::ALL.into_iter().filter_map(one);
        all.min_by(|p, q| p.0.total_cmp(&q.0)).map(|(_, quality, spacing)| (quality, spacing))
    }

    fn floor_words(&self, quality: &Quality, at: &Reached, target: f64) -> String {
        let counting = self.goal.counting;
        let dominant = self.largest_that_stays(quality, at).unwrap_or_default();
        let common = 200.0 * at.common;
        let head = if common >= target || counting == Counting::Calibration {
            format!("what all points share alone gives {common:.3} %")
        } else {
            format!(
                "what all points share and the sensors in use give {:.3} % (common {common:.3} %, sensors {:.3} %)",
                100.0 * at.floor(counting),
                200.0 * at.sensors
            )
        };
        format!(
            "{head} (k = 2) at {:.0} % of full scale, the target is {target:.3} %, and no number of points lowers it; \
             the largest part is {dominant}",
            100.0 * at.share
        )
    }

    /// Name and size of the largest source that points do not lower.
    fn largest_that_stays(&self, quality: &Quality, at: &Reached) -> Option<String> {
        let meter = self.meter(quality)?;
        let known = Known { quality, same_fluid: true, trims: Trims::NONE };
        let budget = budget(&meter, &known, &self.bench.state, at.share, at.pressure_drop).ok()?;
        let counting = self.goal.counting;
        let stays = budget.sources.iter().filter(|row| match row.part {
            "common" => true,
            "sensors" => counting == Counting::Flow,
            _ => false,
        });
        let largest = stays.max_by(|p, q| p.contribution.total_cmp(&q.contribution))?;
        Some(format!("the {}, {:.3} %", largest.source, 200.0 * largest.contribution))
    }
}

/// A pressure drop as a person sets it: three significant digits.
fn three_digits(drop: f64) -> f64 {
    format!("{drop:.2e}").parse().unwrap_or(drop)
}
