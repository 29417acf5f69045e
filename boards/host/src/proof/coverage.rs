//! How often the stated 95.45 % interval holds the truth.
//!
//! The true flows come from the virtual element, once for each set-point and each flow of use; the errors of a bench are
//! drawn around them and each run goes through the whole calibration. What follows the advice of a refused run (leave
//! out the points it names) is calibrated again, as a user would.

use super::rig::{Rig, point, shares};
use crate::calibrate::certainty::coverage as factor;
use crate::calibrate::outcome::Calibration;
use crate::calibrate::verdict::Verdict;
use crate::input::points::Point;
use crate::input::uncertain::Parts;
use crate::parallel::each;
use crate::random::Random;
use crate::virtual_element::{Substance, Upstream};
use evenbore::Reading;
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
use std::fmt::Write;

/// State of runs and uses, K and Pa.
const STATE: [f64; 2] = [293.15, 120e3];
/// Flows of use, as shares of full scale.
pub const AT: [f64; 4] = [0.03, 0.1, 0.3, 1.0];
/// Runs drawn together.
const BATCH: u64 = 100;

/// Standard deviations of what a bench does wrong.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Errors {
    /// Reference flow, relative, from point to point.
    pub flow: f64,
    /// Pressure drop, relative, from point to point.
    pub drop: f64,
    /// Pressure drop, Pa, from point to point.
    pub drop_pa: f64,
    /// Temperature, K, from point to point.
    pub temperature: f64,
    /// Reference flow, relative, of all points.
    pub flow_common: f64,
    /// Zero of the pressure drop, Pa, of all points.
    pub zero_common: f64,
}

/// The bench of all cases.
const BENCH: Errors =
    Errors { flow: 1e-3, drop: 5e-4, drop_pa: 0.2, temperature: 0.05, flow_common: 0.0, zero_common: 0.0 };

/// Something that no uncertainty states.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Fault {
    /// Nothing.
    None,
    /// One point's reference flow reads 1 % high.
    Outlier,
    /// The two largest flows need 0.5 and 2 % more pressure drop.
    TopNotLaminar,
    /// The zero of the pressure drop moves by 5 Pa in the course of the run, the largest flow first.
    ZeroDrift,
}

/// A way for a calibration to go.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Case {
    /// In words.
    pub name: &'static str,
    /// Number of points.
    pub points: usize,
    /// What is drawn.
    pub drawn: Errors,
    /// What is stated; nothing at all if absent.
    pub stated: Option<Errors>,
    /// What is wrong besides.
    pub fault: Fault,
}

const fn case(name: &'static str, drawn: Errors) -> Case {
    Case { name, points: 12, drawn, stated: Some(drawn), fault: Fault::None }
}

/// Errors twice those of the bench from point to point.
const TWICE: Errors = Errors { flow: 2e-3, drop: 1e-3, drop_pa: 0.4, temperature: 0.1, ..BENCH };

/// Errors in proportion to what is read: all that can be assumed where nothing is stated.
const EVEN: Errors = Errors { drop_pa: 0.0, ..BENCH };

/// Every case of the table.
pub const CASES: [Case; 10] = [
    case("independent errors", BENCH),
    case("common error of the reference, 0.15 %", Errors { flow_common: 1.5e-3, ..BENCH }),
    case("zero of the pressure drop moved by 1 Pa since it was taken", Errors { zero_common: 1.0, ..BENCH }),
    Case { stated: Some(BENCH), ..case("noise twice what is stated", TWICE) },
    Case { points: 5, ..case("five points only", BENCH) },
    Case { stated: None, ..case("nothing stated: scatter alone", EVEN) },
    Case { stated: None, points: 5, ..case("nothing stated, five points", EVEN) },
    Case { fault: Fault::Outlier, ..case("one outlier of 1 %", BENCH) },
    Case { fault: Fault::TopNotLaminar, ..case("top two points not laminar, +0.5 and +2 %", BENCH) },
    Case { fault: Fault::ZeroDrift, ..case("zero drifts by 5 Pa during the run, not stated", BENCH) },
];

/// What came of the runs of a case.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Row {
    /// The case.
    pub case: Case,
    /// Runs drawn.
    pub runs: u64,
    /// Share of runs refused at first.
    pub refused: f64,
    /// Share of runs that stand in the end: accepted, or accepted without the points that were named.
    pub stands: f64,
    /// Share of all runs, kept as they are and accepted anyway, whose intervals hold the truth at [`AT`].
    pub covered: [f64; 4],
    /// The same of the runs that stand in the end; without any, nothing.
    pub covered_standing: Option<[f64; 4]>,
    /// Mean stated expanded uncertainty of the runs that stand (of all where none does) at [`AT`], relative.
    pub expanded: [f64; 4],
}

