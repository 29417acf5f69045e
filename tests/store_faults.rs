//! Worn pages, alien bytes, damage, newer versions, full rings, layouts that do not fit.

#[path = "common/flash.rs"]
mod flash;

use embedded_storage::nor_flash::NorFlash;
use evenbore::calibration::Quality;
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::quantity::Length;
use evenbore::record::RECORD_LENGTH;
use evenbore::store::{Contents, Copies, Event, Layout, LayoutFault, Part, Region, Step, Store, StoreError};
use evenbore::{Element, Record};
use flash::{Dice, MockError, MockFlash, Wear};

const PAGE: usize = 2048;
const LAYOUT: Layout = Layout::consecutive(0, PAGE as u32, 3, 2, 48);
const PAGES: usize = LAYOUT.end() as usize / PAGE;
type Flash = MockFlash<4, PAGE>;
type Outcome = StoreError<MockError>;

fn record(date: u32) -> Record {
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0)).unwrap();
    let quality = Quality::nominal(element.a(), element.b());
    Record::new("EB-0042", date, element, *NITROGEN.fluid(), quality).unwrap()
}

fn open(flash: &mut Flash) -> Store<&mut Flash> {
    Store::open(flash, &LAYOUT).unwrap()
}

fn date(flash: &mut Flash) -> Option<u32> {
    open(flash).record().unwrap().map(|record| record.date)
}

const CAUSE: Event = Event::new(1, 2, 3, 4);

#[test]
fn alien_bytes_are_nothing_stored_and_can_be_written_over() {
    for seed in 0..200 {
        let mut flash = Flash::new(PAGES);
        let mut dice = Dice(seed);
        match seed {
            0 => flash.bytes.fill(0),
            1 => flash.bytes.iter_mut().enumerate().for_each(|(i, b)| *b = b"EVBREVBSEVBTEVBE"[i % 16]),
            _ => flash.bytes.iter_mut().for_each(|b| *b = dice.roll() as u8),
        }
        let mut store = open(&mut flash);
        let mut buffer = [0; 48];
        assert_eq!(store.record().unwrap(), None);
        assert_eq!(store.settings(&mut buffer).unwrap(), None);
        assert_eq!(store.totals(&mut buffer).unwrap(), None);
        assert_eq!((store.copies(Part::Record).unwrap(), store.calibrations()), (Copies::None, 0));
        store.events_since(0, |e| panic!("{e:?}")).unwrap();
        assert_eq!(store.write_record(&record(20_261_201), &CAUSE).unwrap(), Copies::Two);
        assert_eq!(store.write_settings(1, &[7; 48]).unwrap(), Copies::Two);
        store.write_totals(1, &[8; 48]).unwrap();
        assert_eq!(date(&mut flash), Some(20_261_201));
    }
}

#[test]
fn a_worn_page_is_an_error_and_the_old_record_stays() {
    for wear in [Wear::EraseFails, Wear::WriteFails, Wear::BitSticks] {
        let mut flash = Flash::new(PAGES);
        open(&mut flash).write_record(&record(20_260_101), &CAUSE).unwrap();
        // The second copy wears out: the new record is safe, once.
        flash.worn[1] = Some(wear);
        assert_eq!(open(&mut flash).write_record(&record(20_260_102), &CAUSE), Ok(Copies::One), "{wear:?}");
        assert_eq!(date(&mut flash), Some(20_260_102));
        // From now on every write fails and the record stays, at every step and after every start.
        for _ in 0..3 {
            let error = open(&mut flash).write_record(&record(20_260_103), &CAUSE).unwrap_err();
            let expected: Outcome = match wear {
                Wear::EraseFails => StoreError::Flash { part: Part::Record, step: Step::Erase, error: MockError::Worn },
                Wear::WriteFails => StoreError::Flash { part: Part::Record, step: Step::Write, error: MockError::Worn },
                Wear::BitSticks => StoreError::ReadBack { part: Part::Record },
            };
            assert_eq!(error, expected);
            assert_eq!(date(&mut flash), Some(20_260_102));
            assert_eq!(open(&mut flash).copies(Part::Record), Ok(Copies::One));
            assert!(open(&mut flash).repair().is_err());
        }
        assert_eq!(open(&mut flash).calibrations(), 5, "begun calibrations are counted");
        // The first copy wears out while both are good: error, nothing is lost.
        let mut flash = Flash::new(PAGES);
        open(&mut flash).write_record(&record(20_260_101), &CAUSE).unwrap();
        flash.worn[0] = Some(wear);
        assert!(open(&mut flash).write_record(&record(20_260_104), &CAUSE).is_err());
        assert_eq!(date(&mut flash), Some(20_260_101));
    }
}

