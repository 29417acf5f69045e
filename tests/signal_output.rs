//! Outputs: levels of the loop, every pulse accounted for, alarms step by step, simulations that end.

use evenbore::health::Causes;
use evenbore::output::alarm::Side;
use evenbore::output::current_loop::{DutyStage, FAILURE, FailureLevel, MEASUREMENT};
use evenbore::output::{Alarm, CurrentLoop, PulseOutput, Simulation};
use evenbore::quantity::{Current, VolumeFlow};
use proptest::prelude::*;

fn litres(value: f32) -> VolumeFlow {
    VolumeFlow::from_litres_per_minute(value)
}

fn m3(value: f32) -> VolumeFlow {
    VolumeFlow::from_cubic_metres_per_second(value)
}

#[test]
fn the_loop_shows_values_limits_and_failures_at_their_levels() {
    for (failure, failed) in [(FailureLevel::Low, 3.6), (FailureLevel::High, 21.0)] {
        let up = CurrentLoop::new(litres(-10.0), litres(10.0), failure).unwrap();
        let down = CurrentLoop::new(litres(10.0), litres(-10.0), failure).unwrap();
        let rows = [
            (-10.0, 4.0),
            (0.0, 12.0),
            (10.0, 20.0),
            (-10.2, 3.84),
            (-10.25, 3.8),
            (-99.0, 3.8),
            (10.6, 20.48),
            (10.7, 20.5),
            (f32::INFINITY, 20.5),
            (f32::NEG_INFINITY, 3.8),
            (f32::NAN, failed),
        ];
        for (value, want) in rows {
            let got = up.current(Some(litres(value))).as_milliamperes();
            assert!((got - want).abs() < 2e-5, "{value}: {got} mA, not {want}");
            let mirrored = down.current(Some(litres(-value))).as_milliamperes();
            assert!((mirrored - want).abs() < 2e-5, "{value} mirrored: {mirrored} mA, not {want}");
        }
        assert!((up.current(None).as_milliamperes() - failed).abs() < 2e-5);
    }
    assert!(CurrentLoop::new(litres(1.0), litres(1.0), FailureLevel::Low).is_err());
    assert!(CurrentLoop::new(m3(f32::NAN), m3(1.0), FailureLevel::Low).is_err());
}

#[test]
fn the_duty_is_rounded_and_bounded() {
    let stage = DutyStage::new(Current::from_milliamperes(24.0)).unwrap();
    let duty = |milliamperes, most| stage.duty(Current::from_milliamperes(milliamperes), most);
    assert_eq!((duty(12.0, u16::MAX), duty(4.0, 6000), duty(20.0, 6000)), (32_768, 1000, 5000));
    assert_eq!((duty(4.001, 6000), duty(4.003, 6000)), (1000, 1001));
    assert_eq!((duty(-1.0, 6000), duty(99.0, 6000), duty(f32::NAN, 6000), duty(12.0, 0)), (0, 6000, 0, 0));
    assert!(DutyStage::new(Current::from_milliamperes(20.9)).is_err());
    assert!(DutyStage::new(Current::from_milliamperes(f32::NAN)).is_err());
}

#[test]
fn pulses_keep_their_length_and_their_rate() {
    let mut output = PulseOutput::new(10, 3, 2).unwrap();
    assert_eq!(output.most_per_second(), 200.0);
    output.add(35);
    assert_eq!(output.backlog(), 3);
    let levels: Vec<u8> = (0..20).map(|_| u8::from(output.step(1))).collect();
    assert_eq!(levels, [1, 1, 1, 0, 0, 1, 1, 1, 0, 0, 1, 1, 1, 0, 0, 0, 0, 0, 0, 0]);
    assert_eq!((output.backlog(), output.waiting()), (0, 5));
    output.add(4);
    assert!(!output.step(1000));
    output.add(1);
    assert!(output.step(0));
    for (per_pulse, on, off) in [(0, 1, 1), (1, 0, 1), (1, 1, 0), (1, 60_001, 1)] {
        assert!(PulseOutput::new(per_pulse, on, off).is_err());
    }
    let mut full = PulseOutput::new(1, 1, 1).unwrap();
    full.add(u64::MAX);
    full.add(u64::MAX);
    assert_eq!(full.waiting(), u64::MAX);
}

#[test]
fn alarms_wait_hold_and_clear() {
    let above = || Alarm::new(Side::Above, m3(10.0), m3(1.0), 300).unwrap();
    let mut alarm = above();
    let rows = [(10.5, false), (10.0, false), (10.5, false), (10.5, false), (10.5, true), (9.5, true), (9.0, false)];
    for (i, (value, raised)) in rows.into_iter().enumerate() {
        assert_eq!(alarm.update(Some(m3(value)), 100), raised, "step {i}");
        assert_eq!(alarm.raised(), raised);
    }
    let mut low = Alarm::new(Side::Below, m3(2.0), m3(0.5), 0).unwrap();
    for (value, raised) in [(2.0, false), (1.9, true), (2.4, true), (2.5, false), (f32::NEG_INFINITY, true)] {
        assert_eq!(low.update(Some(m3(value)), 0), raised, "{value}");
    }
    for unknown in [None, Some(m3(f32::NAN))] {
        let mut alarm = above();
        assert!(alarm.update(unknown, 0), "what is not known is not safe");
        assert!(alarm.update(Some(m3(9.5)), 0));
        assert!(!alarm.update(Some(m3(5.0)), 0));
    }
    assert!(Alarm::new(Side::Above, m3(1.0), m3(-1.0), 0).is_err());
    assert!(Alarm::new(Side::Above, m3(f32::NAN), m3(1.0), 0).is_err());
    assert!(Alarm::new(Side::Above, m3(1.0), m3(1.0), 86_400_100).is_err());
}

