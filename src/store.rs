//! What survives a power cut: record, settings, totals, event log and the calibration counter on NOR flash.
//!
//! Record and settings are kept in two copies in pages of their own, totals and events in rings of pages. Everything is
//! a frame with a sequence number, a CRC-32 and a last word that is programmed only when the rest has been read back
//! (DEVELOPERS.md, "Flash layout"). At whatever step the power fails, the next start reads the old or the new contents.
//! Alien bytes count as nothing stored; contents of a newer version are reported and never erased unless asked to.
//!
//! The calibration counter has no place of its own: every frame carries its value, and it is the largest of all.

mod error; // what can go wrong

mod frame; // one stored item

mod event; // one line of the log

mod plan; // which pages hold what

mod pair; // two copies

mod ring; // pages used in turn

pub use error::{LayoutFault, Part, Step, StoreError};
pub use event::Event;
pub use pair::{Contents, Copies};
pub use plan::{Layout, Region};

use crate::record::{RECORD_LENGTH, RECORD_VERSION, Record};
use embedded_storage::nor_flash::NorFlash;
use event::{EVENT_LENGTH, EVENT_VERSION};
use pair::Pair;
use ring::Ring;

/// Record, settings, totals and event log of an instrument.
///
/// Owns the flash driver, or borrows it: `&mut F` is a driver as well.
///
/// ```
/// # use embedded_storage::nor_flash::*;
/// # struct Flash(Vec<u8>);
/// # impl ErrorType for Flash { type Error = NorFlashErrorKind; }
/// # impl ReadNorFlash for Flash {
/// #     const READ_SIZE: usize = 1;
/// #     fn read(&mut self, at: u32, to: &mut [u8]) -> Result<(), NorFlashErrorKind> {
/// #         to.copy_from_slice(&self.0[at as usize..][..to.len()]); Ok(())
/// #     }
/// #     fn capacity(&self) -> usize { self.0.len() }
/// # }
/// # impl NorFlash for Flash {
/// #     const WRITE_SIZE: usize = 4;
/// #     const ERASE_SIZE: usize = 4096;
/// #     fn erase(&mut self, from: u32, to: u32) -> Result<(), NorFlashErrorKind> {
/// #         self.0[from as usize..to as usize].fill(0xFF); Ok(())
/// #     }
/// #     fn write(&mut self, at: u32, from: &[u8]) -> Result<(), NorFlashErrorKind> {
/// #         self.0[at as usize..][..from.len()].copy_from_slice(from); Ok(())
/// #     }
/// # }
/// # let flash = Flash(vec![0xFF; 8 * 4096]);
/// use evenbore::{Element, Record, calibration::Quality, fluid::catalogue::NITROGEN, quantity::Length};
/// use evenbore::store::{Copies, Event, Layout, Store};
///
/// const LAYOUT: Layout = Layout::consecutive(0, 4096, 2, 2, 64);
/// let mut store = Store::open(flash, &LAYOUT)?;
/// assert_eq!(store.record()?, None);
///
/// let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
/// let quality = Quality::nominal(element.a(), element.b());
/// let record = Record::new("EB-0042", 20261201, element, *NITROGEN.fluid(), quality)?;
/// let copies = store.write_record(&record, &Event::new(1_796_083_200, 1, 0, record.checksum()))?;
/// assert_eq!((copies, store.calibrations()), (Copies::Two, 1));
///
/// store.write_totals(1, &987_654_321_u64.to_le_bytes())?;
/// let mut store = Store::open(store.release(), &LAYOUT)?; // after a restart
/// assert_eq!(store.record()?.map(|record| record.events), Some(1));
/// let mut totals = [0; 8];
/// store.totals(&mut totals)?;
/// assert_eq!(u64::from_le_bytes(totals), 987_654_321);
/// # Ok::<(), Box<dyn std::error::Error>>(())
/// ```
#[derive(Debug)]
pub struct Store<F> {
    flash: F,
    record: Pair,
    settings: Pair,
    totals: Ring,
    events: Ring,
    calibrations: u32,
}

