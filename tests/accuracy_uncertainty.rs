//! The closed-form uncertainty: its sensitivities against derivatives of the law in double precision, and what it states
//! against a Monte Carlo.

mod common;

use common::{Errors, elements, tolerance, workshop_oil};
use evenbore::calibration::Quality;
use evenbore::fluid::StoredFluid;
use evenbore::fluid::catalogue::{AIR, CARBON_DIOXIDE, HELIUM, NITROGEN, WATER};
use evenbore::quantity::{AbsolutePressure, PressureDrop, RelativeHumidity, Temperature};
use evenbore::reading::{Reading, SensorUncertainty};
use evenbore::{Element, Meter, double};

/// What a flow depends on.
#[derive(Clone, Copy, Debug)]
struct Inputs {
    drop: f64,
    t: f64,
    p: f64,
    humidity: Option<f64>,
}

impl Inputs {
    fn reading(&self) -> Reading {
        let reading = Reading::new(
            PressureDrop::from_pascals(self.drop as f32),
            Temperature::from_kelvin(self.t as f32),
            AbsolutePressure::from_pascals(self.p as f32),
        );
        let humidity = self.humidity.map(|h| RelativeHumidity::from_fraction(h as f32));
        humidity.map_or(reading, |h| reading.with_relative_humidity(h))
    }

    /// ln of the volume flow at line conditions.
    fn ln_flow(&self, element: &Element, fluid: &StoredFluid) -> f64 {
        let conditions = double::Conditions::new(element, fluid, self.t, self.p, self.humidity).unwrap();
        conditions.flow(self.drop).unwrap().volume.abs().ln()
    }
}

/// Central difference of `f` over a step of `h` on either side.
fn slope(h: f64, f: impl Fn(f64) -> f64) -> f64 {
    (f(h) - f(-h)) / (2.0 * h)
}

/// d ln q/d ln A and d ln q/d(B/A) by moving the stored coefficients.
fn slopes_of_coefficients(element: &Element, fluid: &StoredFluid, at: &Inputs) -> (f64, f64) {
    let (a, b) = (element.a(), element.b());
    let moved = |a: f32, b: f32| at.ln_flow(&element.with_coefficients(a, b).unwrap(), fluid);
    let (a0, a1) = (a * 0.999, a * 1.001);
    let (b0, b1) = (b * 0.99, b * 1.01);
    let of_a = (moved(a1, b) - moved(a0, b)) / (f64::from(a1).ln() - f64::from(a0).ln());
    let of_b = (moved(a, b1) - moved(a, b0)) / ((f64::from(b1) - f64::from(b0)) / f64::from(a));
    (of_a, of_b)
}

/// Pressure drops (Pa) and line pressures (Pa) at which an element is laminar with every fluid below.
fn states(name: &str) -> [(f64, f64); 4] {
    match name {
        "fine capillaries" => [(500.0, 1.2e5), (2e4, 1.2e5), (5e4, 1.5e5), (5e4, 4e5)],
        "short tubes" => [(1.0, 1e5), (30.0, 1e5), (100.0, 1.2e5), (100.0, 4e5)],
        _ => [(5.0, 1e5), (200.0, 1e5), (700.0, 1.2e5), (600.0, 4e5)],
    }
}

#[test]
fn sensitivities_are_derivatives_of_the_law() {
    let oil = workshop_oil();
    let dry = |fluid: &StoredFluid| (*fluid, None);
    let cases = [
        dry(NITROGEN.fluid()),
        dry(HELIUM.fluid()),
        dry(CARBON_DIOXIDE.fluid()),
        dry(WATER.fluid()),
        dry(&oil),
        (*AIR.fluid(), Some(0.2)),
        (*AIR.fluid(), Some(0.8)),
    ];
    let names = ["pressure drop", "temperature", "line pressure", "viscosity and A", "relative humidity", "B over A"];
    let mut errors: [Errors; 6] = std::array::from_fn(|_| Errors::default());
    for (name, element) in elements() {
        for (fluid, humidity) in &cases {
            for (drop, p) in states(name).into_iter().flat_map(|(drop, p)| [(drop, p), (-drop, p)]) {
                for t in [283.15_f32, 293.15, 318.15].map(f64::from) {
                    let at = Inputs { drop, t, p, humidity: *humidity };
                    let meter = Meter::nominal(element, fluid).unwrap();
                    let flow = meter.flow(&at.reading()).unwrap();
                    if flow.reynolds > 1800.0 {
                        continue;
                    }
                    let s = flow.sensitivities;
                    let f = |at: Inputs| at.ln_flow(&element, fluid);
                    let (of_a, of_b) = slopes_of_coefficients(&element, fluid, &at);
                    let of_humidity =
                        humidity.map_or(0.0, |h| slope(1e-4, |d| f(Inputs { humidity: Some(h + d), ..at })));
                    let numerical = [
                        slope(1e-4, |d| f(Inputs { drop: drop * d.exp(), ..at })),
                        t * slope(0.02, |d| f(Inputs { t: t + d, ..at })),
                        slope(1e-4, |d| f(Inputs { p: p * d.exp(), ..at })),
                        of_a,
                        of_humidity,
                        of_b * f64::from(element.b() / element.a()),
                    ];
                    let closed = [
                        s.pressure_drop,
                        t as f32 * s.temperature,
                        s.line_pressure,
                        s.viscosity,
                        s.relative_humidity,
                        s.x * s.viscosity * element.b() / element.a(),
                    ];
                    let largest = numerical.iter().fold(0.0_f64, |most, n| most.max(n.abs()));
                    for ((errors, numerical), closed) in errors.iter_mut().zip(numerical).zip(closed) {
                        let error = (f64::from(closed) - numerical) / largest;
                        errors.add(error, || format!("{name}, {}, {at:?}: {closed} against {numerical}", fluid.name()));
                    }
                }
            }
        }
    }
    for ((errors, name), limit) in errors.iter().zip(names).zip(tolerance::SENSITIVITIES) {
        assert!(errors.count > 500, "{}", errors.count);
        errors.judge(&format!("sensitivity to {name}"), limit);
    }
}