#[test]
fn a_simulation_raises_function_check_and_ends() {
    let mut simulation = Simulation::default();
    assert_eq!((simulation.over(1), simulation.causes()), (1, Causes::empty()));
    simulation.start(9, 1000).unwrap();
    simulation.pass(999);
    assert_eq!((simulation.over(1), simulation.causes()), (9, Causes::SIMULATION));
    simulation.pass(1);
    assert_eq!((simulation.over(1), simulation.causes()), (1, Causes::empty()));
    simulation.start(9, 1000).unwrap();
    simulation.stop();
    assert_eq!(simulation.over(1), 1);
    assert!(simulation.start(9, 0).is_err() && simulation.start(9, 3_600_001).is_err());
}

proptest! {
    #[test]
    fn no_pulse_is_lost_or_invented(
        per_pulse in 1_u64..50, on in 1_u16..5, off in 1_u16..5,
        steps in prop::collection::vec((0_u64..60, 0_u32..12), 1..200),
    ) {
        let mut output = PulseOutput::new(per_pulse, on, off).unwrap();
        let (mut level, mut pulses, mut sum, mut since) = (false, 0_u64, 0_u64, 1000_u64);
        let drain = std::iter::repeat_n((0, 1), 20_000);
        for (amount, ms) in steps.into_iter().chain(drain) {
            output.add(amount);
            sum += amount;
            since += u64::from(ms);
            let next = output.step(ms);
            if next != level {
                let least = if level { on } else { off };
                prop_assert!(since >= u64::from(least), "a level of {since} ms");
                (since, level) = (0, next);
                pulses += u64::from(next);
            }
            prop_assert_eq!(pulses * per_pulse + output.waiting(), sum);
        }
        prop_assert!(output.backlog() > 0 || pulses == sum / per_pulse);
    }

    #[test]
    fn the_loop_is_a_measurement_or_a_failure(low: u32, high: u32, value: u32) {
        let [low, high, value] = [low, high, value].map(|bits| m3(f32::from_bits(bits)));
        if let Ok(current_loop) = CurrentLoop::new(low, high, FailureLevel::High) {
            let [least, most] = MEASUREMENT;
            let current = current_loop.current(Some(value)).as_amperes();
            prop_assert!((least..=most).contains(&current) || FAILURE.contains(&current), "{current}");
        }
    }
}

#[cfg(feature = "hal")]
mod on_pins {
    use super::*;
    use embedded_hal_mock::eh1::MockError;
    use embedded_hal_mock::eh1::digital::{Mock as Pin, State, Transaction as PinTransaction};
    use embedded_hal_mock::eh1::pwm::{Mock as Pwm, Transaction as PwmTransaction};
    use std::io::ErrorKind;

    #[test]
    fn the_loop_sets_a_duty_cycle_and_hands_its_error_back() {
        let stage = DutyStage::new(Current::from_milliamperes(25.0)).unwrap();
        let mut pwm = Pwm::new(&[
            PwmTransaction::max_duty_cycle(1000),
            PwmTransaction::set_duty_cycle(480),
            PwmTransaction::max_duty_cycle(1000),
            PwmTransaction::set_duty_cycle(144).with_error(MockError::Io(ErrorKind::Other)),
        ]);
        stage.drive(Current::from_milliamperes(12.0), &mut pwm).unwrap();
        assert!(stage.drive(Current::from_milliamperes(3.6), &mut pwm).is_err());
        pwm.done();
    }

    #[test]
    fn a_pulse_that_the_pin_refused_comes_later() {
        let mut output = PulseOutput::new(1, 5, 5).unwrap();
        output.add(1);
        let mut pin = Pin::new(&[
            PinTransaction::set(State::High).with_error(MockError::Io(ErrorKind::Other)),
            PinTransaction::set(State::High),
            PinTransaction::set(State::High),
            PinTransaction::set(State::Low).with_error(MockError::Io(ErrorKind::Other)),
            PinTransaction::set(State::Low),
        ]);
        assert!(output.drive(0, &mut pin).is_err());
        assert_eq!(output.backlog(), 1);
        output.drive(1, &mut pin).unwrap();
        assert_eq!(output.backlog(), 0);
        output.drive(4, &mut pin).unwrap();
        assert!(output.drive(1, &mut pin).is_err());
        output.drive(0, &mut pin).unwrap();
        pin.done();
    }

    #[test]
    fn an_alarm_lets_its_pin_fall() {
        let mut alarm = Alarm::new(Side::Above, m3(1.0), m3(0.1), 0).unwrap();
        let mut pin = Pin::new(&[
            PinTransaction::set(State::High),
            PinTransaction::set(State::Low),
            PinTransaction::set(State::Low).with_error(MockError::Io(ErrorKind::Other)),
        ]);
        alarm.drive(&mut pin).unwrap();
        alarm.update(None, 0);
        alarm.drive(&mut pin).unwrap();
        assert!(alarm.drive(&mut pin).is_err());
        pin.done();
    }
}
