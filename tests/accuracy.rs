//! Stated accuracies of the arithmetic, asserted: single against double precision, the borrowed square root, the series
//! of the logarithm, the fixed number of rounds.

mod common;

use common::{Errors, decades, elements, fluids, sweep, tolerance};
use evenbore::fluid::StoredFluid;
use evenbore::fluid::catalogue::{CARBON_DIOXIDE, NITROGEN};
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
use evenbore::{Element, Meter, double, quick_root};

/// Largest pressure drop at which `element` is laminar, the gas loses less than half its pressure and the outlet stays
/// within the fluid's table.
fn full_scale(element: &Element, fluid: &StoredFluid, t: f64, p: f64) -> f64 {
    let conditions = double::Conditions::new(element, fluid, t, p, None).unwrap();
    let [lowest, _] = fluid.pressure_range().map(|p| f64::from(p.as_pascals()));
    let mut drop = (0.45 * p).min(0.99 * (p - lowest)).min(1e5);
    while f64::from(element.reynolds(conditions.flow(drop).unwrap().x as f32)) > 1800.0 {
        drop *= 0.8;
    }
    assert!(drop > 0.0);
    drop
}

/// Line pressures within the table of `fluid` and what instruments see, none of them at the table's lowest, from which
/// nothing can fall.
fn line_pressures(fluid: &StoredFluid) -> impl Iterator<Item = f64> + use<> {
    let [low, high] = fluid.pressure_range().map(|p| f64::from(p.as_pascals()));
    decades((1.05 * low).max(8e4), high.min(9e5), 5)
}

/// Calls `with` at every element, fluid, temperature and line pressure, all representable in single precision.
fn everywhere(temperatures: usize, mut with: impl FnMut(&str, &Element, &StoredFluid, f64, f64)) {
    for (name, element) in elements() {
        for fluid in fluids() {
            let [low, high] = fluid.temperature_range().map(|t| f64::from(t.as_kelvin()));
            for t in sweep(low, high, temperatures) {
                for p in line_pressures(&fluid) {
                    with(name, &element, &fluid, f64::from(t as f32), f64::from(p as f32));
                }
            }
        }
    }
}

#[test]
fn single_precision_agrees_with_double_through_the_whole_walk() {
    let mut errors = Errors::default();
    everywhere(23, |name, element, fluid, t, p| {
        let meter = Meter::nominal(*element, fluid).unwrap();
        let (kelvin, pascals) = (Temperature::from_kelvin(t as f32), AbsolutePressure::from_pascals(p as f32));
        let conditions = meter.conditions(kelvin, pascals, None).unwrap();
        let exact = double::Conditions::new(element, fluid, t, p, None).unwrap();
        for drop in decades(1e-3, 1.0, 13).map(|f| (f * full_scale(element, fluid, t, p)) as f32) {
            let got = conditions.sample(PressureDrop::from_pascals(drop)).unwrap();
            let want = exact.flow(f64::from(drop)).unwrap();
            let got = f64::from(got.volume.as_cubic_metres_per_second());
            errors.add(got / want.volume - 1.0, || format!("{name}, {}, {t} K, {p} Pa, {drop} Pa", fluid.name()));
        }
    });
    assert!(errors.count > 100_000, "{}", errors.count);
    errors.judge("single against double", tolerance::SINGLE_AGAINST_DOUBLE);
}

#[test]
fn quick_root_is_within_its_stated_accuracy() {
    let mut errors = Errors::default();
    // Every 61st number of four neighbouring binades, then samples of every binade of normal numbers.
    let dense = (0x3f00_0000_u32..0x4100_0000).step_by(61);
    let wide = (0x0080_0000_u32..0x7f80_0000).step_by(99_991);
    for value in dense.chain(wide).map(f32::from_bits) {
        let exact = f64::from(value).sqrt();
        errors.add(f64::from(quick_root(value)) / exact - 1.0, || format!("{value:e}"));
    }
    assert!(errors.count > 500_000, "{}", errors.count);
    errors.judge("quick root", tolerance::QUICK_ROOT);
    assert!((0.0..2e-19).contains(&quick_root(0.0)));
}

#[test]
fn series_of_the_logarithm_is_within_its_stated_accuracy() {
    let (_, element) = elements()[2];
    let mut errors = Errors::default();
    let p = 8e5;
    let conditions = double::Conditions::new(&element, NITROGEN.fluid(), 293.15, p, None).unwrap();
    for share in sweep(0.001, 0.5, 500) {
        let drop = share * p;
        let got = conditions.flow(drop).unwrap().log_ratio;
        errors.add(got / (p / (p - drop)).ln() - 1.0, || format!("{share} of the line pressure"));
        let reverse = conditions.flow(-0.2 * drop).unwrap().log_ratio;
        errors.add(reverse / ((p + 0.2 * drop) / p).ln() - 1.0, || format!("reverse, {share}"));
    }
    errors.judge("series of ln(p1/p2)", tolerance::LOG_RATIO);
}

/// The mass flow at which the law holds exactly: `Y = A u + B v`, by the secant from `start`.
fn converged(element: &Element, conditions: &double::Conditions, drop: f64, start: f64) -> f64 {
    let (a, b) = (f64::from(element.a()), f64::from(element.b()));
    let residual = |mass: f64| {
        let columns = conditions.columns(drop, mass).unwrap();
        (a * columns.u + b * columns.v) / columns.y - 1.0
    };
    let (mut m0, mut m1) = (start, start * 1.001);
    let (mut r0, mut r1) = (residual(m0), residual(m1));
    for _ in 0..40 {
        if r1.abs() < 1e-14 || r1 == r0 {
            break;
        }
        (m0, m1) = (m1, m1 - r1 * (m1 - m0) / (r1 - r0));
        (r0, r1) = (r1, residual(m1));
    }
    assert!(r1.abs() < 1e-12, "the secant stopped at {r1:e}");
    m1
}

#[test]
fn newtons_steps_suffice() {
    let mut errors = Errors::default();
    let mut check = |name: &str, element: &Element, fluid: &StoredFluid, t: f64, p: f64| {
        let conditions = double::Conditions::new(element, fluid, t, p, None).unwrap();
        for drop in decades(1e-2, 1.0, 7).map(|f| f * full_scale(element, fluid, t, p)) {
            let got = conditions.flow(drop).unwrap().mass;
            let want = converged(element, &conditions, drop, got);
            errors.add(got / want - 1.0, || format!("{name}, {}, {t} K, {p} Pa, {drop} Pa", fluid.name()));
        }
    };
    everywhere(5, &mut check);
    // The case named in the law: carbon dioxide near Re 1750 in the tubes of L/D 50.
    let (name, short) = elements()[3];
    check(name, &short, CARBON_DIOXIDE.fluid(), 293.15, 1.2e5);
    errors.judge("Newton's steps", tolerance::Q_UPDATES);
}

#[test]
fn the_inverse_converges_in_its_rounds() {
    let mut errors = Errors::default();
    everywhere(5, |name, element, fluid, t, p| {
        let conditions = double::Conditions::new(element, fluid, t, p, None).unwrap();
        for drop in decades(1e-2, 1.0, 7).map(|f| f * full_scale(element, fluid, t, p)) {
            let mass = conditions.flow(drop).unwrap().mass;
            let back = conditions.pressure_drop(mass).unwrap();
            let again = conditions.flow(back).unwrap().mass;
            errors.add(again / mass - 1.0, || format!("{name}, {}, {t} K, {p} Pa, {drop} Pa: {back}", fluid.name()));
        }
    });
    errors.judge("inverse in double precision", tolerance::INVERSE_ROUNDS);
}
