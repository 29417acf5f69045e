//! What must hold for any input: no panic, no number that is none, order, symmetry, the way there and back.

mod common;

use common::{constant_liquid, elements, fluids, tolerance, workshop_oil};
use evenbore::conditions::{Conditions, Sample};
use evenbore::double;
use evenbore::flow::Flow;
use evenbore::fluid::StoredFluid;
use evenbore::fluid::catalogue::{AIR, ALL, NITROGEN, WATER};
use evenbore::quantity::{AbsolutePressure, Length, MassFlow, PressureDrop, RelativeHumidity, Temperature};
use evenbore::reading::Reading;
use evenbore::{Element, Meter, Status};
use proptest::num::f32::ANY;
use proptest::prelude::*;
use std::sync::LazyLock;

fn mm(length: f32) -> Length {
    Length::from_millimetres(length)
}

/// Elements as makers build them, and some no maker would, all valid.
fn hostile() -> Vec<Element> {
    let usual = elements().map(|(_, element)| element);
    let odd = [
        Element::round_tubes(1, Length::from_micrometres(2.0), mm(100.0)).unwrap(),
        Element::round_tubes(1, Length::from_micrometres(1.0), Length::from_metres(10.0)).unwrap(),
        Element::round_tubes(1_000_000, mm(50.0), Length::from_metres(1.0)).unwrap(),
        Element::parallel_plates(mm(10.0), mm(0.1), mm(0.1)).unwrap(),
        Element::parallel_plates(Length::from_micrometres(1.0), Length::from_metres(1000.0), mm(0.1)).unwrap(),
        Element::duct(14.227, mm(0.5), 10.0, Length::from_metres(10.0)).unwrap(),
        Element::other(1.0, 0.0).unwrap(),
        Element::other(1e30, 1e30).unwrap(),
        Element::other(4.2e9, 1.7e6).unwrap(),
    ];
    usual.into_iter().chain(odd).collect()
}

/// Index of a fluid, so that a failure prints a number instead of a table.
fn some_fluid() -> impl Strategy<Value = usize> {
    0..FLUIDS.len()
}

static FLUIDS: LazyLock<Vec<StoredFluid>> = LazyLock::new(fluids);

fn some_element() -> impl Strategy<Value = Element> {
    proptest::sample::select(elements().map(|(_, element)| element).to_vec())
}

fn reading(drop: f32, t: f32, p: f32, humidity: Option<f32>) -> Reading {
    let reading =
        Reading::new(PressureDrop::from_pascals(drop), Temperature::from_kelvin(t), AbsolutePressure::from_pascals(p));
    humidity.map_or(reading, |h| reading.with_relative_humidity(RelativeHumidity::from_fraction(h)))
}

/// The name of the first field that is no finite number.
fn not_finite(flow: &Flow) -> Option<&'static str> {
    let (s, u) = (&flow.sensitivities, &flow.uncertainty);
    let fields = [
        ("volume", flow.volume.as_cubic_metres_per_second()),
        ("mass", flow.mass.as_kilograms_per_second()),
        ("standard", flow.standard.map_or(0.0, |q| q.as_cubic_metres_per_second())),
        ("viscosity", flow.viscosity.as_pascal_seconds()),
        ("density", flow.density.as_kilograms_per_cubic_metre()),
        ("reynolds", flow.reynolds),
        ("kinetic share", flow.kinetic_share),
        ("by pressure drop", s.pressure_drop),
        ("by temperature", s.temperature),
        ("by line pressure", s.line_pressure),
        ("by viscosity", s.viscosity),
        ("by humidity", s.relative_humidity),
        ("x", s.x),
        ("fit", u.fit),
        ("common", u.common),
        ("sensors", u.sensors),
        ("combined", u.combined()),
    ];
    fields.into_iter().find(|(_, value)| !value.is_finite()).map(|(name, _)| name)
}

/// A pressure drop (Pa) that takes ln(p1/p2) to at most 0.7 and leaves the outlet within the fluid's table.
fn drop_of(fluid: &StoredFluid, p: f32, share: f32) -> f32 {
    let [low, _] = fluid.pressure_range().map(|p| p.as_pascals());
    share * (0.5 * p).min(0.98 * (p - low))
}

/// A state within the table of `fluid` at shares of its ranges.
fn state_of(fluid: &StoredFluid, t: f32, p: f32) -> (f32, f32) {
    let [cold, hot] = fluid.temperature_range().map(|t| t.as_kelvin());
    let [low, high] = fluid.pressure_range().map(|p| p.as_pascals());
    (cold + t * (hot - cold), (1.1 * low) * (0.9 * high / (1.1 * low)).powf(p))
}

