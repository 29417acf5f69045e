//! Sensors: published Pt100 rows, thermistor and transfer function against double precision, words bit by bit.

mod common;

use common::tolerance;
use evenbore::error::Error;
use evenbore::quantity::{AbsolutePressure, PressureDrop, Resistance, Temperature};
use evenbore::sensor::levels::Levels;
use evenbore::sensor::pt100::IEC_60751;
use evenbore::sensor::ratiometric::RawRatio;
use evenbore::sensor::resistance::ResistanceInput;
use evenbore::sensor::transducer::{ByteOrder, StatusBits, WordFormat};
use evenbore::sensor::{Fault, Pt100, Ratiometric, Thermistor, Transducer};
use proptest::prelude::*;

/// t (C), R (ohm), dR/dt (ohm/K), printed R where seen.
fn pt100_rows() -> Vec<(f64, f64, f64, Option<f64>)> {
    let text = include_str!("published/pt100_iec60751.csv");
    let number = |text: &str| text.trim().parse::<f64>().ok();
    let rows = text.lines().filter(|line| !line.starts_with(['#', 't']));
    rows.map(|line| {
        let cells: Vec<_> = line.split(',').map(number).collect();
        (cells[0].unwrap(), cells[1].unwrap(), cells[2].unwrap(), cells[3])
    })
    .collect()
}

#[test]
fn pt100_gives_the_standards_resistances_and_temperatures() {
    let sensor = Pt100::default();
    let (mut ohms, mut kelvin, mut printed) = (0.0_f64, 0.0_f64, 0);
    let rows = pt100_rows();
    for &(t, r, slope, seen) in &rows {
        let got = f64::from(sensor.resistance(Temperature::from_celsius(t as f32)).as_ohms());
        // The temperature's own last digit at 273.15 K above it is not the equation's error.
        let offered = f64::from(Temperature::from_celsius(t as f32).as_kelvin()) - 273.15 - t;
        ohms = ohms.max((got - r - offered * slope).abs());
        let back = sensor.temperature(Resistance::from_ohms(r as f32)).unwrap();
        kelvin = kelvin.max((f64::from(back.as_kelvin()) - 273.15 - t).abs());
        if let Some(seen) = seen {
            printed += 1;
            assert!((got - seen).abs() < 1.2e-4, "{t} C: {got} against printed {seen}");
        }
    }
    println!("Pt100: {} rows, {printed} printed; worst {ohms:.2e} ohm, {kelvin:.2e} K", rows.len());
    assert!(rows.len() == 1051 && printed > 0);
    assert!(ohms < tolerance::PT100_OHMS && kelvin < tolerance::PT100_KELVIN, "{ohms:e} ohm, {kelvin:e} K");
}

#[test]
fn pt100_names_broken_wires_and_refuses_other_metals() {
    let sensor = Pt100::default();
    let read = |ohms| sensor.temperature(Resistance::from_ohms(ohms));
    assert_eq!(read(18.51), Err(Fault::Short));
    assert_eq!(read(0.0), Err(Fault::Short));
    assert!(read(18.5201).is_ok() && read(390.4811).is_ok());
    assert_eq!(read(390.5), Err(Fault::Open));
    assert_eq!(read(f32::MAX), Err(Fault::Open));
    for broken in [f32::NAN, f32::INFINITY, f32::NEG_INFINITY] {
        assert_eq!(read(broken), Err(Fault::Invalid));
    }
    let [a, b, c] = IEC_60751;
    let with = |r0, coefficients| Pt100::with_coefficients(Resistance::from_ohms(r0), coefficients);
    assert!(with(9.0, [a, b, c]).is_err() && with(100.0, [6e-3, b, c]).is_err());
    assert!(with(100.0, [a, 0.0, c]).is_err() && with(100.0, [a, b, 1e-12]).is_err());
    let thousand = Pt100::new(Resistance::from_ohms(1000.0)).unwrap();
    let boiling = thousand.temperature(Resistance::from_ohms(1385.055)).unwrap();
    assert!((boiling.as_celsius() - 100.0).abs() < 2e-4);
}

