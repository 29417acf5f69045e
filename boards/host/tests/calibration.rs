//! Calibration as estimation: runs simulated from the library's own law with known A and B, so that what is tried here is
//! the fit and its uncertainty statements alone (the law itself meets independent solutions elsewhere).

use evenbore::calibration::Cause;
use evenbore::double::{Conditions, Properties};
use evenbore::fluid::{StoredFluid, catalogue::AIR, catalogue::NITROGEN, catalogue::WATER};
use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, Temperature};
use evenbore::reading::SensorUncertainty;
use evenbore::reference::ReferenceConditions;
use evenbore::{Element, Reading};
use evenbore_bench::calibrate::fit::{Solution, fit};
use evenbore_bench::calibrate::samples::{Sample, Setup};
use evenbore_bench::calibrate::verdict::{Order, Verdict, calibrate};
use evenbore_bench::input::points::{Point, Points, Reference};
use evenbore_bench::input::readings::RowUncertainty;
use evenbore_bench::input::uncertain::Parts;
use evenbore_bench::statistics::both_axes;
use evenbore_bench::statistics::distributions::coverage_factor;

type Outcome = Result<(), Box<dyn std::error::Error>>;

/// Temperature and line pressure of all runs here.
const T: f64 = 295.15;
const P: f64 = 120e3;
/// Full scale, Pa.
const FULL: f64 = 2500.0;

/// The element as drawn.
fn drawn() -> Element {
    let mm = Length::from_millimetres;
    let element = Element::round_tubes(120, mm(0.44), mm(120.0)).expect("sizes in range");
    element.with_expansion(16e-6, Temperature::from_celsius(20.0)).expect("expansion in range")
}

/// The element as made.
fn made() -> Element {
    let drawn = drawn();
    drawn.with_coefficients(drawn.a() * 0.97, drawn.b() * 1.08).expect("coefficients in range")
}

fn law(element: &Element) -> Conditions {
    Conditions::new(element, NITROGEN.fluid(), T, P, None).expect("within the table")
}

/// Normal deviates by Box and Muller from the uniform ones of SplitMix64.
struct Noise(u64);

impl Noise {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }

    fn normal(&mut self) -> f64 {
        (-2.0 * (1.0 - self.uniform()).ln()).sqrt() * (std::f64::consts::TAU * self.uniform()).cos()
    }
}

/// Relative errors of a bench: what is drawn, and what is stated of it.
#[derive(Clone, Copy, Default)]
struct Errors {
    flow: f64,
    drop: f64,
    flow_common: f64,
    gain_common: f64,
    /// Pa.
    zero_common: f64,
}

impl Errors {
    fn parts(independent: f64, common: f64) -> Parts {
        Parts { independent: Some(independent).filter(|u| *u > 0.0), common: Some(common).filter(|u| *u > 0.0) }
    }
}

/// Geometric pressure drops from 3 to 100 % of full scale.
fn drops(n: usize) -> Vec<f64> {
    (0..n).map(|i| FULL * 0.03_f64.powf(1.0 - i as f64 / (n - 1) as f64)).collect()
}

/// A true point of an element: pressure drop and volume flow at the inlet.
fn point(line: u64, drop: f64, reference: Reference) -> Point {
    Point {
        line,
        pressure_drop: drop,
        temperature: T,
        line_pressure: P,
        relative_humidity: None,
        reference,
        u: RowUncertainty::default(),
        u_reference: Parts::default(),
        extra: Vec::new(),
    }
}

fn at_inlet(flow: f64) -> Reference {
    let (u_temperature, u_pressure) = (Parts::default(), Parts::default());
    Reference::Volume { flow, temperature: None, pressure: None, u_temperature, u_pressure }
}

