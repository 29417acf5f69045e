//! The plan, or why there is none: what no number of points lowers, or what the most points allowed leave.

use crate::planning::bench::Bench;
use crate::planning::budget::{Known, budget};
use crate::planning::schedule::{Counting, FEWEST_POINTS, Goal, Plan, Reached, SET_POINTS};
use crate::planning::search::Search;
use crate::planning::spacing::Spacing;
use evenbore::calibration::Quality;
use evenbore::reading::Trims;
use evenbore::status::Refusal;

/// The plan with the fewest points.
///
/// # Errors
/// Why no plan reaches the goal, or why no calibration is possible at all.
pub fn plan(bench: &Bench<'_>, goal: &Goal) -> Result<Plan, String> {
    let refused = |refusal: Refusal| bench.state.refused(bench.fluid, refusal);
    let search = Search::new(bench, goal).map_err(refused)?;
    search.best().map_err(refused)?.ok_or_else(|| search.why())
}

impl Search<'_> {
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
