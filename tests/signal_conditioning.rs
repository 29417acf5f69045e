//! Conditioning: damping against its equation, windows against sorting, zeros against statistics, pulsation.

use evenbore::conditioning::freshness::{Age, Freshness, Lateness, Millis};
use evenbore::conditioning::zero::{NoFlow, ZeroLimits, ZeroRefusal, ZeroTracking};
use evenbore::conditioning::{Cutoff, Damping, Window, Zero, ZeroCapture};
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::quantity::{AbsolutePressure, Length, MassFlow, PressureDrop, Temperature};
use evenbore::reading::{SensorUncertainty, Trims};
use evenbore::{Element, Meter};
use proptest::prelude::*;

fn pa(value: f32) -> PressureDrop {
    PressureDrop::from_pascals(value)
}

fn kg(value: f32) -> MassFlow {
    MassFlow::from_kilograms_per_second(value)
}

#[test]
fn damping_follows_its_equation() {
    for (tau, ms) in [(2.0, 100), (0.05, 100), (1000.0, 10), (1e4, 1)] {
        let mut damping = Damping::new(tau).unwrap();
        damping.update(kg(0.0), ms);
        let got = f64::from(damping.update(kg(1.0), ms).unwrap().as_kilograms_per_second());
        let want = -(-f64::from(ms) * 1e-3 / f64::from(tau)).exp_m1();
        assert!((got / want - 1.0).abs() < 3e-7, "tau {tau}: {got} against {want}");
    }
}

#[test]
fn damping_reaches_its_input_however_small_its_steps() {
    let mut damping = Damping::new(1000.0).unwrap();
    damping.update(kg(1.0), 10);
    for _ in 0..2_000_000 {
        damping.update(kg(1.001), 10);
    }
    let got = damping.value().unwrap().as_kilograms_per_second();
    assert!((got / 1.001 - 1.0).abs() < 2e-7, "{got}");
}

#[test]
fn damping_starts_whole_forgets_when_told_and_can_be_off() {
    let mut damping = Damping::new(10.0).unwrap();
    assert_eq!(damping.value(), None);
    assert_eq!(damping.update(kg(f32::NAN), 5), None);
    assert_eq!(damping.update(kg(3.0), 0), Some(kg(3.0)));
    assert_eq!(damping.update(kg(9.0), 0), Some(kg(3.0)), "no time has passed");
    for broken in [f32::NAN, f32::INFINITY, f32::NEG_INFINITY] {
        assert_eq!(damping.update(kg(broken), 1000), Some(kg(3.0)));
    }
    damping.reset();
    assert_eq!(damping.update(kg(7.0), 1), Some(kg(7.0)));
    let mut off = Damping::new(0.0).unwrap();
    off.update(kg(1.0), 1);
    assert_eq!(off.update(kg(2.0), 1), Some(kg(2.0)));
    for refused in [-1.0, 1e4 + 1.0, f32::NAN] {
        assert!(Damping::<MassFlow>::new(refused).is_err());
    }
}

#[test]
fn windows_drop_the_oldest_and_leave_out_what_is_no_number() {
    let mut window = Window::<MassFlow, 3>::new();
    assert!(window.is_empty() && window.median().is_none() && window.mean().is_none() && window.variance().is_none());
    assert!(window.push(kg(5.0)));
    assert_eq!((window.median(), window.mean(), window.variance()), (Some(kg(5.0)), Some(kg(5.0)), None));
    assert!(!window.push(kg(f32::NAN)) && !window.push(kg(f32::INFINITY)));
    for value in [1.0, 2.0, 6.0] {
        window.push(kg(value));
    }
    assert_eq!((window.len(), window.median(), window.mean()), (3, Some(kg(2.0)), Some(kg(3.0))));
    assert_eq!(window.variance(), Some(7.0));
    for value in [10_001.0, 10_002.0, 10_003.0] {
        window.push(kg(value));
    }
    assert_eq!(window.variance(), Some(1.0), "the mean is taken off before squaring");
    window.push(kg(f32::MAX));
    window.push(kg(f32::MAX));
    assert_eq!(window.mean(), None, "the sum is beyond the number range");
    window.clear();
    assert!(window.is_empty());
}