/// A run under `law` with `errors` drawn from `noise` and stated.
fn run(law: &Conditions, drops: &[f64], errors: &Errors, noise: &mut Noise) -> Points {
    let [flow_c, gain_c, zero_c] =
        [errors.flow_common, errors.gain_common, errors.zero_common].map(|u| u * noise.normal());
    let noisy = |(i, &drop): (usize, &f64)| {
        let flow = law.flow(drop).expect("within the table").volume;
        let read_flow = flow * (1.0 + flow_c + errors.flow * noise.normal());
        let read = drop * (1.0 + gain_c + errors.drop * noise.normal()) + zero_c;
        let common = if errors.zero_common > 0.0 { errors.zero_common } else { errors.gain_common * drop };
        let mut point = point(i as u64 + 2, read, at_inlet(read_flow));
        point.u.pressure_drop = Errors::parts(errors.drop * drop, common);
        point.u_reference = Errors::parts(errors.flow * flow, errors.flow_common * flow);
        point
    };
    points(drops.iter().enumerate().map(noisy).collect())
}

fn points(points: Vec<Point>) -> Points {
    Points { file: "run.csv".into(), fluid: None, extra_headers: Vec::new(), points }
}

fn order(fluid: &StoredFluid) -> Order<'_> {
    Order {
        serial: "T-1",
        element: drawn(),
        has_nominal: true,
        fluid,
        alternatives: Vec::new(),
        without: Vec::new(),
        accept_anyway: Some("test".into()),
        date: (2026, 12, 1),
        sensors: SensorUncertainty {
            pressure_drop_pa: 0.0,
            pressure_drop_rel: 0.0,
            temperature_k: 0.0,
            line_pressure_pa: 0.0,
            line_pressure_rel: 0.0,
            relative_humidity: 0.0,
        },
        reference: ReferenceConditions::DIN_1343,
    }
}

fn judged(points: &Points) -> Verdict {
    calibrate(points, &order(NITROGEN.fluid())).expect("a usable run")
}

fn assert_close(got: f64, expected: f64, relative: f64, what: &str) {
    assert!((got / expected - 1.0).abs() <= relative, "{what}: {got} instead of {expected}");
}

fn assert_recovers(points: &Points, what: &str) {
    let (found, element) = (judged(points).calibration, made());
    assert_close(found.a, f64::from(element.a()), 1e-6, what);
    assert_close(found.b, f64::from(element.b()), 3e-5, what);
    assert!(found.accepted, "{what}: {:?}", found.findings);
}

#[test]
fn errorless_runs_give_the_coefficients_back() {
    let element = made();
    let law = law(&element);
    let true_flows: Vec<(f64, f64)> =
        drops(10).into_iter().map(|drop| (drop, law.flow(drop).expect("flow").mass)).collect();
    let density = |t: f64, p: f64| Properties::at(NITROGEN.fluid(), t).density(p);
    let with = |reference: &dyn Fn(f64) -> Reference| {
        let each = true_flows.iter().zip(2..);
        points(each.map(|((drop, mass), line)| point(line, *drop, reference(*mass))).collect())
    };
    assert_recovers(&with(&|mass| at_inlet(mass / density(T, P))), "volume at the inlet");
    assert_recovers(&with(&Reference::Mass), "mass");
    let elsewhere = |mass: f64| {
        let (t, p) = (291.0, 99.3e3);
        let (u_temperature, u_pressure) = (Parts::default(), Parts::default());
        let flow = mass / density(t, p);
        Reference::Volume { flow, temperature: Some(t), pressure: Some(p), u_temperature, u_pressure }
    };
    assert_recovers(&with(&elsewhere), "volume at the reference");
    let back = |(i, drop): (usize, f64)| {
        let flow = law.flow(-drop).expect("flow").volume;
        point(i as u64 + 2, -drop, at_inlet(flow))
    };
    assert_recovers(&points(drops(10).into_iter().enumerate().map(back).collect()), "reverse");
}

fn fitted(points: &Points, fluid: &StoredFluid) -> Solution {
    let element = drawn();
    let setup = Setup { element: &element, fluid };
    let samples: Vec<Sample> =
        points.points.iter().map(|p| Sample::new(&setup, p).expect("within the table")).collect();
    fit(&samples, f64::from(fluid.u_viscosity()), None).expect("a fit")
}