#[test]
fn a_worn_page_of_a_ring_is_left_out() {
    for wear in [Wear::EraseFails, Wear::WriteFails, Wear::BitSticks] {
        let mut flash = Flash::new(PAGES);
        let first = LAYOUT.totals.start as usize / PAGE;
        let mut store = open(&mut flash);
        for n in 0..40_u32 {
            store.write_totals(1, &n.to_le_bytes()).unwrap();
        }
        flash.worn[first + 1] = Some(wear);
        for n in 40..400_u32 {
            let mut store = open(&mut flash);
            store.write_totals(1, &n.to_le_bytes()).unwrap();
            let mut buffer = [0; 4];
            store.totals(&mut buffer).unwrap();
            assert_eq!(u32::from_le_bytes(buffer), n);
        }
        // All other pages worn: an error, the last snapshot stays.
        flash.worn[first..first + 3].fill(Some(wear));
        let mut failed = 0;
        for n in 400..500_u32 {
            let mut store = open(&mut flash);
            failed += u32::from(store.write_totals(1, &n.to_le_bytes()).is_err());
            let mut buffer = [0; 4];
            store.totals(&mut buffer).unwrap();
            assert!((399..500 - failed).contains(&u32::from_le_bytes(buffer)));
        }
        assert!(failed > 0);
    }
}

#[test]
fn any_changed_bit_of_one_copy_is_repaired_from_the_other() {
    let mut good = Flash::new(PAGES);
    open(&mut good).write_record(&record(20_261_201), &CAUSE).unwrap();
    for copy in LAYOUT.record {
        for bit in (0..8 * (20 + RECORD_LENGTH + 4)).step_by(13) {
            let mut flash = good.clone();
            flash.bytes[copy.start as usize + bit / 8] ^= 1 << (bit % 8);
            assert_eq!(date(&mut flash), Some(20_261_201));
            assert_eq!(flash.bytes, good.bytes, "bit {bit}");
        }
    }
    // Damage while running: read from the other copy, repaired when asked.
    let mut flash = good.clone();
    let mut store = open(&mut flash);
    let flash = store.release();
    flash.bytes[100] ^= 1;
    store = Store::open(flash, &LAYOUT).unwrap();
    assert_eq!(store.copies(Part::Record), Ok(Copies::Two));
    // Both damaged: missing, not wrong.
    let mut flash = good.clone();
    for copy in LAYOUT.record {
        flash.bytes[copy.start as usize + 500] ^= 1;
    }
    assert_eq!(date(&mut flash), None);
    assert_eq!(open(&mut flash).calibrations(), 1);
}

/// CRC-32 (ISO-HDLC), bit by bit: an own opinion on the stored checksum.
fn crc(bytes: &[u8]) -> u32 {
    !bytes.iter().fold(!0, |sum, &byte| {
        (0..8).fold(sum ^ u32::from(byte), |s: u32, _| if s & 1 == 1 { s >> 1 ^ 0xEDB8_8320 } else { s >> 1 })
    })
}

/// A frame as DEVELOPERS.md describes it, built without the library.
fn frame(letter: u8, version: u16, sequence: u32, counter: u32, contents: &[u8]) -> Vec<u8> {
    let mut bytes = vec![b'E', b'V', b'B', letter];
    bytes.extend(version.to_le_bytes());
    bytes.extend((contents.len() as u16).to_le_bytes());
    bytes.extend(sequence.to_le_bytes());
    bytes.extend(counter.to_le_bytes());
    let sum = crc(&[&bytes, contents].concat());
    bytes.extend(sum.to_le_bytes());
    bytes.extend(contents);
    bytes.resize(bytes.len().next_multiple_of(4), 0xFF);
    bytes.extend([0; 4]);
    bytes
}

