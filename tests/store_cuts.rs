//! The power fails at every step of every write, whole or in the middle of a word or an erase: afterwards the old or
//! the new contents are read, the counter never decreases, nothing wrong is accepted.

#[path = "common/flash.rs"]
mod flash;

use evenbore::calibration::Quality;
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::quantity::Length;
use evenbore::store::{Copies, Event, Layout, Part, Store};
use evenbore::{Element, Record};
use flash::{Dice, MockFlash, Torn};

const PAGE: usize = 512;
const LAYOUT: Layout = Layout::consecutive(0, PAGE as u32, 3, 3, 24);
const PAGES: usize = LAYOUT.end() as usize / PAGE;
type Flash<const WORD: usize> = MockFlash<WORD, PAGE>;

/// Every way in which a cut may leave its word or page.
const TORN: [Torn; 3] = [Torn::Whole, Torn::Partial, Torn::Unreadable];

fn record(date: u32) -> Record {
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0)).unwrap();
    let quality = Quality::nominal(element.a(), element.b());
    // The number is told by the date: days 1 to 28, months, years from 2000.
    let (day, month, year) = (date % 28 + 1, date / 28 % 12 + 1, 2000 + date / 336);
    Record::new("EB-0042", year * 10_000 + month * 100 + day, element, *NITROGEN.fluid(), quality).unwrap()
}

fn date(record: &Record) -> u32 {
    let (day, month, year) = (record.date % 100, record.date / 100 % 100, record.date / 10_000);
    (year - 2000) * 336 + (month - 1) * 28 + day - 1
}

/// What is read after a start.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
struct Seen {
    record: Option<u32>,
    settings: Option<u32>,
    totals: Option<u32>,
    /// The new value of the newest event.
    event: Option<u32>,
    counter: u32,
}

/// Values are 24 bytes made from one number, so that a mixture of two is noticed.
fn bytes(n: u32) -> [u8; 24] {
    let mut dice = Dice(u64::from(n));
    let mut all = [0; 24];
    all.iter_mut().for_each(|b| *b = dice.roll() as u8);
    all[..4].copy_from_slice(&n.to_le_bytes());
    all
}

fn number(all: [u8; 24], length: usize) -> u32 {
    let n = u32::from_le_bytes(all[..4].try_into().unwrap());
    assert_eq!((all, length), (bytes(n), 24), "contents that were never written");
    n
}

fn seen<const WORD: usize>(flash: &mut Flash<WORD>) -> Seen {
    let mut store = Store::open(flash, &LAYOUT).unwrap();
    let mut buffer = [0; 24];
    let found = store.settings(&mut buffer).unwrap();
    let settings = found.map(|c| number(buffer, c.length));
    let found = store.totals(&mut buffer).unwrap();
    let totals = found.map(|c| number(buffer, c.length));
    let read = store.record().unwrap();
    if let Some(read) = &read {
        assert_eq!(*read, Record { events: read.events, ..record(date(read)) });
        assert!(read.events <= store.calibrations());
    }
    let (mut event, mut last) = (None, None);
    store
        .events_since(0, |e| {
            assert_eq!((e.old, e.time, e.kind), (!e.new, u64::from(e.new) << 20, e.new as u16), "event never written");
            assert!(last.is_none_or(|(n, c)| e.number > n && e.counter >= c), "events out of order");
            last = Some((e.number, e.counter));
            event = Some(e.new);
        })
        .unwrap();
    for part in [Part::Record, Part::Settings] {
        assert_ne!(store.copies(part).unwrap(), Copies::One, "{part} was not repaired at the start");
    }
    Seen { record: read.map(|r| date(&r)), settings, totals, event, counter: store.calibrations() }
}

fn event(n: u32) -> Event {
    Event::new(u64::from(n) << 20, n as u16, !n, n)
}

/// Writes value `n` by operation `which`; whether it was acknowledged.
fn operate<const WORD: usize>(flash: &mut Flash<WORD>, which: u64, n: u32) -> bool {
    let Ok(mut store) = Store::open(flash, &LAYOUT) else { return false };
    match which {
        0 => store.write_record(&record(n), &event(n)).is_ok(),
        1 => store.write_settings(1, &bytes(n)).is_ok(),
        2 => store.write_totals(1, &bytes(n)).is_ok(),
        3 => store.log(&event(n)).is_ok(),
        _ => store.log_calibration(&event(n)).is_ok(),
    }
}