#[test]
fn thermistor_passes_through_its_points_and_agrees_with_double_precision() {
    let points = [(32_650.0, 0.0), (10_000.0, 25.0), (1_751.6, 70.0)];
    let at = |(ohms, celsius)| (Resistance::from_ohms(ohms), Temperature::from_celsius(celsius));
    let sensor = Thermistor::from_points(points.map(at)).unwrap();
    let [a, b, c] = steinhart_hart(points.map(|(r, t)| (f64::from(r), f64::from(t) + 273.15)));
    let mut worst = 0.0_f64;
    for i in 0..2000 {
        let ohms = 600.0 * 1.0025_f32.powi(i);
        let Ok(got) = sensor.temperature(Resistance::from_ohms(ohms)) else { continue };
        let l = f64::from(ohms).ln();
        worst = worst.max((f64::from(got.as_kelvin()) - 1.0 / (a + b * l + c * l * l * l)).abs());
    }
    println!("thermistor: worst {worst:.2e} K");
    assert!(worst < tolerance::THERMISTOR_KELVIN, "{worst:e} K");
    let [cold, room, warm] = points;
    let shuffled = Thermistor::from_points([warm, cold, room].map(at)).unwrap();
    let one = |t: &Thermistor| t.temperature(Resistance::from_ohms(4000.0)).unwrap().as_kelvin();
    assert!((one(&sensor) - one(&shuffled)).abs() < 1e-4);
    assert!(Thermistor::from_points([cold, cold, warm].map(at)).is_err(), "two equal points");
    let ptc = [(100.0, 0.0), (110.0, 25.0), (130.0, 70.0)];
    assert!(Thermistor::from_points(ptc.map(at)).is_err(), "rises with temperature");
    let reach = [585.0, 97_900.0].map(|ohms| sensor.temperature(Resistance::from_ohms(ohms)).is_ok());
    assert_eq!(reach, [true, true], "three times beyond the points");
    assert_eq!(sensor.temperature(Resistance::from_ohms(583.0)), Err(Fault::Short));
    assert_eq!(sensor.temperature(Resistance::from_ohms(98_000.0)), Err(Fault::Open));
    assert_eq!(sensor.temperature(Resistance::from_ohms(f32::NAN)), Err(Fault::Invalid));
}

/// Solves the three equations by Cramer's rule.
fn steinhart_hart(points: [(f64, f64); 3]) -> [f64; 3] {
    let rows = points.map(|(r, t)| ([1.0, r.ln(), r.ln().powi(3)], 1.0 / t));
    let det = |m: [[f64; 3]; 3]| {
        m[0][0] * (m[1][1] * m[2][2] - m[1][2] * m[2][1]) - m[0][1] * (m[1][0] * m[2][2] - m[1][2] * m[2][0])
            + m[0][2] * (m[1][0] * m[2][1] - m[1][1] * m[2][0])
    };
    let matrix = rows.map(|(row, _)| row);
    [0, 1, 2].map(|column| {
        let mut replaced = matrix;
        for (row, (_, y)) in replaced.iter_mut().zip(rows) {
            row[column] = y;
        }
        det(replaced) / det(matrix)
    })
}

fn hsc() -> (WordFormat, Transducer<PressureDrop>) {
    let status = StatusBits { mask: 0xC000, good: 0x0000, stale: Some(0x8000) };
    let format = WordFormat::new(2, 14, ByteOrder::BigEndian).unwrap().with_status(status).unwrap();
    let at = |counts, pascals| (counts, PressureDrop::from_pascals(pascals));
    (format, Transducer::new(format, at(1638, -250.0), at(14_745, 250.0)).unwrap())
}

#[test]
fn words_are_taken_apart_by_order_shift_sign_and_status() {
    let counts = |format: WordFormat, bytes: &[u8]| format.counts(format.word(bytes).unwrap()).unwrap();
    let (big, little) = (ByteOrder::BigEndian, ByteOrder::LittleEndian);
    assert_eq!(counts(WordFormat::new(3, 24, big).unwrap(), &[1, 2, 3]), 0x01_0203);
    assert_eq!(counts(WordFormat::new(3, 24, little).unwrap(), &[1, 2, 3]), 0x03_0201);
    assert_eq!(counts(WordFormat::new(4, 16, big).unwrap().with_shift(8).unwrap(), &[9, 1, 2, 3]), 0x0102);
    let signed = WordFormat::new(2, 12, little).unwrap().with_shift(4).unwrap().signed();
    assert_eq!(counts(signed, &[0xF7, 0xFF]), -1);
    assert_eq!(counts(signed, &[0x00, 0x80]), -2048);
    assert_eq!(counts(signed, &[0xF0, 0x7F]), 2047);
    assert_eq!(signed.span(), [-2048, 2047]);
    assert_eq!(WordFormat::new(3, 24, big).unwrap().signed().span(), [-8_388_608, 8_388_607]);
    assert_eq!(WordFormat::new(1, 8, big).unwrap().span(), [0, 255]);
    for short in [&[][..], &[1], &[1, 2, 3]] {
        assert_eq!(signed.word(short), None);
    }
    let (format, _) = hsc();
    let status = |first| format.counts(format.word(&[first, 0x10]).unwrap());
    assert_eq!(status(0x20), Ok(0x2010));
    assert_eq!(status(0xA0), Err(Fault::Stale));
    assert_eq!(status(0x60), Err(Fault::Reported));
    assert_eq!(status(0xE0), Err(Fault::Reported));
}

