//! Health: every cause injected, alone and with others, under every mapping; no fault yields a good flow.

use evenbore::conditioning::freshness::Lateness;
use evenbore::conditions::Sample;
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::health::detectors::{Frozen, Noisy, Stuck, calibration_due};
use evenbore::health::{Category, Causes, Mapping, assess};
use evenbore::quantity::{AbsolutePressure, Length, MassFlow, PressureDrop, Temperature, VolumeFlow};
use evenbore::sensor::Fault;
use evenbore::{Element, Meter, Reading, Refusal, Status};
use proptest::prelude::*;

const CATEGORIES: [Category; 4] =
    [Category::MaintenanceRequired, Category::OutOfSpecification, Category::FunctionCheck, Category::Failure];

const FAULTS: [(Fault, Causes); 8] = [
    (Fault::Open, Causes::OPEN),
    (Fault::Short, Causes::SHORT),
    (Fault::SaturatedLow, Causes::SATURATION),
    (Fault::SaturatedHigh, Causes::SATURATION),
    (Fault::Stale, Causes::STALE),
    (Fault::Reported, Causes::REPORTED),
    (Fault::Invalid, Causes::INVALID),
    (Fault::Silent, Causes::SILENT),
];

/// A flow without any flag.
fn flow() -> Sample {
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0)).unwrap();
    let meter = Meter::nominal(element, NITROGEN.fluid()).unwrap().with_standing(Status::empty());
    let reading = Reading::new(
        PressureDrop::from_pascals(500.0),
        Temperature::from_celsius(20.0),
        AbsolutePressure::from_kilopascals(100.0),
    );
    *meter.flow(&reading).unwrap()
}

#[test]
fn without_a_cause_a_flow_is_good() {
    let sample = flow();
    assert_eq!(sample.status, Status::empty());
    let assessed = assess(Ok(sample), Causes::empty(), &Mapping::default());
    assert_eq!((assessed.category(), assessed.causes()), (Category::Good, Causes::empty()));
    assert_eq!((assessed.good(), assessed.shown()), (Some(&sample), Some(&sample)));
}

#[test]
fn each_cause_has_its_category_and_none_is_good() {
    let failure = "OPEN SHORT SATURATION SILENT REPORTED INVALID STALE FROZEN TABLE_EXCEEDED RECORD_MISSING";
    let want = |name: &str| match name {
        "SIMULATION" => Category::FunctionCheck,
        "ZERO_DRIFTED" | "CALIBRATION_DUE" => Category::MaintenanceRequired,
        name if failure.split(' ').any(|other| other == name) => Category::Failure,
        _ => Category::OutOfSpecification,
    };
    for (name, cause) in Causes::all().iter_names() {
        let assessed = assess(Ok(flow()), cause, &Mapping::default());
        assert_eq!(assessed.category(), want(name), "{name}");
        assert_eq!(assessed.causes(), cause);
        assert_eq!(assessed.good(), None, "{name} yields a good flow");
        assert_eq!(assessed.shown().is_none(), assessed.category() == Category::Failure, "{name}");
    }
    assert_eq!(Causes::all().iter_names().count(), 20);
}

#[test]
fn each_fault_of_a_sensor_and_each_refusal_leaves_no_flow() {
    for (fault, cause) in FAULTS {
        let measured: Result<Sample, Causes> = Err(fault.into());
        let assessed = assess(measured, Causes::NOISY, &Mapping::default());
        assert_eq!((assessed.category(), assessed.causes()), (Category::Failure, cause | Causes::NOISY), "{fault}");
        assert!(assessed.shown().is_none() && assessed.good().is_none());
    }
    for (name, refusal) in Refusal::all().iter_names() {
        let cause = if name.ends_with("TABLE") { Causes::TABLE_EXCEEDED } else { Causes::INVALID };
        assert_eq!(Causes::from(refusal), cause, "{name}");
        let assessed = assess(Err(refusal.into()), Causes::empty(), &Mapping::default());
        assert_eq!((assessed.category(), assessed.shown()), (Category::Failure, None), "{name}");
    }
    let two = Refusal::TEMPERATURE_OUTSIDE_TABLE | Refusal::NOT_FINITE;
    assert_eq!(Causes::from(two), Causes::TABLE_EXCEEDED | Causes::INVALID);
    assert_eq!(Causes::from(Refusal::empty()), Causes::INVALID);
    let nothing = assess(Err(Causes::empty()), Causes::empty(), &Mapping::default());
    assert_eq!((nothing.category(), nothing.causes()), (Category::Failure, Causes::INVALID));
}

#[test]
fn each_flag_of_a_flow_and_each_lateness_is_a_cause() {
    let rows = [
        (Status::UNCALIBRATED, Causes::UNCALIBRATED),
        (Status::REFUSED_RUN, Causes::REFUSED_RUN),
        (Status::NOT_LAMINAR, Causes::NOT_LAMINAR),
        (Status::BEYOND_CALIBRATION, Causes::OUT_OF_RANGE),
        (Status::STRONG_EXPANSION, Causes::OUT_OF_RANGE),
        (Status::STRONG_SLIP, Causes::OUT_OF_RANGE),
    ];
    assert_eq!(rows.iter().fold(Status::empty(), |all, (status, _)| all | *status), Status::all());
    for (status, cause) in rows {
        let assessed = assess(Ok(Sample { status, ..flow() }), Causes::empty(), &Mapping::default());
        assert_eq!((assessed.causes(), assessed.good()), (cause, None));
        assert_eq!(assessed.category(), Category::OutOfSpecification);
    }
    assert_eq!(Causes::from(Lateness::Stale), Causes::STALE);
    assert_eq!(Causes::from(Lateness::Skewed), Causes::SKEWED);
}