/// Normal deviates from a fixed seed: a 64-bit congruence behind Box and Muller's transform.
struct Normal(u64);

impl Normal {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        ((self.0 >> 11) as f64 + 0.5) / (1_u64 << 53) as f64
    }
    fn draw(&mut self) -> f64 {
        let (u, v) = (self.uniform(), self.uniform());
        (-2.0 * u.ln()).sqrt() * (std::f64::consts::TAU * v).cos()
    }
}

/// Standard deviation of ln(volume flow) over 20 000 draws of every input the meter counts as uncertain.
fn monte_carlo(
    element: &Element,
    fluid: &StoredFluid,
    at: &Inputs,
    s: &SensorUncertainty,
    q: &Quality,
    u_mu: f64,
) -> f64 {
    let mut normal = Normal(20_261_201);
    let b_over_a = f64::from(element.b() / element.a());
    let (mut sum, mut squares) = (0.0, 0.0);
    let draws = 20_000;
    let best = at.ln_flow(element, fluid);
    for _ in 0..draws {
        let mut n = || normal.draw();
        let (z1, z2, c) = (n(), n(), f64::from(q.correlation));
        let viscosity = u_mu * n(); // moves the flow as A does
        let a = 1.0 + f64::from(q.u_a) * z1;
        let b = b_over_a + f64::from(q.u_b_m) * (c * z1 + (1.0 - c * c).sqrt() * z2);
        let a_stored = f64::from(element.a()) * a * (1.0 + viscosity);
        let moved = element.with_coefficients(a_stored as f32, (b * f64::from(element.a())) as f32).unwrap();
        let relative = f64::from(s.pressure_drop_rel) * n();
        let drawn = Inputs {
            drop: at.drop * (1.0 + relative) + f64::from(s.pressure_drop_pa) * n(),
            t: at.t + f64::from(s.temperature_k) * n(),
            p: at.p * (1.0 + f64::from(s.line_pressure_rel) * n()) + f64::from(s.line_pressure_pa) * n(),
            humidity: at.humidity.map(|h| h + f64::from(s.relative_humidity) * n()),
        };
        let deviation = drawn.ln_flow(&moved, fluid) - best;
        sum += deviation;
        squares += deviation * deviation;
    }
    let mean = sum / f64::from(draws);
    (squares / f64::from(draws) - mean * mean).sqrt()
}

#[test]
fn stated_uncertainty_is_that_of_a_monte_carlo() {
    let sensors = SensorUncertainty {
        pressure_drop_pa: 0.5,
        pressure_drop_rel: 0.001,
        temperature_k: 0.3,
        line_pressure_pa: 50.0,
        line_pressure_rel: 0.001,
        relative_humidity: 0.02,
    };
    let oil = workshop_oil();
    let [bundle, _, fine, short, plates] = elements().map(|(_, element)| element);
    let cases = [
        (bundle, *NITROGEN.fluid(), Inputs { drop: 800.0, t: 313.15, p: 1.2e5, humidity: None }),
        (bundle, *AIR.fluid(), Inputs { drop: 100.0, t: 303.15, p: 1e5, humidity: Some(0.5) }),
        (fine, *HELIUM.fluid(), Inputs { drop: 5e4, t: 293.15, p: 1.5e5, humidity: None }),
        (short, *CARBON_DIOXIDE.fluid(), Inputs { drop: -90.0, t: 283.15, p: 1.2e5, humidity: None }),
        (plates, *WATER.fluid(), Inputs { drop: 500.0, t: 303.15, p: 2e5, humidity: None }),
        (bundle, oil, Inputs { drop: 2e4, t: 313.15, p: 2e5, humidity: None }),
    ];
    let mut errors = Errors::default();
    for (element, fluid, at) in cases {
        let mut quality = Quality::nominal(element.a(), element.b());
        quality.common.clear();
        quality.u_a = 0.001;
        quality.u_b_m = 0.02 * element.b() / element.a();
        quality.correlation = -0.6;
        quality.temperature_k = Temperature::from_celsius(20.0);
        let meter = Meter::calibrated(element, &fluid, quality.clone()).unwrap();
        let meter = meter.with_sensor_uncertainty(sensors).unwrap();
        let flow = meter.flow(&at.reading()).unwrap();
        let away = (at.t - 293.15).abs() / 50.0;
        // Humidity adds a viscosity uncertainty of its own, which the draws below do not hold; it is taken from the flow.
        let moist = f64::from(flow.uncertainty.common / flow.sensitivities.viscosity.abs());
        let u_mu = if at.humidity.is_some() { moist } else { f64::from(fluid.u_viscosity_ratio()) * away };
        let drawn = monte_carlo(&element, &fluid, &at, &sensors, &quality, u_mu);
        let stated = f64::from(flow.uncertainty.combined());
        println!("{}: stated {stated:.6}, drawn {drawn:.6}", fluid.name());
        errors.add(stated / drawn - 1.0, || format!("{}, {at:?}", fluid.name()));
    }
    assert_eq!(errors.count, 6);
    errors.judge("stated uncertainty against 20 000 draws", tolerance::MONTE_CARLO);
}