/// The table of rank-one effects: reference (-A, -2B), viscosity (-A, 0), gain (A, B). A gas gets lighter and
/// expands as the pressure drop grows, which takes some of the gain from B: `dP/p (1/(2 eps) + Cexp/K1)` of it.
#[test]
fn common_errors_move_a_and_b_as_derived() {
    let water = Conditions::new(&made(), WATER.fluid(), T, P, None).expect("within the table");
    assert_effects(&water, WATER.fluid(), [2e-3, 1.0]);
    assert_effects(&law(&made()), NITROGEN.fluid(), [3e-2, 1.0 - FULL / P * (0.5 / kinetic_share() + 1.55)]);
}

/// Kinetic over viscous pressure drop at full scale.
fn kinetic_share() -> f64 {
    law(&made()).flow(FULL).expect("a flow").kinetic_share
}

fn assert_effects(law: &Conditions, fluid: &StoredFluid, [tolerance_b, gain_b]: [f64; 2]) {
    let errors = Errors { flow: 5e-4, drop: 5e-4, flow_common: 1e-3, gain_common: 2e-3, ..Errors::default() };
    let still = Errors { flow_common: 0.0, gain_common: 0.0, ..errors };
    let mut run = run(law, &drops(12), &still, &mut Noise(3));
    for point in &mut run.points {
        point.u.pressure_drop.common = Some(errors.gain_common * point.pressure_drop);
        point.u_reference.common = Some(errors.flow_common * point.reference.flow());
    }
    let found = fitted(&run, fluid);
    for (cause, u, per_a, per_b) in [
        (Cause::ReferenceFlow, errors.flow_common, -1.0, -2.0),
        (Cause::Viscosity, f64::from(fluid.u_viscosity()), -1.0, 0.0),
        (Cause::PressureDrop, errors.gain_common, 1.0, gain_b),
    ] {
        let part = found.common.iter().find(|part| part.cause == cause).expect("a part");
        let [a, b] = [part.shift[0] / (u * found.a), part.shift[1] / (u * found.b)];
        assert!((a - per_a).abs() < 1e-3 && (b - per_b).abs() < tolerance_b, "{cause:?}: {a} {b}, expected {per_b}");
        assert!((part.u / u - 1.0).abs() < 1e-6, "{cause:?}: u = {}", part.u);
    }
}

/// What the reference's own thermometer and barometer share counts as an error of its flow, with its size beside it.
#[test]
fn conditions_at_the_reference_are_part_of_it() {
    let errors = Errors { flow: 5e-4, drop: 5e-4, ..Errors::default() };
    let mut run = run(&law(&made()), &drops(12), &errors, &mut Noise(3));
    for point in &mut run.points {
        let Reference::Volume { temperature, pressure, u_temperature, u_pressure, .. } = &mut point.reference else {
            panic!("a volume flow");
        };
        (*temperature, *pressure) = (Some(T), Some(P));
        u_temperature.common = Some(3e-4 * T);
        u_pressure.common = Some(4e-4 * P);
    }
    let found = fitted(&run, NITROGEN.fluid());
    let part = found.common.iter().find(|part| part.cause == Cause::ReferenceFlow).expect("a part");
    assert_close(part.u, 5e-4, 2e-2, "u of the reference");
    assert_close(part.shift[0].abs() / found.a, 5e-4, 1e-2, "its effect on A");
}

