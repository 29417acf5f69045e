//! The shortlist: stock sizes for a flow and a pressure drop, cut to length by the law.
//!
//! For each stock bore (or gap) and each length looked at first, the number of channels that the law asks for is
//! rounded to a whole one, and the length is then trimmed until full-scale flow needs the pressure drop asked for at
//! the temperature where it needs most. Of each bore (or gap) the best remains.

use crate::input::element_file::{ElementFile, Shape};
use crate::planning::design::{Design, Reject, element_file, judge};
use crate::planning::state::State;
use crate::planning::stock::{
    BORES_MM, GAPS_MM, LENGTH_LIMITS_MM, LENGTH_STEP_MM, LENGTHS_MM, SLOT_WIDTHS_MM, WIDTH_OVER_GAP,
};
use crate::planning::task::Task;
use crate::resources::elements::nominal;
use std::collections::BTreeMap;

/// Step in which uncertainties at a tenth of full scale are told apart (0.05 %).
const UNCERTAINTY_STEP: f64 = 5e-4;

/// How the shortlist is sorted.
pub const ORDER: &str =
    "shape; expanded uncertainty at 10 % of full scale in steps of 0.05 %, then fewer channels, then shorter";

/// The shortlist and what was left out.
#[derive(Debug, Clone, PartialEq)]
pub struct Shortlist {
    /// The designs, best first.
    pub designs: Vec<Design>,
    /// Candidates looked at.
    pub candidates: usize,
    /// Candidates that the law accepts.
    pub accepted: usize,
    /// How many were rejected, by reason.
    pub rejected: BTreeMap<Reject, usize>,
}

impl Shortlist {
    /// Keeps the first `most` designs of each shape.
    pub fn keep(&mut self, most: usize) {
        let mut kept: BTreeMap<&str, usize> = BTreeMap::new();
        self.designs.retain(|design| {
            let count = kept.entry(design.shape).or_default();
            *count += 1;
            *count <= most
        });
    }
}

/// Sizes elements for a task.
pub fn shortlist(task: &Task<'_>) -> Shortlist {
    let families = families(task);
    let mut list = Shortlist { designs: Vec::new(), candidates: 0, accepted: 0, rejected: BTreeMap::new() };
    for family in &families {
        let judged: Vec<Result<Design, Reject>> = family.iter().map(|one| candidate(task, one)).collect();
        list.candidates += judged.len();
        let mut best: Option<Design> = None;
        for design in judged {
            match design {
                Ok(design) => {
                    list.accepted += 1;
                    best = Some(best.filter(|best| rank(best) <= rank(&design)).unwrap_or(design));
                }
                Err(reason) => *list.rejected.entry(reason).or_default() += 1,
            }
        }
        list.designs.extend(best);
    }
    list.designs.sort_by_key(rank);
    list
}

/// Sorting key: see [`ORDER`].
fn rank(design: &Design) -> (bool, u64, u32, u64) {
    let tenth = design.uncertainty.iter().find(|at| at.share == 0.1).map_or(1.0, |at| at.expanded_rel);
    (
        design.bore_mm.is_none(),
        (tenth / UNCERTAINTY_STEP).round() as u64,
        design.count,
        (design.length_mm * 10.0) as u64,
    )
}

/// A candidate before the law has spoken: shape of one channel, and the length looked at first.
#[derive(Debug, Clone, Copy)]
struct Channel {
    shape: Shape,
    length_mm: f64,
}

impl Channel {
    /// Element file of `count` such channels.
    fn times(&self, count: u32, length_mm: f64) -> ElementFile {
        let shape = match self.shape {
            Shape::ParallelPlates { gap_mm, width_mm } => {
                Shape::ParallelPlates { gap_mm, width_mm: width_mm * f64::from(count) }
            }
            other => other,
        };
        element_file(shape, count, length_mm)
    }
}

/// Channels to look at, one family per bore or gap.
fn families(task: &Task<'_>) -> Vec<Vec<Channel>> {
    let lengths = |shape: Shape| LENGTHS_MM.map(|length_mm| Channel { shape, length_mm });
    let tubes =
        BORES_MM.iter().filter(|_| task.shapes.tubes).map(|&bore_mm| lengths(Shape::RoundTubes { bore_mm }).to_vec());
    let slots = |&gap_mm: &f64| -> Vec<Channel> {
        let wide = SLOT_WIDTHS_MM.iter().filter(|&&width| width >= WIDTH_OVER_GAP * gap_mm);
        wide.flat_map(|&width_mm| lengths(Shape::ParallelPlates { gap_mm, width_mm })).collect()
    };
    tubes.chain(GAPS_MM.iter().filter(|_| task.shapes.plates).map(slots)).collect()
}

/// Counts the channels, trims the length and judges the outcome.
fn candidate(task: &Task<'_>, channel: &Channel) -> Result<Design, Reject> {
    let count = count(task, channel)?;
    let length_mm = trimmed(task, channel, count)?;
    judge(task, channel.times(count, length_mm))
}

/// Whole number of channels that come nearest to the flow at the length looked at first.
fn count(task: &Task<'_>, channel: &Channel) -> Result<u32, Reject> {
    let one = nominal(&channel.times(1, channel.length_mm)).map_err(|_| Reject::Length)?;
    let needed = |&t: &f64| {
        let law = State::dry(t, task.line_pressure).law(&one, task.fluid).ok()?;
        Some(task.flow / law.flow(task.pressure_drop).ok()?.volume)
    };
    let needed: Option<Vec<f64>> = task.temperatures().iter().map(needed).collect();
    let most = needed.ok_or(Reject::Fluid)?.into_iter().fold(0.0, f64::max).round();
    match most {
        n if n < 1.0 => Err(Reject::Length),
        n if n > f64::from(task.most_channels) => Err(Reject::TooMany),
        n => Ok(n as u32),
    }
}

/// Length (mm) at which full-scale flow needs the pressure drop, to the step it is cut to.
fn trimmed(task: &Task<'_>, channel: &Channel, count: u32) -> Result<f64, Reject> {
    let [mut low, mut high] = LENGTH_LIMITS_MM;
    let too_long = |length: f64| needed_drop(task, channel, count, length).is_none_or(|drop| drop > task.pressure_drop);
    if too_long(low) || !too_long(high) {
        return Err(Reject::Length);
    }
    while high - low > 1e-3 * LENGTH_STEP_MM {
        let middle = 0.5 * (low + high);
        if too_long(middle) { high = middle } else { low = middle }
    }
    Ok(clean((low / LENGTH_STEP_MM).round() * LENGTH_STEP_MM))
}

/// A length without the digits that binary adds.
fn clean(length_mm: f64) -> f64 {
    (length_mm * 1e3).round() / 1e3
}

/// Largest pressure drop (Pa) that full-scale flow needs over the temperature range; absent where nothing drives it.
fn needed_drop(task: &Task<'_>, channel: &Channel, count: u32, length_mm: f64) -> Option<f64> {
    let element = nominal(&channel.times(count, length_mm)).ok()?;
    let at = |&t: &f64| {
        let law = State::dry(t, task.line_pressure).law(&element, task.fluid).ok()?;
        law.pressure_drop(task.flow * law.line_density()).ok()
    };
    let drops = task.temperatures().iter().map(at).collect::<Option<Vec<f64>>>()?;
    Some(drops.into_iter().fold(0.0, f64::max))
}
