//! The fewest points of a calibration that reach a target.
//!
//! For each spacing and number of set-points the fewest equal repeats that reach the target are found, then repeats are
//! taken away one at a time where the target still holds. Every trial run goes through the fit that a real run goes
//! through, and its uncertainty is the statement of the instrument after it (`Meter::flow`).

use crate::calibrate::samples::Sample;
use crate::planning::bench::Bench;
use crate::planning::schedule::{FEWEST_POINTS, Goal, Plan, Reached, SET_POINTS, STATED, SetPoint};
use crate::planning::spacing::Spacing;
use evenbore::Meter;
use evenbore::calibration::Quality;
use evenbore::status::Refusal;

/// Flows at which the target must hold.
const CHECKS: usize = 9;

/// Set-points with the fit's view of one point at each.
pub(crate) struct Trial {
    spacing: Spacing,
    samples: Vec<Sample>,
    set_points: Vec<SetPoint>,
}

/// A bench and what is asked of it, with what does not change between trials.
pub(crate) struct Search<'a> {
    pub bench: &'a Bench<'a>,
    pub goal: &'a Goal,
    /// Pressure drops at which the target must hold, with their shares of flow.
    pub checks: Vec<[f64; 2]>,
    stated: Vec<[f64; 2]>,
}

impl<'a> Search<'a> {
    pub(crate) fn new(bench: &'a Bench<'a>, goal: &'a Goal) -> Result<Self, Refusal> {
        let law = bench.state.law(bench.element, bench.fluid)?;
        let full = law.flow(goal.full_scale)?.mass;
        let drops = |shares: &[f64]| {
            let pair = |&share: &f64| Ok([share, law.pressure_drop(share * full)?]);
            shares.iter().map(pair).collect::<Result<Vec<[f64; 2]>, Refusal>>()
        };
        let checks = drops(&Spacing::Geometric.shares(CHECKS, goal.over))?;
        Ok(Self { bench, goal, checks, stated: drops(&STATED)? })
    }

    /// The plan with the fewest points, if any reaches the goal.
    pub(crate) fn best(&self) -> Result<Option<Plan>, Refusal> {
        let mut best: Option<Plan> = None;
        for spacing in Spacing::ALL {
            for n in SET_POINTS[0]..=SET_POINTS[1].min(self.goal.most_points) {
                let trial = self.trial(spacing, n)?;
                let Some(found) = self.fewest(trial, best.as_ref().map(Plan::points)) else { continue };
                let key = |p: &Plan| (p.points(), p.worst);
                if best.as_ref().is_none_or(|best| key(&found) < key(best)) {
                    best = Some(found);
                }
            }
        }
        Ok(best)
    }

    pub(crate) fn trial(&self, spacing: Spacing, n: usize) -> Result<Trial, Refusal> {
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

    pub(crate) fn quality(&self, trial: &Trial, repeats: &[usize]) -> Option<Quality> {
        let times = trial.samples.iter().zip(repeats);
        let samples: Vec<Sample> = times.flat_map(|(s, &r)| std::iter::repeat_n(s, r).cloned()).collect();
        self.bench.quality(&samples)
    }

    fn reaches(&self, trial: &Trial, repeats: &[usize]) -> bool {
        let worst = self.quality(trial, repeats).and_then(|quality| self.worst(&quality));
        worst.is_some_and(|worst| worst <= self.goal.target)
    }

    pub(crate) fn meter(&self, quality: &Quality) -> Option<Meter<'a>> {
        let meter = Meter::calibrated(*self.bench.element, self.bench.fluid, quality.clone()).ok()?;
        meter.with_sensor_uncertainty(self.bench.sensors).ok()
    }

    pub(crate) fn worst(&self, quality: &Quality) -> Option<f64> {
        let reached = self.reached(quality, &self.checks)?;
        Some(reached.iter().map(|r| r.counted(self.goal.counting)).fold(0.0, f64::max))
    }

    pub(crate) fn reached(&self, quality: &Quality, at: &[[f64; 2]]) -> Option<Vec<Reached>> {
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
}

/// A pressure drop as a person sets it: three significant digits.
fn three_digits(drop: f64) -> f64 {
    format!("{drop:.2e}").parse().unwrap_or(drop)
}