/// Effective variance against the exact line with errors in both axes (York 2004).
#[test]
fn effective_variance_agrees_with_errors_in_both_axes() {
    let errors = Errors { flow: 1e-3, drop: 5e-4, ..Errors::default() };
    let element = drawn();
    let setup = Setup { element: &element, fluid: NITROGEN.fluid() };
    for seed in 0..50 {
        let run = run(&law(&made()), &drops(12), &errors, &mut Noise(seed));
        let samples: Vec<Sample> = run.points.iter().map(|p| Sample::new(&setup, p).expect("a sample")).collect();
        let of = |f: &dyn Fn(&Sample) -> f64| samples.iter().map(f).collect::<Vec<f64>>();
        let (x, y) = (of(&|s| s.columns.v / s.columns.u), of(&|s| s.columns.y / s.columns.u));
        let u_y = errors.flow.hypot(errors.drop);
        let york = both_axes::Points {
            x: &x,
            y: &y,
            x_uncertainty: &x.iter().map(|x| x * errors.flow).collect::<Vec<_>>(),
            y_uncertainty: &y.iter().map(|y| y * u_y).collect::<Vec<_>>(),
            correlation: &[-errors.flow / u_y; 12],
        };
        let (york, found) = (york.line().expect("a line"), fit(&samples, 0.0, None).expect("a fit"));
        assert_close(found.a, york.intercept, 2e-5, "A");
        assert_close(found.b, york.slope, 1e-3, "B");
    }
}

/// Share of `draws` runs whose stated 95.45 % intervals hold the truth at 3, 10, 30 and 100 % of full scale.
fn coverage(draws: u64, errors: &Errors, drops: &[f64], stated: bool) -> [f64; 4] {
    let element = made();
    let law = law(&element);
    let mut held = [0_u32; 4];
    for draw in 0..draws {
        let mut run = run(&law, drops, errors, &mut Noise(1 + draw * 7_919));
        if !stated {
            for point in &mut run.points {
                (point.u, point.u_reference) = (RowUncertainty::default(), Parts::default());
            }
        }
        let record = judged(&run).record.expect("accepted anyway");
        let k = match f64::from(record.quality.degrees_of_freedom) {
            0.0 => 2.0,
            dof => coverage_factor(dof).expect("a factor"),
        };
        let meter = record.meter().expect("a meter");
        for (held, at) in held.iter_mut().zip([0.03, 0.1, 0.3, 1.0]) {
            let drop = f64::from((at * FULL) as f32);
            let reading = Reading::new(
                PressureDrop::from_pascals(drop as f32),
                Temperature::from_kelvin(T as f32),
                AbsolutePressure::from_pascals(P as f32),
            );
            let flow = meter.flow(&reading).expect("a flow");
            let truth = law.flow(drop).expect("a flow").volume;
            let off = f64::from(flow.volume.as_cubic_metres_per_second()) / truth - 1.0;
            *held += u32::from(off.abs() <= k * f64::from(flow.uncertainty.fit.hypot(flow.uncertainty.common)));
        }
    }
    held.map(|held| f64::from(held) / draws as f64)
}

/// 3.5 standard deviations of a binomial share about 95.45 %, and 0.3 % for what is linearised.
fn assert_covers(found: [f64; 4], draws: u64, what: &str) {
    let margin = 3.5 * (0.9545 * 0.0455 / draws as f64).sqrt() + 0.003;
    for share in found {
        assert!((share - 0.9545).abs() < margin, "{what}: {found:?}, margin {margin:.4}");
    }
}

const DRAWS: u64 = 2000;

#[test]
fn independent_errors_are_covered() {
    let errors = Errors { flow: 1e-3, drop: 7e-4, ..Errors::default() };
    assert_covers(coverage(DRAWS, &errors, &drops(12), true), DRAWS, "independent");
}

#[test]
fn a_common_error_of_the_reference_is_covered() {
    let errors = Errors { flow: 1e-3, drop: 7e-4, flow_common: 1.5e-3, ..Errors::default() };
    assert_covers(coverage(DRAWS, &errors, &drops(12), true), DRAWS, "common reference");
}

#[test]
fn a_common_gain_of_the_pressure_drop_is_covered() {
    let errors = Errors { flow: 1e-3, drop: 7e-4, gain_common: 1e-3, ..Errors::default() };
    assert_covers(coverage(DRAWS, &errors, &drops(12), true), DRAWS, "common gain");
}

