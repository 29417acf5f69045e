//! The record's bytes: they come back as they were, damage is found, and old bytes stay readable.

mod common;

use common::fluids;
use evenbore::calibration::{Cause, CommonPart, Quality};
use evenbore::error::Error;
use evenbore::fluid::catalogue::{AIR, NITROGEN};
use evenbore::quantity::{AbsolutePressure, Length, Temperature};
use evenbore::reading::{SensorUncertainty, Trims};
use evenbore::record::RECORD_LENGTH;
use evenbore::reference::ReferenceConditions;
use evenbore::{Element, Record, Status};
use proptest::prelude::*;

fn shapes() -> [Element; 4] {
    let mm = Length::from_millimetres;
    [
        Element::round_tubes(120, mm(0.44), mm(120.0)).unwrap(),
        Element::parallel_plates(mm(0.2), mm(400.0), mm(60.0)).unwrap(),
        Element::other(4.2e9, 1.7e6).unwrap(),
        Element::duct(14.227, mm(0.5), 1.25e-4, mm(80.0)).unwrap(),
    ]
}

/// A record whose every field differs from its neighbour's, as the committed bytes hold it.
fn full_record() -> Record {
    let element = shapes()[0].with_expansion(16e-6, Temperature::from_celsius(21.0)).unwrap();
    let element = element.with_coefficients(1.0625e12, 3.25e9).unwrap();
    let mut quality = Quality::nominal(element.a(), element.b());
    quality.u_a = 0.0005;
    quality.u_b_m = 0.000_25;
    quality.correlation = -0.75;
    quality.degrees_of_freedom = 10.0;
    quality.x_min_m = 0.5;
    quality.x_max_m = 16.0;
    quality.temperature_k = Temperature::from_kelvin(294.5);
    quality.common.clear();
    let causes = [Cause::ReferenceFlow, Cause::Viscosity, Cause::PressureDrop, Cause::PressureDropZero];
    for (i, cause) in causes.into_iter().enumerate() {
        let part = CommonPart { cause, effect_a: 0.001 * (i as f32 + 1.0), effect_b_m: -0.5 * i as f32 };
        quality.common.push(part).unwrap();
    }
    let mut record = Record::new("EB-0042", 20_261_201, element, *AIR.fluid(), quality).unwrap();
    record.events = 7;
    record.reason = "two points beyond laminar flow".try_into().unwrap();
    record.trims = Trims {
        pressure_drop_zero_pa: 0.5,
        pressure_drop_gain: 1.0625,
        temperature_offset_k: -0.25,
        line_pressure_offset_pa: 12.0,
    };
    record.sensors = SensorUncertainty {
        pressure_drop_pa: 0.125,
        pressure_drop_rel: 0.0025,
        temperature_k: 0.0625,
        line_pressure_pa: 32.0,
        line_pressure_rel: 0.0005,
        relative_humidity: 0.015,
    };
    record.reference = ReferenceConditions::ISO_1217;
    record
}

fn encoded(record: &Record) -> [u8; RECORD_LENGTH] {
    let mut bytes = [0xa5; RECORD_LENGTH];
    record.encode(&mut bytes);
    bytes
}

/// The bytes with a checksum that fits them.
fn sealed(mut bytes: [u8; RECORD_LENGTH]) -> [u8; RECORD_LENGTH] {
    let body = RECORD_LENGTH - 4;
    let sum = crc32(&bytes[..body]);
    bytes[body..].copy_from_slice(&sum.to_le_bytes());
    bytes
}

/// CRC-32 of ISO 3309 bit by bit, apart from the library's.
fn crc32(bytes: &[u8]) -> u32 {
    !bytes.iter().fold(u32::MAX, |sum, &byte| {
        (0..8).fold(sum ^ u32::from(byte), |s, _| if s & 1 == 1 { (s >> 1) ^ 0xedb8_8320 } else { s >> 1 })
    })
}

#[test]
fn every_fluid_and_shape_comes_back() {
    for element in shapes() {
        for fluid in fluids() {
            let quality = Quality::nominal(element.a(), element.b());
            let record = Record::new("S1", 20_260_131, element, fluid, quality).unwrap();
            let bytes = encoded(&record);
            let back = Record::decode(&bytes).unwrap();
            assert_eq!(back, record, "{}", fluid.name());
            assert_eq!(encoded(&back), bytes, "{}", fluid.name());
            assert_eq!(record.checksum().to_le_bytes(), bytes[RECORD_LENGTH - 4..]);
        }
    }
    let record = full_record();
    assert_eq!(Record::decode(&encoded(&record)), Ok(record));
}

#[test]
fn every_single_changed_bit_is_found() {
    let bytes = encoded(&full_record());
    let mut found = 0;
    for bit in 0..8 * RECORD_LENGTH {
        let mut damaged = bytes;
        damaged[bit / 8] ^= 1 << (bit % 8);
        assert!(Record::decode(&damaged).is_err(), "bit {bit} was not found");
        found += 1;
    }
    assert_eq!(found, 8352);
}

#[test]
fn every_other_length_is_refused() {
    let bytes = encoded(&full_record());
    for length in 0..RECORD_LENGTH {
        let error = Record::decode(&bytes[..length]).unwrap_err();
        assert_eq!(error, Error::WrongLength { found: length, expected: RECORD_LENGTH });
    }
    let longer = [&bytes[..], &[0]].concat();
    assert_eq!(Record::decode(&longer), Err(Error::WrongLength { found: 1045, expected: RECORD_LENGTH }));
}