#[test]
fn the_bytes_are_those_of_the_description() {
    let mut flash = Flash::new(PAGES);
    let mut store = open(&mut flash);
    assert_eq!(store.log_calibration(&Event::new(0x1122, 7, 8, 9)), Ok(1));
    store.write_settings(3, b"seven by").unwrap();
    store.write_settings(3, b"odd").unwrap();
    let start = LAYOUT.settings[1].start as usize;
    let wanted = frame(b'S', 3, 2, 1, b"odd");
    assert_eq!(flash.bytes[start..start + wanted.len()], wanted);
    let mut event = vec![0x22, 0x11, 0, 0, 0, 0, 0, 0, 7, 0, 1, 0];
    event.extend([8, 0, 0, 0, 9, 0, 0, 0]);
    let start = LAYOUT.events.start as usize;
    let wanted = frame(b'E', 1, 1, 1, &event);
    assert_eq!(flash.bytes[start..start + wanted.len()], wanted);
}

#[test]
fn a_newer_version_is_reported_and_kept() {
    let mut flash = Flash::new(PAGES);
    let newer = frame(b'R', 2, 9, 41, &[5; 1200]);
    let settings = frame(b'S', 4, 1, 40, &[6; 10]);
    flash.write(LAYOUT.record[1].start, &newer).unwrap();
    flash.write(LAYOUT.settings[0].start, &settings).unwrap();
    flash.write(LAYOUT.totals.start, &frame(b'T', 8, 1, 0, &[6; 10])).unwrap();
    let report = |part, found, newest| StoreError::Newer { part, found, newest };
    let mut store = open(&mut flash);
    assert_eq!(store.calibrations(), 41);
    assert_eq!(store.record().unwrap_err(), report(Part::Record, 2, 1));
    assert_eq!(store.write_record(&record(20_260_101), &CAUSE).unwrap_err(), report(Part::Record, 2, 1));
    assert_eq!(store.write_settings(3, &[1]).unwrap_err(), report(Part::Settings, 4, 3));
    assert_eq!(store.write_totals(7, &[1]).unwrap_err(), report(Part::Totals, 8, 7));
    let mut buffer = [0; 10];
    assert_eq!(store.settings(&mut buffer).unwrap(), Some(Contents { version: 4, length: 10 }));
    assert_eq!(store.copies(Part::Record), Ok(Copies::Two), "kept, and copied as it is");
    assert_eq!(store.calibrations(), 41, "a refused write does not count");
    // Only when told to.
    assert_eq!(store.log_calibration(&CAUSE), Ok(42));
    store.forget_record().unwrap();
    store.forget_settings().unwrap();
    store.forget_totals().unwrap();
    assert_eq!(store.record().unwrap(), None);
    assert_eq!(store.write_record(&record(20_260_101), &CAUSE), Ok(Copies::Two));
    assert_eq!(store.write_settings(3, &[1]), Ok(Copies::Two));
    store.write_totals(7, &[1]).unwrap();
    assert_eq!(open(&mut flash).calibrations(), 43);
}

#[test]
fn full_rings_keep_the_newest_and_wear_evenly() {
    let mut flash = Flash::new(PAGES);
    let mut store = open(&mut flash);
    let per_page = PAGE as u32 / 44;
    for n in 1..=1000 {
        assert_eq!(store.log(&Event::new(u64::from(n), 5, n, n + 1)), Ok(n));
        store.write_totals(1, &[n as u8; 48]).unwrap();
        let mut numbers = Vec::new();
        store.events_since(0, |e| numbers.push((e.number, e.old))).unwrap();
        assert!(numbers.len() as u32 >= n.min(per_page + 1));
        let first = n + 1 - numbers.len() as u32;
        assert!(numbers.iter().enumerate().all(|(i, &pair)| pair == (first + i as u32, first + i as u32)));
    }
    let mut late = 0;
    store.events_since(990, |_| late += 1).unwrap();
    assert_eq!(late, 10);
    let totals = LAYOUT.totals.start as usize / PAGE;
    // The stated life: writes / (pages x frames a page) erases of each page.
    let frames = 3 * (PAGE as u32 / 72);
    for erases in &flash.erases[totals..totals + 3] {
        assert!(erases.abs_diff(1000 / frames) <= 1, "{:?}", flash.erases);
    }
    assert_eq!(LAYOUT.snapshots_per_day(PAGE as u32, 4, 10_000, 20), frames * 10_000 * 4 / (1461 * 20));
}

