//! Totals: exact against integer arithmetic, over twenty years, over rollovers, over a restart.

use evenbore::error::Error;
use evenbore::quantity::{MassFlow, VolumeFlow};
use evenbore::total::{Counter, NotCounted, ROLLOVER, SNAPSHOT_LENGTH, Totals};
use proptest::prelude::*;

fn m3(value: f32) -> VolumeFlow {
    VolumeFlow::from_cubic_metres_per_second(value)
}

fn kg(value: f32) -> MassFlow {
    MassFlow::from_kilograms_per_second(value)
}

/// A flow of 2^-20 m3/s is exact, and so is what it makes of any time: 953.67431640625 nanolitres a millisecond.
const FINE: f32 = 1.0 / 1_048_576.0;

#[test]
fn twenty_years_at_ten_hertz_lose_less_than_a_sub_unit() {
    // The counter adds integers, so `n` steps add exactly `n` times what one adds: measured here over 100 000 steps,
    // then carried on to 6.3e9. The flow is the nearest to a tenth of a litre a second and has no finite sum in
    // nanolitres.
    let (flow, ms, steps, in_all) = (1e-4_f32, 100, 100_000_u64, 20 * 365 * 86_400 * 10_u64);
    let mut totals = Totals::default();
    for _ in 0..steps {
        totals.add_flows(m3(flow), kg(flow), Some(m3(-flow)), ms).unwrap();
    }
    // Exact: flow = m 2^e with m = 13743895, e = -37; nanolitres per step = m ms 1e9/2^37.
    let per_step = 13_743_895_u128 * u128::from(ms) * 1_000_000_000;
    assert_eq!(f64::from(flow), 13_743_895.0 / 2_f64.powi(37));
    let exact = (per_step * u128::from(steps)) >> 37;
    assert_eq!(totals.volume().net() as u128, exact);
    assert_eq!(totals.reference().net(), -(exact as i128));
    assert_eq!(totals.mass().net() as u128, (13_743_895_u128 * u128::from(ms) * 1_000_000 * u128::from(steps)) >> 37);
    // What one step truncates is below 2^-64, so twenty years truncate below 2^-64 times 6.3e9.
    assert!(in_all as f64 / 2_f64.powi(64) < 1e-9);
    // A single-precision total of the same flow stops long before.
    let stuck = (1_u32 << 24) as f32;
    assert_eq!(stuck + 1.0, stuck);
}

#[test]
fn the_smallest_flow_is_counted_in_the_end() {
    let mut totals = Totals::default();
    // 2^-40 m3/s for 1 ms is 9.1e-4 nanolitres.
    let flow = m3(2_f32.powi(-40));
    for _ in 0..1_099_511 {
        totals.add_flows(flow, kg(0.0), None, 1).unwrap();
    }
    assert_eq!(totals.volume().net(), 999);
    totals.add_flows(flow, kg(0.0), None, 1).unwrap();
    assert_eq!(totals.volume().net(), 1000, "the fraction carried over");
}

#[test]
fn directions_are_kept_apart_and_a_missing_reference_stands_still() {
    let mut totals = Totals::default();
    totals.add_flows(m3(FINE), kg(-FINE), None, 1_000_000).unwrap();
    totals.add_flows(m3(-FINE), kg(-FINE), Some(m3(FINE)), 500_000).unwrap();
    let volume = totals.volume();
    assert_eq!((volume.forward.units(), volume.reverse.units(), volume.net()), (953_674_316, 476_837_158, 476_837_158));
    assert_eq!((totals.mass().forward.units(), totals.mass().reverse.units()), (0, 1_430_511));
    assert_eq!(totals.reference().net(), 476_837_158);
    totals.add_flows(m3(-0.0), kg(0.0), None, 1000).unwrap();
    assert_eq!(totals.volume().reverse.units(), 476_837_158);
}