#[test]
fn other_marks_versions_and_stated_lengths_are_named() {
    let bytes = encoded(&full_record());
    let with = |at: usize, value: u8| {
        let mut changed = bytes;
        changed[at] = value;
        Record::decode(&sealed(changed)).unwrap_err()
    };
    assert_eq!(with(0, b'X').to_string(), "not a calibration record");
    assert_eq!(with(4, 0).to_string(), "record version 0; this code reads versions 1 to 1");
    assert_eq!(with(4, 2).to_string(), "record version 2; this code reads versions 1 to 1");
    assert!(matches!(with(6, 0), Error::WrongLength { expected: RECORD_LENGTH, .. }));
    let mut damaged = bytes;
    damaged[100] ^= 1;
    assert!(matches!(Record::decode(&damaged), Err(Error::WrongChecksum { computed, stored }) if computed != stored));
    assert_eq!(sealed(bytes), bytes, "the checksum is the CRC-32 of ISO 3309");
}

#[test]
fn unknown_codes_are_named_even_when_the_checksum_fits() {
    let bytes = encoded(&full_record());
    let with = |at: usize, value: u8| {
        let mut changed = bytes;
        changed[at] = value;
        Record::decode(&sealed(changed)).unwrap_err()
    };
    for (at, field) in [(32, "arithmetic"), (33, "shape"), (34, "phase")] {
        assert_eq!(with(at, 9), Error::UnknownCode { field, code: 9 });
    }
    assert_eq!(with(8, 0), Error::BadText { field: "serial", most: 16 });
    assert_eq!(with(8, 7), Error::BadText { field: "serial", most: 16 });
}

#[test]
fn bytes_of_version_1_stay_readable() {
    let text = include_str!("published/record_v1.hex");
    let digits: Vec<u8> = text.lines().filter(|line| !line.starts_with('#')).collect::<String>().into_bytes();
    let bytes: Vec<u8> =
        digits.chunks(2).map(|pair| u8::from_str_radix(std::str::from_utf8(pair).unwrap(), 16).unwrap()).collect();
    let record = Record::decode(&bytes).unwrap();
    // The fluid is compared through its name and range alone: a later catalogue may hold better numbers.
    // So are the law's constants: the record keeps those it was written with.
    let made = full_record();
    let sizes = |e: &evenbore::Element| (e.shape(), e.a(), e.b(), e.open_area(), e.hydraulic_diameter(), e.length());
    assert_eq!(sizes(&record.element), sizes(&made.element));
    assert_ne!(record.element, made.element, "the golden record has the entrance constants of its time");
    let expected = Record { fluid: record.fluid, element: record.element, ..made };
    assert_eq!(record, expected);
    assert_eq!(record.fluid.name(), "air");
    assert_eq!(record.fluid.pressure_range()[1], AbsolutePressure::from_pascals(1e6));
    let (t, p) = (Temperature::from_celsius(20.0), AbsolutePressure::from_kilopascals(101.325));
    let viscosity = record.fluid.viscosity(t, p).unwrap().as_micropascal_seconds();
    assert!((viscosity - 18.21).abs() < 0.02, "{viscosity}");
    assert_eq!(record.checksum(), u32::from_le_bytes(bytes[RECORD_LENGTH - 4..].try_into().unwrap()));
}

#[test]
fn a_refused_run_is_flagged_on_every_flow() {
    let record = full_record();
    let meter = record.meter().unwrap();
    let conditions =
        meter.conditions(Temperature::from_celsius(20.0), AbsolutePressure::from_kilopascals(101.325), None).unwrap();
    let sample = conditions.sample(evenbore::quantity::PressureDrop::from_pascals(100.0)).unwrap();
    assert!(sample.status.contains(Status::REFUSED_RUN));
}

#[test]
fn texts_at_their_longest_come_back() {
    let element = shapes()[0];
    let quality = Quality::nominal(element.a(), element.b());
    let longest = Record::new("0123456789abcdef", 20_260_131, element, *NITROGEN.fluid(), quality.clone());
    let mut longest = longest.unwrap();
    longest.reason = "r".repeat(64).as_str().try_into().unwrap();
    assert_eq!(Record::decode(&encoded(&longest)), Ok(longest));
    for serial in ["", "0123456789abcdefg", "caf\u{e9}", "tab\there"] {
        let refused = Record::new(serial, 20_260_131, element, *NITROGEN.fluid(), quality.clone());
        assert_eq!(refused, Err(Error::BadText { field: "serial", most: 16 }), "{serial}");
    }
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(2000) })]

    #[test]
    fn random_bytes_never_panic(bytes in proptest::collection::vec(any::<u8>(), 0..1200)) {
        prop_assert!(Record::decode(&bytes).is_err());
    }

    /// Random bytes behind a right mark, version, length and checksum reach the fields; what passes them must walk.
    #[test]
    fn sealed_random_fields_never_panic(start in 8..RECORD_LENGTH - 4, patch in proptest::collection::vec(any::<u8>(), 1..40)) {
        let mut bytes = encoded(&full_record());
        for (to, from) in bytes[start..RECORD_LENGTH - 4].iter_mut().zip(patch) {
            *to = from;
        }
        if let Ok(record) = Record::decode(&sealed(bytes)) {
            prop_assert_eq!(record.check(), Ok(()));
            let back = Record::decode(&encoded(&record));
            prop_assert_eq!(back.as_ref(), Ok(&record));
            let meter = record.meter().unwrap();
            let conditions = meter.conditions(Temperature::from_celsius(20.0), AbsolutePressure::from_bars(1.0), None);
            if let Ok(conditions) = conditions {
                let _ = conditions.sample(evenbore::quantity::PressureDrop::from_pascals(1e3));
            }
        }
    }
}