#[test]
fn word_formats_that_cannot_be_are_refused() {
    let new = |bytes, bits| WordFormat::new(bytes, bits, ByteOrder::BigEndian);
    for (bytes, bits) in [(0, 8), (5, 8), (1, 9), (2, 1), (2, 17), (4, 25), (255, 24)] {
        assert!(matches!(new(bytes, bits), Err(Error::OutOfRange { .. })), "{bytes} bytes, {bits} bits");
    }
    assert!(new(2, 14).unwrap().with_shift(2).is_ok() && new(2, 14).unwrap().with_shift(3).is_err());
    let status = |mask, good, stale| new(2, 14).unwrap().with_status(StatusBits { mask, good, stale });
    assert!(status(0xC000, 0, None).is_ok());
    assert!(status(0xE000, 0, None).is_err(), "overlaps the counts");
    assert!(status(0x1_0000, 0, None).is_err(), "beyond the word");
    assert!(status(0xC000, 0x2000, None).is_err(), "good outside the mask");
    assert!(status(0xC000, 0, Some(0x2000)).is_err(), "stale outside the mask");
    assert!(status(0xC000, 0, Some(0)).is_err(), "stale and good alike");
    let full = WordFormat::new(4, 24, ByteOrder::BigEndian).unwrap();
    assert!(full.with_status(StatusBits { mask: 0xFF00_0000, good: 0, stale: None }).is_ok());
    let pa = PressureDrop::from_pascals;
    let format = new(2, 14).unwrap();
    assert!(Transducer::new(format, (-1, pa(0.0)), (100, pa(1.0))).is_err());
    assert!(Transducer::new(format, (0, pa(0.0)), (16_384, pa(1.0))).is_err());
    assert!(Transducer::new(format, (100, pa(0.0)), (100, pa(1.0))).is_err());
    assert!(Transducer::new(format, (100, pa(f32::NAN)), (200, pa(1.0))).is_err());
}

#[test]
fn a_transducer_is_saturated_at_its_end_codes_and_broken_where_it_is_told_so() {
    let (format, transducer) = hsc();
    let read = |t: &Transducer<PressureDrop>, counts: u16| t.read(format.word(&counts.to_be_bytes()).unwrap());
    assert_eq!(read(&transducer, 0), Err(Fault::SaturatedLow));
    assert_eq!(read(&transducer, 0x3FFF), Err(Fault::SaturatedHigh));
    assert!(read(&transducer, 1).is_ok() && read(&transducer, 0x3FFE).is_ok());
    assert_eq!(read(&transducer, 1638).unwrap().as_pascals(), -250.0);
    assert!((read(&transducer, 14_745).unwrap().as_pascals() - 250.0).abs() < 1e-4);
    let levels = Levels::measured(1000.0, 15_000.0).unwrap();
    let levels = levels.with_failure((500.0, Fault::Short), (16_000.0, Fault::Open)).unwrap();
    let strict = transducer.with_levels(levels);
    let rows = [(500, Fault::Short), (501, Fault::SaturatedLow), (999, Fault::SaturatedLow)];
    let rows = rows.into_iter().chain([(15_001, Fault::SaturatedHigh), (15_999, Fault::SaturatedHigh)]);
    for (counts, fault) in rows.chain([(16_000, Fault::Open)]) {
        assert_eq!(read(&strict, counts), Err(fault), "{counts} counts");
    }
    assert!(read(&strict, 1000).is_ok() && read(&strict, 15_000).is_ok());
    assert!(Levels::measured(1.0, 1.0).is_err() && Levels::measured(f32::NAN, 1.0).is_err());
    let measured = Levels::measured(1.0, 2.0).unwrap();
    assert!(measured.with_failure((1.0, Fault::Open), (3.0, Fault::Short)).is_err());
    assert!(measured.with_failure((0.0, Fault::Open), (2.0, Fault::Short)).is_err());
}

