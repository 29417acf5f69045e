//! Stated accuracies, asserted: single against double precision, forward against inverse, sensitivities against
//! numerical derivatives, tables against what they were built from.

mod common;

use common::{decades, elements, fluids, sweep, tolerance};
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
use evenbore::{Meter, double};

/// Largest pressure drop at which `element` is laminar and the gas loses less than half its pressure.
fn full_scale(element: &evenbore::Element, fluid: &evenbore::fluid::StoredFluid, t: f64, p: f64) -> f64 {
    let conditions = double::Conditions::new(element, fluid, t, p, None).unwrap();
    let [lowest, _] = fluid.pressure_range().map(|p| f64::from(p.as_pascals()));
    let mut drop = (0.45 * p).min(p - lowest).min(1e5);
    while f64::from(element.reynolds(conditions.flow(drop).unwrap().x as f32)) > 1800.0 {
        drop *= 0.8;
    }
    drop
}

#[test]
fn single_precision_agrees_with_double_through_the_whole_walk() {
    let (mut worst, mut sum, mut count) = ((0.0, String::new()), 0.0, 0.0);
    for (name, element) in elements() {
        for fluid in fluids() {
            let meter = Meter::nominal(element, &fluid).unwrap();
            let [t_low, t_high] = fluid.temperature_range().map(|t| f64::from(t.as_kelvin()));
            let [p_low, p_high] = fluid.pressure_range().map(|p| f64::from(p.as_pascals()));
            for t in sweep(t_low, t_high, 23) {
                let t = Temperature::from_kelvin(t as f32);
                for p in decades(p_low.max(8e4), p_high.min(9e5), 5) {
                    let p = AbsolutePressure::from_pascals(p as f32);
                    let (t64, p64) = (f64::from(t.as_kelvin()), f64::from(p.as_pascals()));
                    let Ok(conditions) = meter.conditions(t, p, None) else { continue };
                    let exact = double::Conditions::new(&element, &fluid, t64, p64, None).unwrap();
                    for drop in decades(1e-3, 1.0, 13).map(|f| f * full_scale(&element, &fluid, t64, p64)) {
                        let drop = drop as f32;
                        let got = conditions.sample(PressureDrop::from_pascals(drop)).unwrap();
                        let want = exact.flow(f64::from(drop)).unwrap();
                        let got = f64::from(got.volume.as_cubic_metres_per_second());
                        let error = (got / want.volume - 1.0).abs();
                        sum += error * error;
                        count += 1.0;
                        if error > worst.0 {
                            worst = (error, format!("{name}, {}, {t:?}, {p:?}, {drop} Pa", fluid.name()));
                        }
                    }
                }
            }
        }
    }
    println!(
        "single against double: worst {:.3e} at {}, rms {:.3e}, {count} readings",
        worst.0,
        worst.1,
        (sum / count).sqrt()
    );
    assert!(worst.0 < tolerance::SINGLE_AGAINST_DOUBLE, "{worst:?}");
}