#[test]
fn too_long_is_refused_and_nothing_changes() {
    let mut flash = Flash::new(PAGES);
    let mut store = open(&mut flash);
    store.write_settings(1, &[1; 9]).unwrap();
    let room = PAGE - 4 - 20;
    let long = |part, length, room| StoreError::TooLong { part, length, room };
    assert_eq!(store.write_settings(1, &vec![0; room + 1]), Err(long(Part::Settings, room + 1, room)));
    assert_eq!(store.write_totals(1, &[0; 49]), Err(long(Part::Totals, 49, 48)));
    assert_eq!(store.settings(&mut [0; 8]), Err(long(Part::Settings, 9, 8)));
    assert_eq!(store.settings(&mut [0; 9]), Ok(Some(Contents { version: 1, length: 9 })));
    assert_eq!(store.write_settings(1, &vec![3; room]), Ok(Copies::Two));
    let mut wrong = record(20_260_101);
    wrong.serial.clear();
    assert!(matches!(store.write_record(&wrong, &CAUSE), Err(StoreError::Record(_))));
    assert_eq!(store.calibrations(), 0);
}

#[test]
fn layouts_that_do_not_fit_are_named() {
    let refusal = |layout: &Layout| match Store::open(&mut Flash::new(PAGES), layout) {
        Err(StoreError::Layout { part, fault }) => Some((part, fault)),
        other => other.map(|_| None).unwrap(),
    };
    let page = PAGE as u32;
    assert_eq!(refusal(&LAYOUT), None);
    let cases = [
        (Layout { totals: Region::new(100, 3 * page), ..LAYOUT }, Part::Totals, LayoutFault::NotOnPages),
        (Layout { events: Region::new(8 * page, 2 * page), ..LAYOUT }, Part::Events, LayoutFault::BeyondFlash),
        (Layout { events: Region::new(7 * page, page), ..LAYOUT }, Part::Events, LayoutFault::TooSmall(2 * page)),
        (Layout { settings: LAYOUT.record, ..LAYOUT }, Part::Settings, LayoutFault::Overlap(Part::Record)),
        (Layout { record: [LAYOUT.record[0]; 2], ..LAYOUT }, Part::Record, LayoutFault::Overlap(Part::Record)),
        (Layout { totals_length: 2025, ..LAYOUT }, Part::Totals, LayoutFault::TooSmall(2052)),
        (Layout::consecutive(0, 0, 2, 2, 8), Part::Record, LayoutFault::NotOnPages),
        (Layout::consecutive(u32::MAX - 4095, 2048, 2, 2, 8), Part::Record, LayoutFault::BeyondFlash),
    ];
    for (layout, part, fault) in cases {
        assert_eq!(refusal(&layout), Some((part, fault)));
    }
    let bytes = Store::open(MockFlash::<1, PAGE>::new(PAGES), &LAYOUT).unwrap_err();
    assert_eq!(bytes, StoreError::Layout { part: Part::Record, fault: LayoutFault::WordSize(1) });
    assert_eq!(bytes.to_string(), "layout of the record: words of 1 bytes; accepted: 4, 8, 16 or 32");
}

#[test]
fn words_of_16_and_32_bytes_and_pages_of_a_kibibyte_work() {
    fn try_out<const WORD: usize>() {
        let layout = Layout::consecutive(1024, 1024, 2, 2, 100);
        let mut store = Store::open(MockFlash::<WORD, 1024>::new(layout.end() as usize / 1024), &layout).unwrap();
        for n in 1..60 {
            let date = 20_260_000 + (n / 28 + 1) * 100 + n % 28 + 1;
            store.write_record(&record(date), &CAUSE).unwrap();
            store.write_totals(1, &[n as u8; 100]).unwrap();
            store = Store::open(store.release(), &layout).unwrap();
            let mut buffer = [0; 100];
            store.totals(&mut buffer).unwrap();
            assert_eq!((buffer, store.calibrations()), ([n as u8; 100], n));
            assert_eq!(store.record().unwrap().unwrap().date, date);
        }
    }
    try_out::<4>();
    try_out::<16>();
    try_out::<32>();
}