fn conditions(element: Element, fluid: &StoredFluid, t: f32, p: f32) -> Conditions {
    let meter = Meter::nominal(element, fluid).unwrap();
    meter.conditions(Temperature::from_kelvin(t), AbsolutePressure::from_pascals(p), None).unwrap()
}

fn sample(conditions: &Conditions, drop: f32) -> Sample {
    conditions.sample(PressureDrop::from_pascals(drop)).unwrap()
}

fn mass(conditions: &Conditions, drop: f32) -> f64 {
    f64::from(sample(conditions, drop).mass.as_kilograms_per_second())
}

/// Cases without files of their own: a failure prints its input, which becomes a row of a test.
fn cases(n: u32) -> ProptestConfig {
    ProptestConfig { failure_persistence: None, max_global_rejects: 100_000, ..ProptestConfig::with_cases(n) }
}

proptest! {
    #![proptest_config(cases(50_000))]

    #[test]
    fn any_numbers_give_a_finite_flow_or_a_refusal(
        element in proptest::sample::select(hostile()),
        fluid in some_fluid(),
        drop in ANY, t in ANY, p in ANY, humidity in proptest::option::of(ANY),
    ) {
        let fluid = &FLUIDS[fluid];
        let meter = Meter::nominal(element, fluid).unwrap();
        if let Ok(flow) = meter.flow(&reading(drop, t, p, humidity)) {
            prop_assert_eq!(not_finite(&flow), None);
        }
    }

    /// Any drop at a state the table serves: most of these do give a flow.
    #[test]
    fn any_drop_gives_a_finite_flow_or_a_refusal(
        element in proptest::sample::select(hostile()),
        fluid in some_fluid(),
        any_drop in ANY, share in -1.0_f32..1.0, t in 0.0_f32..1.0, p in 0.0_f32..1.0, humidity in 0.0_f32..1.0,
    ) {
        let fluid = &FLUIDS[fluid];
        let (t, p) = state_of(fluid, t, p);
        let meter = Meter::nominal(element, fluid).unwrap();
        let served = reading(drop_of(fluid, p, share), t, p, None);
        let flow = meter.flow(&served);
        prop_assert!(flow.is_ok() || share < 0.0, "{:?}", flow);
        for reading in [served, reading(any_drop, t, p, None), reading(any_drop, t, p, Some(humidity)),
            reading(drop_of(fluid, p, share), t, p, Some(humidity))] {
            if let Ok(flow) = meter.flow(&reading) {
                prop_assert_eq!(not_finite(&flow), None);
                let drop = reading.pressure_drop.as_pascals();
                prop_assert!(flow.mass.as_kilograms_per_second() * drop >= 0.0);
            }
        }
    }
}