#[test]
fn averaging_pressure_drops_reads_high_and_averaging_flows_does_not() {
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(40.0)).unwrap();
    let meter = Meter::nominal(element, NITROGEN.fluid()).unwrap();
    let (t, p) = (Temperature::from_celsius(20.0), AbsolutePressure::from_kilopascals(100.0));
    let conditions = meter.conditions(t, p, None).unwrap();
    // The drop at which the kinetic share is 0.1.
    let mut mean_drop = 10.0;
    while conditions.sample(pa(mean_drop)).unwrap().kinetic_share < 0.1 {
        mean_drop *= 1.01;
    }
    let mut flows = Window::<MassFlow, 1000>::new();
    for i in 0..1000 {
        let swing = 1.0 + 0.2 * (std::f32::consts::TAU * i as f32 / 1000.0).sin();
        flows.push(conditions.sample(pa(mean_drop * swing)).unwrap().mass);
    }
    let of_mean = conditions.sample(pa(mean_drop)).unwrap();
    let linearised = flows.mean().unwrap().as_kilograms_per_second();
    let error = of_mean.mass.as_kilograms_per_second() / linearised - 1.0;
    let (eps, r2) = (of_mean.kinetic_share, 0.02);
    let stated = (eps * (1.0 + eps) * (1.0 + eps) / (1.0 + 2.0 * eps).powi(3) + mean_drop / (2.0 * 1e5)) * r2;
    println!("pulsation: {:.4} %, stated {:.4} %", error * 100.0, stated * 100.0);
    assert!((error - stated).abs() < 0.03 * stated, "{error} against {stated}");
}

fn limits(readings: u16) -> ZeroLimits {
    ZeroLimits::new(readings, pa(5.0), pa(1.0), pa(0.0)).unwrap()
}

fn capture(limits: ZeroLimits, readings: &[f32]) -> Result<Option<Zero>, ZeroRefusal> {
    let mut capture = ZeroCapture::new(limits, NoFlow::ShutOff);
    let mut last = Ok(None);
    for &reading in readings {
        last = capture.add(pa(reading));
    }
    last
}

#[test]
fn a_zero_is_refused_for_its_size_its_scatter_and_what_is_no_number() {
    let ok = capture(limits(3), &[4.9, 5.0, 5.1]).unwrap().unwrap();
    assert!((ok.offset.as_pascals() - 5.0).abs() < 1e-6);
    assert!(matches!(capture(limits(3), &[-5.3, -5.1, -5.2]), Err(ZeroRefusal::TooLarge(at)) if at < pa(-5.1)));
    let unsteady = capture(limits(3), &[-1.5, 1.5, 0.0]);
    assert!(matches!(unsteady, Err(ZeroRefusal::Unsteady(s)) if (s.as_pascals() - 1.5).abs() < 1e-6));
    assert_eq!(capture(limits(3), &[1.0, f32::NAN]), Err(ZeroRefusal::NotFinite));
    assert_eq!(capture(limits(2), &[f32::MAX, f32::MIN]), Err(ZeroRefusal::NotFinite));
    let mut again = ZeroCapture::new(limits(2), NoFlow::PortsJoined);
    assert_eq!((again.missing(), again.proof()), (2, NoFlow::PortsJoined));
    assert!(again.add(pa(f32::NAN)).is_err());
    assert_eq!(again.missing(), 2, "begins anew");
    again.add(pa(1.0)).unwrap();
    assert_eq!(again.missing(), 1);
    assert!(again.add(pa(1.0)).unwrap().is_some());
    assert_eq!(again.missing(), 2, "begins anew");
    assert!(ZeroLimits::new(1, pa(1.0), pa(1.0), pa(0.0)).is_err());
    assert!(ZeroLimits::new(9, pa(-1.0), pa(1.0), pa(0.0)).is_err());
    assert!(ZeroLimits::new(9, pa(1.0), pa(f32::NAN), pa(0.0)).is_err());
}

