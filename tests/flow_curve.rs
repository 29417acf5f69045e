//! The fast arithmetic against the law in double precision, over elements, fluids and states.

mod common;

use common::{decades, elements, fluids, sweep, tolerance};
use evenbore::flow_curve::FlowCurve;
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};
use evenbore::{Meter, double};

#[test]
fn curve_agrees_with_double_precision() {
    let (mut worst, mut sum, mut count) = ((0.0, String::new()), 0.0, 0.0);
    for (name, element) in elements() {
        for fluid in fluids() {
            let meter = Meter::nominal(element, &fluid).unwrap();
            let [t_low, t_high] = fluid.temperature_range().map(|t| f64::from(t.as_kelvin()));
            let [p_low, p_high] = fluid.pressure_range().map(|p| f64::from(p.as_pascals()));
            for t in sweep(t_low, t_high, 7).map(|t| Temperature::from_kelvin(t as f32)) {
                for p in decades((1.3 * p_low).max(8e4), p_high.min(9e5), 4) {
                    let p = AbsolutePressure::from_pascals(p as f32);
                    let (t64, p64) = (f64::from(t.as_kelvin()), f64::from(p.as_pascals()));
                    let Ok(conditions) = meter.conditions(t, p, None) else { continue };
                    let exact = double::Conditions::new(&element, &fluid, t64, p64, None).unwrap();
                    let mut end = (0.45 * p64).min(0.9 * (p64 - p_low)).min(1e5);
                    while f64::from(element.reynolds(exact.flow(end).unwrap().x as f32)) > 1900.0 {
                        end *= 0.8;
                    }
                    let curve = FlowCurve::new(&conditions, PressureDrop::from_pascals(end as f32)).unwrap();
                    for drop in decades(1e-4, 1.0, 60).map(|f| (f * end) as f32) {
                        let got = curve.sample(PressureDrop::from_pascals(drop)).unwrap().volume;
                        let want = exact.flow(f64::from(drop)).unwrap().volume;
                        let error = (f64::from(got.as_cubic_metres_per_second()) / want - 1.0).abs();
                        assert!(error.is_finite());
                        sum += error * error;
                        count += 1.0;
                        if error > worst.0 {
                            worst = (error, format!("{name}, {}, {t:?}, {p:?}, {drop} of {end} Pa", fluid.name()));
                        }
                    }
                }
            }
        }
    }
    println!("curve: worst {:.3e} at {}, rms {:.3e}, {count} samples", worst.0, worst.1, (sum / count).sqrt());
    assert!(worst.0 < tolerance::CURVE_AGAINST_DOUBLE, "{worst:?}");
}