#[test]
fn a_sample_that_is_no_number_is_not_shown_whoever_made_it() {
    let (volume, mass) = (VolumeFlow::from_litres_per_second(f32::NAN), MassFlow::from_grams_per_second(f32::INFINITY));
    for sample in [Sample { volume, ..flow() }, Sample { mass, ..flow() }, Sample { standard: Some(volume), ..flow() }]
    {
        let assessed = assess(Ok(sample), Causes::empty(), &Mapping::default());
        assert_eq!((assessed.category(), assessed.causes()), (Category::Failure, Causes::INVALID));
        assert!(assessed.shown().is_none());
    }
    assert!(assess(Ok(Sample { standard: None, ..flow() }), Causes::empty(), &Mapping::default()).good().is_some());
}

#[test]
fn a_mapping_moves_causes_but_silences_none() {
    for (name, cause) in Causes::all().iter_names() {
        assert!(Mapping::default().with(cause, Category::Good).is_err(), "{name}");
        for category in CATEGORIES {
            let moved = Mapping::default().with(cause, category);
            let fixed = Causes::NO_NUMBER.contains(cause) && category != Category::Failure;
            assert_eq!(moved.is_err(), fixed, "{name} to {category}");
            if let Ok(mapping) = moved {
                assert_eq!(mapping.category(cause), category, "{name} to {category}");
                let others = Causes::all() - cause;
                assert!(others.iter().all(|other| mapping.category(other) == Mapping::default().category(other)));
            }
        }
    }
    let severities = [Causes::CALIBRATION_DUE, Causes::NOISY, Causes::SIMULATION, Causes::OPEN];
    let mut all = Causes::empty();
    for (cause, category) in severities.into_iter().zip(CATEGORIES) {
        all |= cause;
        assert_eq!(Mapping::default().category(all), category, "the most severe wins");
    }
}

#[test]
fn detectors_say_when_and_not_before() {
    let pa = PressureDrop::from_pascals;
    let mut stuck = Stuck::new(pa(0.1), 100).unwrap();
    for i in 0..101 {
        let wobble = if i % 2 == 0 { 0.05 } else { -0.05 };
        assert_eq!(stuck.update(pa(50.0 + wobble)), if i < 100 { Causes::empty() } else { Causes::STUCK }, "{i}");
    }
    assert_eq!(stuck.update(pa(f32::NAN)), Causes::STUCK);
    assert_eq!(stuck.update(pa(50.2)), Causes::empty());
    let mut drifting = Stuck::new(pa(0.1), 100).unwrap();
    assert!((0..1000).all(|i| drifting.update(pa(i as f32 * 0.01)).is_empty()), "a slow drift is not stuck");
    let mut frozen = Frozen::new(3).unwrap();
    let said: Vec<_> = [0, 0, 0, 1, 1, 1, 1].map(|word| frozen.update(word) == Causes::FROZEN).into();
    assert_eq!(said, [false, false, false, false, false, false, true]);
    let mut noisy = Noisy::<PressureDrop, 3>::new(pa(1.0)).unwrap();
    let said = [0.0, 1e6, 2e6, 1e6, 1e6, f32::NAN, 1e6].map(|value| noisy.update(pa(value)) == Causes::NOISY);
    assert_eq!(said, [false, false, true, true, true, true, false]);
    let mut wild = Noisy::<PressureDrop, 2>::new(pa(1.0)).unwrap();
    wild.update(pa(f32::MAX));
    assert_eq!(wild.update(pa(f32::MIN)), Causes::NOISY, "a scatter beyond the number range is noise");
    assert!(Stuck::new(pa(-1.0), 5).is_err() && Stuck::new(pa(1.0), 0).is_err());
    assert!(Frozen::new(0).is_err() && Noisy::<PressureDrop, 2>::new(pa(f32::NAN)).is_err());
    assert_eq!(calibration_due(20_261_201, 20_261_202), Causes::empty());
    assert_eq!(calibration_due(20_261_202, 20_261_202), Causes::CALIBRATION_DUE);
}

#[test]
fn causes_and_categories_have_readable_names() {
    assert_eq!((Causes::NOT_LAMINAR | Causes::OPEN).to_string(), "open+not-laminar");
    assert_eq!(Causes::empty().to_string(), "none");
    assert_eq!(Category::OutOfSpecification.to_string(), "out-of-specification");
    assert_eq!(Fault::SaturatedHigh.to_string(), "saturated-high");
}

proptest! {
    #[test]
    fn no_set_of_causes_under_any_mapping_yields_a_good_flow(
        causes in 1_u32..1 << 20, moves in prop::collection::vec((0_u32..20, 0_usize..4), 0..30), broken: bool,
    ) {
        let mut mapping = Mapping::default();
        for (bit, category) in moves {
            mapping = mapping.with(Causes::from_bits_retain(1 << bit), CATEGORIES[category]).unwrap_or(mapping);
        }
        let causes = Causes::from_bits_retain(causes);
        let outcome = if broken { Err(causes) } else { Ok(flow()) };
        let assessed = assess(outcome, causes, &mapping);
        prop_assert!(assessed.good().is_none() && assessed.category() != Category::Good);
        prop_assert_eq!(assessed.shown().is_none(), assessed.category() == Category::Failure);
        prop_assert!(!causes.intersects(Causes::NO_NUMBER) || assessed.category() == Category::Failure);
        let worst = causes.iter().map(|cause| mapping.category(cause)).max();
        prop_assert!(broken || worst == Some(assessed.category()));
    }
}