#[test]
fn a_zero_carries_its_uncertainty_into_trims_and_sensors() {
    let coarse = ZeroLimits::new(4, pa(5.0), pa(1.0), pa(0.6)).unwrap();
    let zero = capture(coarse, &[1.0, 1.2, 0.8, 1.0]).unwrap().unwrap();
    let want = (0.08_f32 / 3.0 / 4.0 + 0.36 / 12.0).sqrt();
    assert!((zero.uncertainty.as_pascals() - want).abs() < 1e-6);
    let trims = zero.trims(Trims { pressure_drop_gain: 1.01, ..Trims::NONE });
    assert_eq!((trims.pressure_drop_zero_pa, trims.pressure_drop_gain), (zero.offset.as_pascals(), 1.01));
    let sensors = zero.sensors(SensorUncertainty::COMMON);
    assert!((sensors.pressure_drop_pa - want.hypot(0.2)).abs() < 1e-6);
    assert_eq!(sensors.temperature_k, SensorUncertainty::COMMON.temperature_k);
}

#[test]
fn a_zero_is_followed_only_with_proof_and_only_so_far() {
    let start = Zero { offset: pa(1.0), uncertainty: pa(0.1) };
    let mut tracking = ZeroTracking::new(start, 10.0, pa(2.0)).unwrap();
    tracking.update(pa(2.0), 10_000, None);
    assert_eq!(tracking.zero(), start);
    tracking.update(pa(f32::NAN), 10_000, Some(NoFlow::OutOfLine));
    assert_eq!(tracking.zero(), start);
    tracking.update(pa(2.0), 10_000, Some(NoFlow::ShutOff));
    assert!((tracking.zero().offset.as_pascals() - 1.632_12).abs() < 1e-4);
    for _ in 0..1000 {
        tracking.update(pa(100.0), 1000, Some(NoFlow::ShutOff));
    }
    let held = tracking.zero().offset.as_pascals();
    assert!(tracking.drifted() && held <= 3.0, "{held}");
    tracking.update(pa(1.0), 10_000, Some(NoFlow::ShutOff));
    assert!(!tracking.drifted() && tracking.zero().offset.as_pascals() < held);
    assert!(ZeroTracking::new(start, 0.5, pa(2.0)).is_err() && ZeroTracking::new(start, 5.0, pa(-2.0)).is_err());
}

#[test]
fn the_cutoff_has_hysteresis_and_ignores_what_is_no_number() {
    let mut cutoff = Cutoff::new(kg(1.0), kg(2.0)).unwrap();
    let rows = [(1.5, false), (2.0, true), (1.0, true), (f32::NAN, false), (1.0, true), (0.99, false), (-1.5, false)];
    for (flow, flows) in rows.into_iter().chain([(-2.0, true), (-1.0, true), (-0.9, false), (1.5, false)]) {
        assert_eq!(cutoff.flows(kg(flow)), flows, "{flow}");
    }
    assert!(Cutoff::new(kg(2.0), kg(1.0)).is_err() && Cutoff::new(kg(-1.0), kg(1.0)).is_err());
    assert!(Cutoff::new(kg(0.0), kg(0.0)).unwrap().flows(kg(0.0)));
}

#[test]
fn a_flow_that_is_cut_off_is_zero_in_all_its_forms() {
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(40.0)).unwrap();
    let meter = Meter::nominal(element, NITROGEN.fluid()).unwrap();
    let (t, p) = (Temperature::from_celsius(20.0), AbsolutePressure::from_kilopascals(100.0));
    let sample = meter.conditions(t, p, None).unwrap().sample(pa(-500.0)).unwrap();
    let above = kg(2.0 * sample.mass.as_kilograms_per_second().abs());
    assert_eq!(Cutoff::new(kg(0.0), kg(0.0)).unwrap().apply(&sample), sample);
    let cut = Cutoff::new(above, above).unwrap().apply(&sample);
    assert_eq!((cut.mass, cut.volume.as_litres_per_second()), (kg(0.0), 0.0));
    assert_eq!(cut.standard.unwrap().as_litres_per_second(), 0.0);
    assert_eq!((cut.status, cut.density), (sample.status, sample.density));
}