proptest! {
    #![proptest_config(cases(20_000))]

    /// Strictly where the drops differ by more than the arithmetic rounds, never the other way round otherwise.
    #[test]
    fn more_pressure_drop_is_more_flow(
        element in some_element(), fluid in some_fluid(),
        t in 0.0_f32..1.0, p in 0.0_f32..1.0, share in -0.3_f32..0.9, more in 3e-6_f32..0.1,
    ) {
        let fluid = &FLUIDS[fluid];
        let (t, p) = state_of(fluid, t, p);
        let conditions = conditions(element, fluid, t, p);
        let drop = drop_of(fluid, p, share);
        let larger = drop + more * drop.abs();
        let (Ok(first), Ok(second)) = (
            conditions.sample(PressureDrop::from_pascals(drop)),
            conditions.sample(PressureDrop::from_pascals(larger)),
        ) else { return Ok(()) };
        prop_assume!(first.reynolds < 2000.0 && second.reynolds < 2000.0 && drop != 0.0);
        prop_assert!(second.mass > first.mass, "{:?} {:?}", first.mass, second.mass);
    }

    #[test]
    fn nothing_in_is_nothing_out(
        element in proptest::sample::select(hostile()), fluid in some_fluid(), t in 0.0_f32..1.0, p in 0.0_f32..1.0,
    ) {
        let fluid = &FLUIDS[fluid];
        let (t, p) = state_of(fluid, t, p);
        let conditions = conditions(element, fluid, t, p);
        for zero in [0.0, -0.0] {
            let sample = sample(&conditions, zero);
            prop_assert_eq!(sample.mass.as_kilograms_per_second(), 0.0);
            prop_assert_eq!(sample.volume.as_cubic_metres_per_second(), 0.0);
            prop_assert_eq!(sample.reynolds, 0.0);
        }
        prop_assert_eq!(conditions.pressure_drop(MassFlow::default()).unwrap().as_pascals(), 0.0);
    }

    #[test]
    fn liquids_flow_back_as_they_flow_forth(
        element in some_element(), t in 0.0_f32..1.0, share in 1e-4_f32..1.0,
    ) {
        // Water's density and viscosity follow pressure; only a liquid without either is symmetric to rounding.
        let (t, p) = (280.0 + 80.0 * t, 3e5);
        let conditions = conditions(element, &constant_liquid(1.3e-3, 950.0), t, p);
        let (forth, back) = (mass(&conditions, 1e5 * share), mass(&conditions, -1e5 * share));
        prop_assert!((back / -forth - 1.0).abs() <= tolerance::ODD_SYMMETRY, "{} {}", forth, back);
    }

    /// At one line pressure a reverse flow has the higher mean pressure; the same two end pressures give the same flow.
    #[test]
    fn gases_turned_round_flow_the_same(
        element in some_element(), entry in 0..ALL.len(),
        t in 0.0_f32..1.0, p in 0.0_f32..1.0, share in 1e-3_f32..1.0,
    ) {
        let fluid = ALL[entry].fluid();
        let (t, p) = state_of(fluid, t, p);
        let drop = drop_of(fluid, p, share);
        let (upstream, downstream) = (conditions(element, fluid, t, p), conditions(element, fluid, t, p - drop));
        let exact_drop = p - (p - drop); // what single precision holds of it
        prop_assume!(exact_drop > 0.0);
        let (forth, back) = (mass(&upstream, exact_drop), mass(&downstream, -exact_drop));
        prop_assert!((back / -forth - 1.0).abs() <= tolerance::TURNED_ROUND, "{} {}", forth, back);
        // And from the same line pressure backwards more than forwards, as density does.
        if let Ok(more) = upstream.sample(PressureDrop::from_pascals(-exact_drop)) {
            prop_assert!(f64::from(-more.mass.as_kilograms_per_second()) >= forth * (1.0 - 1e-3));
        }
    }

    #[test]
    fn the_inverse_leads_back(
        element in some_element(), fluid in some_fluid(),
        t in 0.0_f32..1.0, p in 0.0_f32..1.0, share in -0.5_f32..1.0,
    ) {
        let fluid = &FLUIDS[fluid];
        let (t, p) = state_of(fluid, t, p);
        let conditions = conditions(element, fluid, t, p);
        let drop = drop_of(fluid, p, share);
        prop_assume!(drop.abs() > 1e-3);
        let Ok(sample) = conditions.sample(PressureDrop::from_pascals(drop)) else { return Ok(()) };
        prop_assume!(sample.reynolds <= 1800.0);
        let back = conditions.pressure_drop(sample.mass);
        prop_assert!(back.is_ok(), "{:?} at {} of {}", back, drop, p);
        let back = back.unwrap().as_pascals();
        // Where the gas nears the flow that no pressure drop exceeds, a flow rounded to single precision no longer says
        // to 2e-6 which drop drove it.
        let error = f64::from(back) / f64::from(drop) - 1.0;
        let again = mass(&conditions, back) / f64::from(sample.mass.as_kilograms_per_second()) - 1.0;
        let [of_flow, of_drop] =
            if drop < 0.3 * p { [tolerance::INVERSE; 2] } else { tolerance::INVERSE_STRONG };
        prop_assert!(again.abs() <= of_flow, "{again:e} at {drop} of {p} Pa, {:?}", sample);
        prop_assert!(error.abs() <= of_drop, "{error:e} at {drop} of {p} Pa, {:?}", sample);
    }

    #[test]
    fn twice_the_tubes_carry_twice_the_flow(
        count in 1_u32..5000, bore in 0.05_f32..1.0, length in 20.0_f32..500.0, drop in 0.01_f32..5.0,
    ) {
        let element = |n| Element::round_tubes(n, mm(bore), mm(length)).unwrap();
        let flow = |n, mu| mass(&conditions(element(n), &constant_liquid(mu, 900.0), 293.15, 1e5), drop);
        // Tubes in parallel share x, so this holds with the kinetic part as well.
        let twice = flow(2 * count, 0.02) / flow(count, 0.02) / 2.0;
        prop_assert!((twice - 1.0).abs() <= tolerance::SCALING, "{twice}");
        // Creeping flow is as thin as the liquid is thick.
        let thicker = flow(count, 60.0) / flow(count, 20.0) * 3.0;
        prop_assert!((thicker - 1.0).abs() <= tolerance::SCALING, "{thicker}");
    }

    #[test]
    fn reynolds_numbers_of_both_viscosities_agree(
        fluid in some_fluid(), t in 0.0_f32..1.0, p in 0.0_f32..1.0, share in 1e-3_f32..0.02,
    ) {
        let fluid = &FLUIDS[fluid];
        let (t, p) = state_of(fluid, t, p);
        let element = Element::round_tubes(100, mm(0.5), mm(100.0)).unwrap();
        let sample = sample(&conditions(element, fluid, t, p), drop_of(fluid, p, share));
        // U Dh/nu with nu = mu/rho, all from the outputs: rho U = mass/area.
        let nu = f64::from(sample.viscosity.kinematic(sample.density).as_square_metres_per_second());
        let speed = f64::from(sample.volume.as_cubic_metres_per_second()) / f64::from(element.open_area());
        let by_kinematic = speed * f64::from(element.hydraulic_diameter().as_metres()) / nu;
        let flux = f64::from(sample.mass.as_kilograms_per_second()) / f64::from(element.open_area());
        let by_dynamic = flux * f64::from(element.hydraulic_diameter().as_metres())
            / f64::from(sample.viscosity.as_pascal_seconds());
        prop_assert!((by_dynamic / by_kinematic - 1.0).abs() <= tolerance::REYNOLDS);
        prop_assert!((f64::from(sample.reynolds) / by_dynamic - 1.0).abs() <= tolerance::REYNOLDS);
    }

    #[test]
    fn single_precision_is_double_rounded(
        element in some_element(), fluid in some_fluid(),
        t in 0.0_f32..1.0, p in 0.0_f32..1.0, share in 1e-4_f32..1.0, humidity in 0.0_f32..1.0,
    ) {
        let fluid = &FLUIDS[fluid];
        let (t, p) = state_of(fluid, t, p);
        let drop = drop_of(fluid, p, share);
        let moist = (fluid.name() == AIR.fluid().name() && (260.0..330.0).contains(&t)).then_some(humidity);
        let meter = Meter::nominal(element, fluid).unwrap();
        let exact = double::Conditions::new(&element, fluid, t.into(), p.into(), moist.map(f64::from));
        let (single, exact) = match (meter.flow(&reading(drop, t, p, moist)), exact) {
            (Ok(single), Ok(exact)) => (single, exact.flow(drop.into()).unwrap()),
            (single, exact) => {
                prop_assert!(single.is_err() == exact.is_err(), "{:?} {:?}", single, exact);
                return Ok(());
            }
        };
        let error = f64::from(single.volume.as_cubic_metres_per_second()) / exact.volume - 1.0;
        prop_assert!(error.abs() <= tolerance::SINGLE_ANYWHERE, "{error:e}");
    }
}