#[test]
fn resistances_and_ratios_know_their_broken_wires() {
    let ratio = |signal, supply| RawRatio { signal, supply };
    let series = ResistanceInput::series(Resistance::from_ohms(400.0)).unwrap();
    assert_eq!(series.read(ratio(3000, 12_000)).unwrap().as_ohms(), 100.0);
    assert_eq!(series.read(ratio(9, 10_000)), Err(Fault::Short));
    assert_eq!(series.read(ratio(10_000, 0)), Err(Fault::Open));
    assert_eq!(series.read(ratio(10_000, 10)), Err(Fault::Open));
    let divider = ResistanceInput::divider(Resistance::from_kilohms(10.0)).unwrap();
    assert!((divider.read(ratio(1024, 4096)).unwrap().as_ohms() - 3333.3333).abs() < 1e-2);
    assert_eq!(divider.read(ratio(4096, 4096)), Err(Fault::Open));
    assert_eq!(divider.read(ratio(4200, 4096)), Err(Fault::Open));
    assert_eq!(divider.read(ratio(0, 4096)), Err(Fault::Short));
    assert_eq!(divider.read(ratio(5, 0)), Err(Fault::Invalid));
    assert!(ResistanceInput::series(Resistance::from_ohms(0.5)).is_err());
    let at = |share, kilopascals| (share, AbsolutePressure::from_kilopascals(kilopascals));
    let sensor = Ratiometric::new(at(0.1, 20.0), at(0.9, 250.0)).unwrap();
    let read = |signal| sensor.read(ratio(signal, 1000));
    assert!((read(100).unwrap().as_kilopascals() - 20.0).abs() < 1e-4);
    assert!((read(900).unwrap().as_kilopascals() - 250.0).abs() < 1e-3);
    assert_eq!(read(25), Err(Fault::Open));
    assert_eq!(read(26), Err(Fault::SaturatedLow));
    assert_eq!(read(974), Err(Fault::SaturatedHigh));
    assert_eq!(read(976), Err(Fault::Short));
    assert_eq!(sensor.read(ratio(1, -5)), Err(Fault::Invalid));
}

proptest! {
    #[test]
    fn counts_come_back_from_any_word(
        bytes in 1_u8..=4, bits in 2_u8..=24, shift in 0_u8..32, signed: bool, big: bool, seed: u32,
    ) {
        prop_assume!(bits <= bytes * 8 && shift <= bytes * 8 - bits);
        let order = if big { ByteOrder::BigEndian } else { ByteOrder::LittleEndian };
        let format = WordFormat::new(bytes, bits, order).unwrap().with_shift(shift).unwrap();
        let format = if signed { format.signed() } else { format };
        let [least, most] = format.span().map(i64::from);
        prop_assert_eq!(most - least + 1, 1_i64 << bits);
        let counts = least + i64::from(seed) % (most - least + 1);
        let word = ((counts as u32) & ((1_u32 << bits) - 1)) << shift;
        let mut sent = word.to_le_bytes()[..usize::from(bytes)].to_vec();
        if big { sent.reverse(); }
        prop_assert_eq!(format.counts(format.word(&sent).unwrap()), Ok(counts as i32));
    }

    #[test]
    fn a_transfer_function_is_the_line_through_its_ends(
        low in 0_i32..8000, width in 1_i32..8000,
        v_low in -1e6_f32..1e6, v_high in -1e6_f32..1e6, share in 0.0_f64..=1.0,
    ) {
        let format = WordFormat::new(2, 16, ByteOrder::BigEndian).unwrap();
        let pa = PressureDrop::from_pascals;
        let Ok(transducer) = Transducer::new(format, (low, pa(v_low)), (low + width, pa(v_high))) else {
            return Err(TestCaseError::fail("a plain line was refused"));
        };
        let counts = low + (f64::from(width) * share) as i32;
        prop_assume!(counts > 0);
        let got = transducer.read(format.word(&(counts as u16).to_be_bytes()).unwrap()).unwrap().as_pascals();
        let span = f64::from(v_high) - f64::from(v_low);
        let want = f64::from(v_low) + span * f64::from(counts - low) / f64::from(width);
        let scale = f64::from(v_low.abs().max(v_high.abs()));
        prop_assert!((f64::from(got) - want).abs() <= tolerance::TRANSFER * scale, "{got} against {want}");
    }

    #[test]
    fn whatever_the_signal_a_sensor_gives_a_finite_quantity_or_a_fault(bits: u32, signal: i32, supply: i32) {
        let ohms = Resistance::from_ohms(f32::from_bits(bits));
        if let Ok(t) = Pt100::default().temperature(ohms) {
            prop_assert!((-200.001..850.001).contains(&t.as_celsius()));
        }
        let raw = RawRatio { signal, supply };
        for input in [ResistanceInput::series, ResistanceInput::divider] {
            if let Ok(r) = input(Resistance::from_ohms(1e4)).unwrap().read(raw) {
                prop_assert!(r.as_ohms().is_finite() && r.as_ohms() > 0.0);
            }
        }
    }

    #[test]
    fn pt100_inverts_itself(t in -200.0_f32..850.0) {
        let there = Pt100::default().resistance(Temperature::from_celsius(t));
        let back = Pt100::default().temperature(there).unwrap();
        // Near 850 C the last digit of a temperature is 1.2e-4 K, and one of a resistance is worth 1e-4 K: a few roundings.
        let error = (back.as_celsius() - t).abs();
        prop_assert!(error < 4.5e-4, "{t}: {error}");
    }
}