/// The bundle of the table and what truly flows through it.
struct Truth {
    rig: Rig,
    /// Pressure drop and mass flow of the flows of use.
    uses: Vec<[f64; 2]>,
    full_flow: f64,
}

impl Truth {
    fn new() -> Result<Self, String> {
        let rig = Rig::tubes("bundle", 100, [0.5, 100.0], 5e3);
        let [full_flow, _] =
            rig.flow(NITROGEN.fluid(), STATE, rig.full_scale).map_err(|refused| refused.to_string())?;
        let mut truth = Self { rig, uses: Vec::new(), full_flow };
        truth.uses = truth.at(&AT)?;
        Ok(truth)
    }

    /// Pressure drop and mass flow at shares of full-scale flow.
    fn at(&self, shares: &[f64]) -> Result<Vec<[f64; 2]>, String> {
        let one = |i: usize| {
            let mass = self.full_flow * shares[i];
            let upstream = Upstream::at(STATE[1], STATE[0]);
            let outcome = self.rig.truth.pressure_drop(&Substance::new(NITROGEN.fluid()), &upstream, mass);
            outcome.map(|outcome| [outcome.pressure_drop, mass]).map_err(|refused| refused.to_string())
        };
        each(shares.len(), one).into_iter().collect()
    }
}

/// All rows of `cases`, each of `runs` runs.
///
/// # Errors
/// The truth could not be computed, or a run could not be used at all.
pub fn table(cases: &[Case], runs: u64) -> Result<Vec<Row>, String> {
    let truth = Truth::new()?;
    cases.iter().map(|case| measured(&truth, case, runs)).collect()
}

/// What is counted.
#[derive(Debug, Clone, Copy, Default)]
struct Count {
    runs: u64,
    refused: u64,
    stands: u64,
    covered: [u64; 4],
    covered_standing: [u64; 4],
    expanded: [f64; 4],
    expanded_standing: [f64; 4],
}

fn add<const N: usize, T: Copy + std::ops::AddAssign>(sum: &mut [T; N], more: [T; N]) {
    sum.iter_mut().zip(more).for_each(|(sum, more)| *sum += more);
}

fn measured(truth: &Truth, case: &Case, runs: u64) -> Result<Row, String> {
    let points = truth.at(&shares(case.points, 0.03))?;
    let batch = |index: usize| {
        let mut count = Count::default();
        let first = index as u64 * BATCH;
        for run in first..(first + BATCH).min(runs) {
            tally(truth, case, &points, run, &mut count)?;
        }
        Ok::<Count, String>(count)
    };
    let mut total = Count::default();
    for count in each(runs.div_ceil(BATCH) as usize, batch) {
        let count = count?;
        total.runs += count.runs;
        total.refused += count.refused;
        total.stands += count.stands;
        add(&mut total.covered, count.covered);
        add(&mut total.covered_standing, count.covered_standing);
        add(&mut total.expanded, count.expanded);
        add(&mut total.expanded_standing, count.expanded_standing);
    }
    let share = |count: u64, of: u64| count as f64 / of.max(1) as f64;
    let stands = total.stands > 0;
    let (sum, of) = if stands { (total.expanded_standing, total.stands) } else { (total.expanded, total.runs) };
    Ok(Row {
        case: *case,
        runs: total.runs,
        refused: share(total.refused, total.runs),
        stands: share(total.stands, total.runs),
        covered: total.covered.map(|held| share(held, total.runs)),
        covered_standing: stands.then(|| total.covered_standing.map(|held| share(held, total.stands))),
        expanded: sum.map(|u| u / of.max(1) as f64),
    })
}

/// One run: drawn, calibrated, once more without the points it names, and held against the truth.
fn tally(truth: &Truth, case: &Case, points: &[[f64; 2]], run: u64, count: &mut Count) -> Result<(), String> {
    let drawn = draw(case, points, run);
    let words = |problem: crate::input::problem::Problem| problem.to_string();
    let first = truth.rig.calibrated(NITROGEN.fluid(), drawn.clone(), &[]).map_err(words)?;
    let refused = !first.calibration.accepted;
    let (held_first, expanded_first) = held(truth, &first)?;
    let named = named(&first.calibration);
    let last = if refused && !named.is_empty() && case.points >= named.len() + 4 {
        truth.rig.calibrated(NITROGEN.fluid(), drawn, &named).map_err(words)?
    } else {
        first
    };
    let (held, expanded) = held(truth, &last)?;
    count.runs += 1;
    count.refused += u64::from(refused);
    add(&mut count.covered, held_first);
    add(&mut count.expanded, expanded_first);
    if last.calibration.accepted {
        count.stands += 1;
        add(&mut count.covered_standing, held);
        add(&mut count.expanded_standing, expanded);
    }
    Ok(())
}