impl<F: NorFlash> Store<F> {
    /// Checks the layout, finds what is stored and repairs what a power cut left in one copy.
    ///
    /// A copy that cannot be repaired because its page is worn is no error; see [`Store::repair`].
    ///
    /// # Errors
    /// The layout does not fit the flash, or nothing of the totals or of the event log can be read at all.
    pub fn open(mut flash: F, layout: &Layout) -> Result<Self, StoreError<F::Error>> {
        layout.check(&flash)?;
        let record = Pair::new(Part::Record, layout.record, F::WRITE_SIZE);
        let settings = Pair::new(Part::Settings, layout.settings, F::WRITE_SIZE);
        let totals = Ring::open(&mut flash, Part::Totals, layout.totals, usize::from(layout.totals_length))?;
        let events = Ring::open(&mut flash, Part::Events, layout.events, EVENT_LENGTH)?;
        let mut calibrations = totals.counter.max(events.counter);
        for pair in [record, settings] {
            calibrations = calibrations.max(pair.header(&mut flash).ok().flatten().map_or(0, |header| header.counter));
            let _ = pair.repair(&mut flash);
        }
        Ok(Self { flash, record, settings, totals, events, calibrations })
    }

    /// Gives the flash driver back.
    pub fn release(self) -> F {
        self.flash
    }

    /// How often a calibration was begun on this instrument. Never decreases and cannot be reset.
    pub const fn calibrations(&self) -> u32 {
        self.calibrations
    }

    /// In how many copies record or settings are stored; totals and events have one, or none.
    ///
    /// # Errors
    /// Nothing of the part can be read at all.
    pub fn copies(&mut self, part: Part) -> Result<Copies, StoreError<F::Error>> {
        let one = |ring: &Ring| if ring.header().is_some() { Copies::One } else { Copies::None };
        match part {
            Part::Record => self.record.copies(&mut self.flash),
            Part::Settings => self.settings.copies(&mut self.flash),
            Part::Totals => Ok(one(&self.totals)),
            Part::Events => Ok(one(&self.events)),
        }
    }

    /// Makes a damaged copy of record or settings good again from the other; writes nothing if both are good.
    ///
    /// # Errors
    /// The flash refuses: the page is worn. The good copy is untouched.
    pub fn repair(&mut self) -> Result<(), StoreError<F::Error>> {
        self.record.repair(&mut self.flash)?;
        self.settings.repair(&mut self.flash)?;
        Ok(())
    }

    /// The calibration record; none when it is missing.
    ///
    /// # Errors
    /// The flash refuses; the record is of a newer version, or makes no sense.
    pub fn record(&mut self) -> Result<Option<Record>, StoreError<F::Error>> {
        let stored = self.record.header(&mut self.flash)?;
        not_newer(Part::Record, stored.map(|header| header.version), RECORD_VERSION)?;
        let mut bytes = [0; RECORD_LENGTH];
        let Some(found) = self.record.read(&mut self.flash, &mut bytes)? else { return Ok(None) };
        let bytes = bytes.get(..found.length).unwrap_or(&bytes);
        Record::decode(bytes).map(Some).map_err(StoreError::Record)
    }

    /// Counts and logs the calibration, then writes its record, whose `events` becomes the counter.
    ///
    /// The counter moves first: a power cut in between leaves a counted calibration and the old record, never a new
    /// record that was not counted. [`Copies::One`] says that the record is safe but that a page is worn.
    ///
    /// # Errors
    /// The record makes no sense, a newer one is stored (see [`Store::forget_record`]), or the flash refuses: the old
    /// record is still there.
    pub fn write_record(&mut self, record: &Record, cause: &Event) -> Result<Copies, StoreError<F::Error>> {
        record.check().map_err(StoreError::Record)?;
        let stored = self.record.header(&mut self.flash)?;
        not_newer(Part::Record, stored.map(|header| header.version), RECORD_VERSION)?;
        let events = self.log_calibration(cause)?;
        let mut bytes = [0; RECORD_LENGTH];
        Record { events, ..record.clone() }.encode(&mut bytes);
        self.record.write(&mut self.flash, RECORD_VERSION, events, &bytes)
    }

    /// Erases the record, whatever its version.
    ///
    /// # Errors
    /// The flash refuses.
    pub fn forget_record(&mut self) -> Result<(), StoreError<F::Error>> {
        self.record.forget(&mut self.flash)
    }