#[test]
fn tables_have_no_step_between_segments() {
    for fluid in fluids() {
        let [cold, hot] = fluid.temperature_range().map(|t| f64::from(t.as_kelvin()));
        let p = 0.5 * fluid.pressure_range().map(|p| f64::from(p.as_pascals())).iter().sum::<f64>();
        for node in 1..32 {
            let t = cold + (hot - cold) * f64::from(node) / 32.0;
            let at = |t: f64| double::Properties::at(&fluid, t);
            let (below, above) = (at(t - 1e-7), at(t + 1e-7));
            let steps = [
                below.viscosity(p) / above.viscosity(p) - 1.0,
                below.density(p) / above.density(p) - 1.0,
                // The slope is continuous as well: n is a slope.
                (below.viscosity_exponent() - above.viscosity_exponent()) / above.viscosity_exponent().abs().max(0.1),
            ];
            for step in steps {
                assert!(step.abs() <= tolerance::SEGMENT_STEP, "{} at node {node}: {step:e}", fluid.name());
            }
        }
    }
}

#[test]
fn strong_flows_are_flagged_not_hidden() {
    let (_, short) = elements()[3];
    let nitrogen = conditions(short, NITROGEN.fluid(), 293.15, 1e5);
    assert!(sample(&nitrogen, 2e4).status.contains(Status::NOT_LAMINAR));
    let (_, fine) = elements()[2];
    let strong = sample(&conditions(fine, NITROGEN.fluid(), 293.15, 2e5), 1.2e5).status;
    assert!(strong.contains(Status::STRONG_EXPANSION));
    let pinhole = Element::round_tubes(1, Length::from_micrometres(2.0), mm(100.0)).unwrap();
    assert!(sample(&conditions(pinhole, NITROGEN.fluid(), 293.15, 1e5), 1e3).status.contains(Status::STRONG_SLIP));
    assert_eq!(sample(&conditions(fine, NITROGEN.fluid(), 293.15, 2e5), 1e3).status, Status::UNCALIBRATED);
    assert_eq!(sample(&conditions(fine, WATER.fluid(), 293.15, 2e5), 1e3).status, Status::UNCALIBRATED);
    assert_eq!(sample(&conditions(fine, &workshop_oil(), 293.15, 2e5), 1e3).status, Status::UNCALIBRATED);
}