#[test]
fn a_common_zero_of_the_pressure_drop_is_covered() {
    let errors = Errors { flow: 1e-3, drop: 7e-4, zero_common: 0.5, ..Errors::default() };
    assert_covers(coverage(DRAWS, &errors, &drops(12), true), DRAWS, "common zero");
}

#[test]
fn scatter_alone_is_covered_with_students_factor() {
    let errors = Errors { flow: 3e-4, drop: 2e-4, ..Errors::default() };
    for n in [5, 12] {
        assert_covers(coverage(DRAWS, &errors, &drops(n), false), DRAWS, &format!("{n} points without uncertainties"));
    }
}

/// A common zero counts alike whether the independent errors are stated or are told by the scatter.
#[test]
fn a_common_zero_counts_beside_scatter_as_beside_stated_errors() {
    let errors = Errors { drop: 1e-3, ..Errors::default() };
    let covariance = |zero: Option<f64>, scatter: Option<f64>| {
        let mut run = run(&law(&made()), &drops(12), &errors, &mut Noise(17));
        for point in &mut run.points {
            let independent = scatter.map(|scatter| scatter * point.pressure_drop);
            point.u.pressure_drop = Parts { independent, common: zero };
        }
        let found = fitted(&run, NITROGEN.fluid());
        (found.covariance.standard_uncertainties(), found.scatter)
    };
    for zero in [None, Some(2.0)] {
        let (from_scatter, scatter) = covariance(zero, None);
        let (stated, _) = covariance(zero, Some(scatter));
        for (got, expected) in from_scatter.iter().zip(stated) {
            assert_close(*got, expected, 0.05, &format!("zero {zero:?}"));
        }
    }
    let listed = {
        let mut run = run(&law(&made()), &drops(12), &errors, &mut Noise(17));
        run.points.iter_mut().for_each(|point| point.u.pressure_drop.common = Some(2.0));
        judged(&run).calibration
    };
    let zero = listed.common.iter().find(|part| part.name == "pressure-drop-zero").expect("a listed zero");
    assert_eq!((zero.u, zero.unit.as_str()), (2.0, "Pa"));
    assert!(zero.effect_a.abs() > 0.0 && zero.effect_a.abs() < listed.u_a_fit, "{zero:?}");
    let ([without, _], [with, _]) = (covariance(None, None).0, covariance(Some(2.0), None).0);
    assert!(with > 1.5 * without, "the zero is lost: {with} beside {without}");
}

/// Budget lines add up to the combined uncertainty of the flow.
#[test]
fn the_budget_adds_up() -> Outcome {
    let errors = Errors { flow: 1e-3, drop: 7e-4, flow_common: 1.5e-3, ..Errors::default() };
    let run = run(&law(&made()), &drops(12), &errors, &mut Noise(11));
    let order = Order { sensors: SensorUncertainty::COMMON, ..order(NITROGEN.fluid()) };
    let found = calibrate(&run, &order)?.calibration;
    let total = |at: f64| {
        let rows = found.budget.iter().filter(|row| row.at == at);
        rows.map(|row| row.contribution * row.contribution).sum::<f64>().sqrt()
    };
    let top = found.uncertainty.last().ok_or("no rows")?;
    let combined = top.type_a.hypot(top.common).hypot(top.sensors);
    assert_close(total(1.0), combined, 0.005, "budget at full scale");
    assert!(total(0.1) > total(1.0));
    Ok(())
}