/// Lines that the refusing findings name.
fn named(calibration: &Calibration) -> Vec<u64> {
    calibration.findings.iter().filter(|finding| finding.refuses).flat_map(|finding| finding.points.clone()).collect()
}

/// The points of a run with errors in them, and what is stated of them.
fn draw(case: &Case, points: &[[f64; 2]], run: u64) -> Vec<Point> {
    let mut random = Random::member(20_261_201, run);
    let e = &case.drawn;
    let (flow_common, zero) = (e.flow_common * random.normal(), e.zero_common * random.normal());
    let odd = (random.unit() * points.len() as f64) as usize;
    let last = points.len() - 1;
    let noisy = |(i, &[drop, mass]): (usize, &[f64; 2])| {
        let (mut true_drop, mut read_mass) = (drop, mass * (1.0 + flow_common + e.flow * random.normal()));
        match case.fault {
            Fault::Outlier if i == odd => read_mass *= 1.01,
            Fault::TopNotLaminar if i == last => true_drop *= 1.02,
            Fault::TopNotLaminar if i + 1 == last => true_drop *= 1.005,
            Fault::ZeroDrift => true_drop += 5.0 * (last - i) as f64 / last as f64,
            _ => {}
        }
        let read = true_drop * (1.0 + e.drop * random.normal()) + e.drop_pa * random.normal() + zero;
        let mut point = point(i as u64 + 2, read, STATE, read_mass);
        point.temperature += e.temperature * random.normal();
        if let Some(stated) = &case.stated {
            let part = |u: f64| Some(u).filter(|u| *u > 0.0);
            point.u.pressure_drop =
                Parts { independent: part(stated.drop_pa.hypot(stated.drop * read)), common: part(stated.zero_common) };
            point.u.temperature = Parts { independent: part(stated.temperature), common: None };
            point.u_reference =
                Parts { independent: part(stated.flow * read_mass), common: part(stated.flow_common * read_mass) };
        }
        point
    };
    points.iter().enumerate().map(noisy).collect()
}

/// Whether the interval of the record holds the truth at each flow of use, and its half width.
fn held(truth: &Truth, verdict: &Verdict) -> Result<([u64; 4], [f64; 4]), String> {
    let record = verdict.record.as_ref().ok_or("no record")?;
    let meter = record.meter().map_err(|error| error.to_string())?;
    let dof = match f64::from(record.quality.degrees_of_freedom) {
        0.0 => f64::INFINITY,
        dof => dof,
    };
    let (mut held, mut expanded) = ([0; 4], [0.0; 4]);
    for (i, [drop, mass]) in truth.uses.iter().enumerate() {
        let reading = Reading::new(
            PressureDrop::from_pascals(*drop as f32),
            Temperature::from_kelvin(STATE[0] as f32),
            AbsolutePressure::from_pascals(STATE[1] as f32),
        );
        let flow = meter.flow(&reading).map_err(|refusal| refusal.to_string())?;
        expanded[i] = factor(&flow, dof) * f64::from(flow.uncertainty.combined());
        let off = f64::from(flow.mass.as_kilograms_per_second()) / mass - 1.0;
        held[i] = u64::from(off.abs() <= expanded[i]);
    }
    Ok((held, expanded))
}

/// The rows as a Markdown table.
pub fn markdown(rows: &[Row]) -> String {
    let mut text = String::from(
        "| calibration | refused | stands | of all runs, as they are | of those that stand | U |\n|---|---|---|---|---|---|\n",
    );
    let percent =
        |values: [f64; 4], digits: usize| values.map(|value| format!("{:.digits$}", 100.0 * value)).join(", ");
    for row in rows {
        writeln!(
            text,
            "| {} | {:.1} % | {:.1} % | {} | {} | {} % |",
            row.case.name,
            100.0 * row.refused,
            100.0 * row.stands,
            percent(row.covered, 1),
            row.covered_standing.map_or("none".into(), |share| percent(share, 1)),
            percent(row.expanded, 2)
        )
        .unwrap_or_default();
    }
    text
}