    /// Reads the settings into `buffer`; none when they are missing.
    ///
    /// # Errors
    /// The flash refuses, or the buffer is too short.
    pub fn settings(&mut self, buffer: &mut [u8]) -> Result<Option<Contents>, StoreError<F::Error>> {
        self.settings.read(&mut self.flash, buffer)
    }

    /// Writes the settings, bytes of the caller's with a version of theirs.
    ///
    /// # Errors
    /// Too many bytes, settings of a newer version are stored (see [`Store::forget_settings`]), or the flash refuses:
    /// the old settings are still there.
    pub fn write_settings(&mut self, version: u16, bytes: &[u8]) -> Result<Copies, StoreError<F::Error>> {
        let stored = self.settings.header(&mut self.flash)?;
        not_newer(Part::Settings, stored.map(|header| header.version), version)?;
        self.settings.write(&mut self.flash, version, self.calibrations, bytes)
    }

    /// Erases the settings, whatever their version.
    ///
    /// # Errors
    /// The flash refuses.
    pub fn forget_settings(&mut self) -> Result<(), StoreError<F::Error>> {
        self.settings.forget(&mut self.flash)
    }

    /// Reads the newest snapshot of the totals into `buffer`; none when there is none.
    ///
    /// # Errors
    /// The flash refuses, or the buffer is too short.
    pub fn totals(&mut self, buffer: &mut [u8]) -> Result<Option<Contents>, StoreError<F::Error>> {
        self.totals.newest(&mut self.flash, buffer)
    }

    /// Stores a snapshot of the totals. [`Layout::snapshots_per_day`] says how often the flash bears it.
    ///
    /// # Errors
    /// Too many bytes, totals of a newer version are stored (see [`Store::forget_totals`]), or the flash refuses: the
    /// snapshot before is still there.
    pub fn write_totals(&mut self, version: u16, bytes: &[u8]) -> Result<(), StoreError<F::Error>> {
        not_newer(Part::Totals, self.totals.header().map(|header| header.version), version)?;
        self.totals.append(&mut self.flash, version, self.calibrations, bytes).map(|_| ())
    }

    /// Erases all snapshots of the totals, whatever their version.
    ///
    /// # Errors
    /// The flash refuses.
    pub fn forget_totals(&mut self) -> Result<(), StoreError<F::Error>> {
        self.totals.forget(&mut self.flash)
    }

    /// Logs an event; returns its number. The oldest events give way.
    ///
    /// # Errors
    /// The flash refuses.
    pub fn log(&mut self, event: &Event) -> Result<u32, StoreError<F::Error>> {
        self.append(event, false, self.calibrations)
    }

    /// Logs an event that counts as a calibration; returns the counter after it. Event and counter are one frame.
    ///
    /// # Errors
    /// The flash refuses; the counter keeps its value.
    pub fn log_calibration(&mut self, event: &Event) -> Result<u32, StoreError<F::Error>> {
        let counter = self.calibrations.checked_add(1).ok_or(StoreError::UsedUp { part: Part::Events })?;
        self.append(event, true, counter)?;
        self.calibrations = counter;
        Ok(counter)
    }

    fn append(&mut self, event: &Event, calibration: bool, counter: u32) -> Result<u32, StoreError<F::Error>> {
        let bytes = Event { calibration, ..*event }.encode();
        self.events.append(&mut self.flash, EVENT_VERSION, counter, &bytes)
    }

    /// Hands the events whose number is larger than `number` to `each`, the oldest first.
    ///
    /// # Errors
    /// The flash refuses.
    pub fn events_since(&mut self, number: u32, mut each: impl FnMut(&Event)) -> Result<(), StoreError<F::Error>> {
        let mut buffer = [0; EVENT_LENGTH];
        self.events.since(&mut self.flash, number, &mut buffer, |header, bytes| {
            if let Some(bytes) = bytes.first_chunk::<EVENT_LENGTH>() {
                each(&Event::decode(header.sequence, header.counter, bytes));
            }
        })
    }
}

/// Refuses to touch what is newer than `newest`.
fn not_newer<E>(part: Part, stored: Option<u16>, newest: u16) -> Result<(), StoreError<E>> {
    match stored {
        Some(found) if found > newest => Err(StoreError::Newer { part, found, newest }),
        _ => Ok(()),
    }
}