/// Moist air brings what its water does to viscosity into the calibration, where it stays, and into its use.
#[test]
fn moist_air_is_calibrated_and_judged_moist() -> Outcome {
    let humid = Conditions::new(&made(), AIR.fluid(), T, P, Some(0.6))?;
    let errors = Errors { flow: 1e-3, drop: 7e-4, flow_common: 1e-3, ..Errors::default() };
    let mut run = run(&humid, &drops(12), &errors, &mut Noise(11));
    run.points.iter_mut().for_each(|point| point.relative_humidity = Some(0.6));
    let order = Order { sensors: SensorUncertainty::COMMON, ..order(AIR.fluid()) };
    let verdict = calibrate(&run, &order)?;
    let found = verdict.calibration;
    let u = humid.u_viscosity_of_water();
    let part = found.common.iter().find(|part| part.name == "moisture").ok_or("no moisture")?;
    assert_close(part.u, u, 1e-6, "u of the water");
    assert_close(part.effect_a, -u * found.a, 1e-3, "its effect on A");
    assert!(verdict.record.ok_or("no record")?.quality.common.iter().any(|part| part.cause == Cause::Moisture));
    assert_close(found.state.relative_humidity.ok_or("no humidity")?, 0.6, 1e-12, "mean humidity");
    assert!(
        ["humidity", "viscosity of moist air"].iter().all(|name| found.budget.iter().any(|row| row.source == *name))
    );
    let rows = found.budget.iter().filter(|row| row.at == 1.0);
    let total = rows.map(|row| row.contribution * row.contribution).sum::<f64>().sqrt();
    let top = found.uncertainty.last().ok_or("no rows")?;
    assert_close(total, top.type_a.hypot(top.common).hypot(top.sensors), 0.005, "budget on moist air");
    Ok(())
}

/// A run whose B comes out negative is held at the drawing's B, and a matrix without a drawing at zero.
#[test]
fn b_that_makes_no_sense_is_held() -> Outcome {
    let element = made();
    let flat = element.with_coefficients(element.a(), 0.0)?;
    let run = run(&law(&flat), &drops(12)[..6], &Errors { flow: 2e-3, drop: 1e-3, ..Errors::default() }, &mut Noise(5));
    let found = judged(&run).calibration;
    assert!(found.b_from_prior && found.b > 0.0);
    let unknown = Order { element: Element::other(1.0, 0.0)?, has_nominal: false, ..order(NITROGEN.fluid()) };
    let falling = {
        let mut run = run;
        for (i, point) in run.points.iter_mut().enumerate() {
            point.pressure_drop *= 1.0 - 0.002 * i as f64;
        }
        run
    };
    let verdict = calibrate(&falling, &unknown)?;
    assert!(verdict.calibration.b_from_prior, "{:?}", verdict.calibration);
    assert!(verdict.record.is_some_and(|record| record.element.b() >= 0.0));
    Ok(())
}

/// Points on the very edge of a fluid's table are as good as any.
#[test]
fn the_edge_of_a_table_is_part_of_it() {
    let element = made();
    let t = f64::from(NITROGEN.fluid().temperature_range()[1].as_kelvin());
    let law = Conditions::new(&element, NITROGEN.fluid(), t, P, None).expect("within the table");
    let at_edge = |(i, drop): (usize, f64)| {
        let mut point = point(i as u64 + 2, drop, at_inlet(law.flow(drop).expect("a flow").volume));
        point.temperature = t;
        point.u.temperature = Parts { independent: Some(0.05), common: Some(0.05) };
        point
    };
    let run = points(drops(10).into_iter().enumerate().map(at_edge).collect());
    assert_close(judged(&run).calibration.a, f64::from(element.a()), 1e-6, "A");
}

/// A run with no fault is refused about as often as the limits say: 1 % by chi-squared or F, and a little by outliers.
#[test]
fn good_runs_are_rarely_refused() {
    let errors = Errors { flow: 1e-3, drop: 7e-4, flow_common: 1.5e-3, ..Errors::default() };
    for stated in [true, false] {
        let refused = (0..1000_u64).filter(|draw| {
            let mut run = run(&law(&made()), &drops(16), &errors, &mut Noise(5 + draw * 6_271));
            if !stated {
                for point in &mut run.points {
                    (point.u, point.u_reference) = (RowUncertainty::default(), Parts::default());
                }
            }
            !judged(&run).calibration.accepted
        });
        let share = refused.count() as f64 / 1000.0;
        assert!((0.002..0.035).contains(&share), "stated {stated}: {share}");
    }
}