/// Old or new, nothing else; new if it was acknowledged.
fn judge(before: &Seen, after: &Seen, which: u64, n: u32, acknowledged: bool) {
    let check = |name, touched: bool, old: Option<u32>, now: Option<u32>| {
        let fine = if !touched { now == old } else { now == Some(n) || (!acknowledged && now == old) };
        assert!(fine, "{name}: {old:?} before, {now:?} after operation {which} of {n}, acknowledged {acknowledged}");
    };
    check("record", which == 0, before.record, after.record);
    check("settings", which == 1, before.settings, after.settings);
    check("totals", which == 2, before.totals, after.totals);
    check("events", matches!(which, 0 | 3 | 4), before.event, after.event);
    let counts = matches!(which, 0 | 4);
    let moved = after.counter.checked_sub(before.counter).expect("the counter decreased");
    assert!(moved == 0 || (counts && moved == 1), "counter moved by {moved} in operation {which}");
    assert!(moved == 1 || !counts || !acknowledged, "an acknowledged calibration was not counted");
    assert!(which != 0 || after.record != Some(n) || moved == 1, "a record was written that was not counted");
}

/// Cuts one operation at each of its steps, in each way; the number of cuts.
fn at_every_step<const WORD: usize>(start: &Flash<WORD>, which: u64, n: u32) -> u64 {
    let before = seen(&mut start.clone());
    let mut cuts = 0;
    for torn in TORN {
        for step in 0.. {
            let mut flash = start.clone();
            (flash.torn, flash.power, flash.dice) = (torn, Some(step), Dice(step + 1));
            let acknowledged = operate(&mut flash, which, n);
            if !flash.is_dead() {
                assert!(acknowledged);
                break;
            }
            flash.restart();
            judge(&before, &seen(&mut flash), which, n, acknowledged);
            cuts += 1;
            // The next write goes through all the same.
            let middle = seen(&mut flash);
            assert!(operate(&mut flash, which, n + 1));
            judge(&middle, &seen(&mut flash), which, n + 1, true);
        }
    }
    cuts
}

fn exhaustive<const WORD: usize>() -> u64 {
    let mut flash = Flash::<WORD>::new(PAGES);
    let mut cuts = 0;
    for round in 0..2 {
        for which in 0..5 {
            cuts += at_every_step(&flash, which, 10 * round + 1);
            assert!(operate(&mut flash, which, 10 * round + 3));
        }
    }
    // Rings at every place, so that entering and erasing a page is cut too.
    for n in 0..40 {
        for which in [2, 3] {
            cuts += at_every_step(&flash, which, 100 + 2 * n);
            assert!(operate(&mut flash, which, 101 + 2 * n));
        }
    }
    cuts
}

#[test]
fn every_step_of_every_write_leaves_old_or_new() {
    let cuts = [exhaustive::<4>(), exhaustive::<8>()];
    println!("cuts at every step: {} with words of 4 bytes, {} with words of 8", cuts[0], cuts[1]);
    assert_eq!(cuts, [6456, 3480]);
}

/// The repair at the start is cut at every step too, after a cut in the second copy.
#[test]
fn every_step_of_the_repair_leaves_what_was_stored() {
    let mut start = Flash::<4>::new(PAGES);
    assert!(operate(&mut start, 0, 1));
    assert!(operate(&mut start, 1, 2));
    let mut cuts = 0;
    for damaged in [LAYOUT.record[0], LAYOUT.record[1], LAYOUT.settings[0], LAYOUT.settings[1]] {
        let mut hurt = start.clone();
        hurt.bytes[damaged.start as usize + 21] ^= 4;
        let before = seen(&mut start.clone());
        for (torn, step) in TORN.into_iter().flat_map(|torn| (0..).map(move |step| (torn, step)).take(275)) {
            let mut flash = hurt.clone();
            (flash.torn, flash.power, flash.dice) = (torn, Some(step), Dice(step));
            let _ = Store::open(&mut flash, &LAYOUT);
            cuts += u64::from(flash.is_dead());
            flash.restart();
            assert_eq!(seen(&mut flash), before);
        }
    }
    println!("cuts during repair: {cuts}");
    assert_eq!(cuts, 1698);
}

fn random<const WORD: usize>(seed: u64, wanted: u64) -> u64 {
    let mut dice = Dice(seed);
    let mut flash = Flash::<WORD>::new(PAGES);
    let mut before = Seen::default();
    let (mut cuts, mut n) = (0, 0);
    while cuts < wanted {
        n += 1;
        let which = [0, 1, 1, 2, 2, 2, 2, 3, 3, 3, 3, 4, 4, 4][dice.below(14) as usize];
        let steps = if which == 0 { 2300 / WORD } else { 140 / WORD };
        flash.torn = TORN[dice.below(3) as usize];
        flash.dice = Dice(dice.roll());
        flash.power = Some(dice.below(steps as u64));
        let acknowledged = operate(&mut flash, which, n);
        cuts += u64::from(flash.is_dead());
        flash.restart();
        let after = seen(&mut flash);
        judge(&before, &after, which, n, acknowledged);
        before = after;
    }
    cuts
}

#[test]
fn a_hundred_thousand_random_cuts_lose_nothing() {
    let other = std::thread::spawn(|| random::<8>(0xE8, 50_000));
    let cuts = random::<4>(0xE4, 50_000) + other.join().unwrap();
    println!("random cuts: {cuts}");
    assert_eq!(cuts, 100_000);
}