#[test]
fn ages_cross_the_counters_restart_and_never_become_young_again() {
    let mut age = Age::new(Millis(7));
    assert_eq!(age.at(Millis(7)), u32::MAX);
    age.sampled(Millis(u32::MAX));
    assert_eq!(age.at(Millis(0)), 1);
    let mut now = 0_u32;
    for day in 1..=200_u32 {
        now = now.wrapping_add(86_400_000);
        let want = (u64::from(day) * 86_400_000 + 1).min(u64::from(u32::MAX));
        assert_eq!(u64::from(age.at(Millis(now))), want, "day {day}");
    }
    age.sampled(Millis(now));
    assert_eq!(age.at(Millis(now)), 0);
    let freshness = Freshness::new(100, 10).unwrap();
    assert_eq!(freshness.judge(&[]), Some(Lateness::Stale));
    assert_eq!(freshness.judge(&[100, 90]), None);
    assert_eq!(freshness.judge(&[100, 89]), Some(Lateness::Skewed));
    assert_eq!(freshness.judge(&[101, 101]), Some(Lateness::Stale));
    assert_eq!(freshness.judge(&[0, u32::MAX]), Some(Lateness::Stale));
    assert!(
        Freshness::new(0, 0).is_err() && Freshness::new(100, 101).is_err() && Freshness::new(3_600_001, 0).is_err()
    );
}

proptest! {
    #[test]
    fn uneven_steps_make_the_same_lag_as_one(
        tau in 0.1_f32..1000.0, steps in prop::collection::vec(0_u32..5000, 1..50), start in -1.0_f32..1.0,
    ) {
        let mut many = Damping::new(tau).unwrap();
        many.update(kg(start), 0);
        steps.iter().for_each(|&ms| { many.update(kg(1.0), ms); });
        let mut one = Damping::new(tau).unwrap();
        one.update(kg(start), 0);
        one.update(kg(1.0), steps.iter().sum());
        let [many, one] = [many, one].map(|d| d.value().unwrap().as_kilograms_per_second());
        prop_assert!((many - one).abs() < 1e-6, "{many} against {one}");
    }

    #[test]
    fn no_input_takes_damping_out_of_the_numbers(values in prop::collection::vec((any::<u32>(), any::<u32>()), 1..40)) {
        let mut damping = Damping::new(1.0).unwrap();
        for (bits, ms) in values {
            let value = damping.update(kg(f32::from_bits(bits)), ms);
            prop_assert!(value.is_none_or(|v| v.as_kilograms_per_second().is_finite()));
        }
    }

    #[test]
    fn the_median_is_the_sorted_middle(values in prop::collection::vec(-5_i8..5, 1..40)) {
        let mut window = Window::<MassFlow, 15>::new();
        for &value in &values {
            window.push(kg(f32::from(value)));
        }
        let mut last: Vec<_> = values.iter().rev().take(15).copied().collect();
        last.sort_unstable();
        prop_assert_eq!(window.median(), Some(kg(f32::from(last[(last.len() - 1) / 2]))));
        let mean = last.iter().map(|&v| f32::from(v)).sum::<f32>() / last.len() as f32;
        prop_assert!((window.mean().unwrap().as_kilograms_per_second() - mean).abs() < 1e-6);
    }

    #[test]
    fn a_zero_is_the_mean_and_its_uncertainty_that_of_the_mean(values in prop::collection::vec(-0.9_f32..0.9, 2..200)) {
        let n = values.len();
        let mean = values.iter().map(|&v| f64::from(v)).sum::<f64>() / n as f64;
        let squares: f64 = values.iter().map(|&v| (f64::from(v) - mean).powi(2)).sum();
        let u = (squares / (n as f64 - 1.0) / n as f64).sqrt();
        let generous = ZeroLimits::new(n as u16, pa(1.0), pa(2.0), pa(0.0)).unwrap();
        let zero = capture(generous, &values).unwrap().unwrap();
        prop_assert!((f64::from(zero.offset.as_pascals()) - mean).abs() < 1e-6);
        prop_assert!((f64::from(zero.uncertainty.as_pascals()) - u).abs() < 1e-5 * u + 1e-7);
    }
}