#[test]
fn what_cannot_be_counted_is_refused_whole_and_the_miss_is_counted() {
    let mut totals = Totals::default();
    totals.add_flows(m3(1.0), kg(1.0), Some(m3(1.0)), 100).unwrap();
    let before = totals;
    let rows = [
        (m3(f32::NAN), kg(1.0), None, 1, NotCounted::NotFinite),
        (m3(1.0), kg(f32::INFINITY), None, 1, NotCounted::NotFinite),
        (m3(1.0), kg(1.0), Some(m3(f32::NEG_INFINITY)), 1, NotCounted::NotFinite),
        (m3(1000.1), kg(1.0), None, 1, NotCounted::TooLarge),
        (m3(1.0), kg(-1000.1), None, 1, NotCounted::TooLarge),
        (m3(1.0), kg(1.0), None, 3_600_001, NotCounted::TooLong),
    ];
    for (i, (volume, mass, reference, ms, why)) in rows.into_iter().enumerate() {
        assert_eq!(totals.add_flows(volume, mass, reference, ms), Err(why));
        assert_eq!(totals.missed() as usize, i + 1);
    }
    assert_eq!((totals.volume(), totals.mass()), (before.volume(), before.mass()));
    assert_eq!(totals.reference(), before.reference());
    assert!(totals.add_flows(m3(1000.0), kg(-1000.0), None, 3_600_000).is_ok());
}

#[test]
fn a_counter_rolls_over_at_its_stated_limit_and_says_so() {
    assert_eq!(ROLLOVER, 10_u64.pow(18));
    let mut totals = Totals::default();
    let hour = |totals: &mut Totals| totals.add_flows(m3(1000.0), kg(0.0), None, 3_600_000).unwrap();
    hour(&mut totals);
    let (first, later) = (totals.volume().forward, &mut totals);
    assert_eq!((first.rollovers(), first.units()), (3, 600_000_000_000_000_000));
    hour(later);
    let second = later.volume().forward;
    assert_eq!((second.rollovers(), second.units()), (7, 200_000_000_000_000_000));
    assert_eq!(second.whole(), 7_200_000_000_000_000_000);
    assert_eq!(second.since(&first), 3_600_000_000_000_000_000);
    assert_eq!(first.since(&second), 0);
    assert_eq!(second.since(&Counter::default()), 7_200_000_000_000_000_000);
}

#[test]
fn exactly_the_limit_is_a_rollover() {
    // 2^-2 m3/s for 4e6 ms in two steps of 2e6 ms: 5e14 nanolitres each; 2000 of them are the limit.
    let mut totals = Totals::default();
    for _ in 0..1999 {
        totals.add_flows(m3(0.25), kg(0.0), None, 2_000_000).unwrap();
    }
    assert_eq!(totals.volume().forward.units(), ROLLOVER - 500_000_000_000_000);
    totals.add_flows(m3(0.25), kg(0.0), None, 2_000_000).unwrap();
    assert_eq!((totals.volume().forward.units(), totals.volume().forward.rollovers()), (0, 1));
}

#[test]
fn damaged_totals_are_refused_bit_by_bit() {
    let mut totals = Totals::default();
    totals.add_flows(m3(1e-3), kg(-2e-3), Some(m3(3e-3)), 123_457).unwrap();
    let bytes = totals.snapshot();
    assert_eq!(Totals::restore(&bytes), Ok(totals));
    for bit in 0..SNAPSHOT_LENGTH * 8 {
        let mut damaged = bytes;
        damaged[bit / 8] ^= 1 << (bit % 8);
        assert!(Totals::restore(&damaged).is_err(), "bit {bit}");
    }
    for length in 0..SNAPSHOT_LENGTH {
        assert!(Totals::restore(&bytes[..length]).is_err(), "{length} bytes");
    }
    let long: Vec<u8> = bytes.iter().copied().chain([0]).collect();
    assert!(matches!(Totals::restore(&long), Err(Error::WrongLength { found: 137, expected: 136 })));
    assert_eq!(Totals::restore(&[0xFF; SNAPSHOT_LENGTH]), Err(Error::NotTotals));
    let mut newer = bytes;
    newer[4] = 2;
    assert_eq!(Totals::restore(&newer), Err(Error::UnknownVersion { found: 2, newest: 1 }));
    let mut beyond = bytes;
    beyond[16..24].copy_from_slice(&ROLLOVER.to_le_bytes());
    let sum = crc(&beyond[..132]);
    beyond[132..].copy_from_slice(&sum.to_le_bytes());
    assert!(matches!(Totals::restore(&beyond), Err(Error::OutOfRange { field: "count", .. })));
}

/// CRC-32 bit by bit, as an independent check of the stored one.
fn crc(bytes: &[u8]) -> u32 {
    !bytes.iter().fold(u32::MAX, |sum, byte| {
        (0..8).fold(sum ^ u32::from(*byte), |s, _| (s >> 1) ^ (0xEDB8_8320 & (s & 1).wrapping_neg()))
    })
}

#[test]
fn stored_totals_of_version_1_stay_readable() {
    let mut totals = Totals::default();
    totals.add_flows(m3(FINE), kg(-1.0), Some(m3(-0.5)), 2500).unwrap();
    let mut golden = b"EVTO\x01\x00\x88\x00\x00\x00\x00\x00".to_vec();
    let counter = |units: u64, fraction: u64| [&[0; 4][..], &units.to_le_bytes(), &fraction.to_le_bytes()].concat();
    // 953.67431640625 * 2500 = 2 384 185.791015625
    golden.extend(counter(2_384_185, (0.791_015_625 * 2_f64.powi(64)) as u64));
    golden.extend([counter(0, 0), counter(0, 0), counter(2_500_000_000, 0), counter(0, 0)].concat());
    golden.extend(counter(1_250_000_000_000, 0));
    golden.extend(crc(&golden).to_le_bytes());
    assert_eq!(totals.snapshot().as_slice(), golden);
    assert_eq!(Totals::restore(&golden), Ok(totals));
}

proptest! {
    #[test]
    fn totals_are_the_exact_integer_sum(steps in prop::collection::vec((-10.0_f32..10.0, 0_u32..100_000), 1..60)) {
        let mut totals = Totals::default();
        let (mut forward, mut reverse) = (0_i128, 0_i128);
        for &(flow, ms) in &steps {
            // Multiples of 2^-24 keep the check itself exact: at most 2^28 in 2^-24 SI, times ms, times 1e9.
            let flow = (flow * 16_777_216.0).trunc() / 16_777_216.0;
            totals.add_flows(m3(flow), kg(flow), None, ms).unwrap();
            let exact = (f64::from(flow) * 16_777_216.0) as i128 * i128::from(ms) * 1_000_000_000;
            if exact < 0 { reverse -= exact } else { forward += exact }
        }
        let volume = totals.volume();
        prop_assert_eq!(volume.forward.whole(), forward >> 24);
        prop_assert_eq!(volume.reverse.whole(), reverse >> 24);
        prop_assert_eq!(totals.mass().forward.whole(), (forward / 1000) >> 24);
        prop_assert_eq!(Totals::restore(&totals.snapshot()), Ok(totals));
    }

    #[test]
    fn no_flow_and_no_time_break_a_total(volume: u32, mass: u32, reference: u32, ms: u32) {
        let mut totals = Totals::default();
        let [volume, mass, reference] = [volume, mass, reference].map(f32::from_bits);
        for _ in 0..3 {
            let counted = totals.add_flows(m3(volume), kg(mass), Some(m3(reference)), ms).is_ok();
            prop_assert!(counted || totals.volume().net() == 0);
            prop_assert!(totals.volume().forward.units() < ROLLOVER);
        }
    }

    #[test]
    fn no_bytes_break_the_reader(bytes in prop::collection::vec(any::<u8>(), 0..200)) {
        let _ = Totals::restore(&bytes);
        let mut marked = b"EVTO\x01\x00\x88\x00".to_vec();
        marked.extend(bytes);
        let _ = Totals::restore(&marked);
    }
}
