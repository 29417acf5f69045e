//! Which pages of the flash hold what, checked once when the store is opened; how long the pages last.

use super::error::{LayoutFault, Part, StoreError};
use super::event::EVENT_LENGTH;
use super::frame::{HEADER_LENGTH, frame_length};
use crate::record::RECORD_LENGTH;
use embedded_storage::nor_flash::NorFlash;

/// A range of whole pages.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Region {
    /// First byte, an offset into the flash.
    pub start: u32,
    /// Bytes.
    pub length: u32,
}

impl Region {
    /// The `length` bytes from `start`.
    pub const fn new(start: u32, length: u32) -> Self {
        Self { start, length }
    }

    const fn end(&self) -> u64 {
        self.start as u64 + self.length as u64
    }
}

/// Which pages hold what.
///
/// ```
/// use evenbore::store::{Layout, Region};
/// // The last 12 pages of 1 KiB of a microcontroller with 256 KiB.
/// const LAYOUT: Layout = Layout::consecutive(0x3_D000, 1024, 4, 2, 64);
/// assert_eq!(LAYOUT.record, [Region::new(0x3_D000, 2048), Region::new(0x3_D800, 2048)]);
/// assert_eq!(LAYOUT.end(), 0x4_0000);
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Layout {
    /// The two copies of the record, in pages of their own.
    pub record: [Region; 2],
    /// The two copies of the settings.
    pub settings: [Region; 2],
    /// Snapshots of the totals: two pages or more, used in turn.
    pub totals: Region,
    /// Most bytes of one snapshot; the fewer, the longer the flash lasts.
    pub totals_length: u16,
    /// The event log: two pages or more, used in turn.
    pub events: Region,
}

impl Layout {
    /// Everything from `start` on, in pages of `page` bytes: record twice, settings twice (one page each), totals,
    /// events.
    pub const fn consecutive(start: u32, page: u32, totals_pages: u32, event_pages: u32, totals_length: u16) -> Self {
        let page = if page == 0 { 1 } else { page };
        let record = frame_length(RECORD_LENGTH, 32).div_ceil(page).saturating_mul(page);
        let record_b = start.saturating_add(record);
        let settings = record_b.saturating_add(record);
        let settings_b = settings.saturating_add(page);
        let totals = Region::new(settings_b.saturating_add(page), totals_pages.saturating_mul(page));
        let events = Region::new(totals.start.saturating_add(totals.length), event_pages.saturating_mul(page));
        Self {
            record: [Region::new(start, record), Region::new(record_b, record)],
            settings: [Region::new(settings, page), Region::new(settings_b, page)],
            totals,
            totals_length,
            events,
        }
    }

    /// First byte behind the event log.
    pub const fn end(&self) -> u32 {
        self.events.start.saturating_add(self.events.length)
    }

    /// How many snapshots of the totals a day may be stored if every page of them shall last `years`.
    ///
    /// `pages (page / frame) endurance / (365.25 years)`, where a frame takes the snapshot, 20 bytes of header, filled
    /// up to a word, and one word; `endurance` is how often a page may be erased.
    ///
    /// ```
    /// use evenbore::store::Layout;
    /// // 4 pages of 4 KiB, words of 4 bytes, 10 000 erases: a snapshot of 64 bytes every 5.8 minutes for 20 years.
    /// let layout = Layout::consecutive(0, 4096, 4, 2, 64);
    /// assert_eq!(layout.snapshots_per_day(4096, 4, 10_000, 20), 251);
    /// ```
    pub const fn snapshots_per_day(&self, page: u32, word: u32, endurance: u32, years: u32) -> u32 {
        if page == 0 || years == 0 || word == 0 {
            return 0;
        }
        let per_page = page / frame_length(self.totals_length as usize, word as usize);
        let writes = (self.totals.length / page) as u64 * per_page as u64 * endurance as u64;
        let daily = writes * 4 / (1461 * years as u64);
        if daily > u32::MAX as u64 { u32::MAX } else { daily as u32 }
    }

    fn regions(&self) -> [(Part, Region); 6] {
        let ([record, record_b], [settings, settings_b]) = (self.record, self.settings);
        [
            (Part::Record, record),
            (Part::Record, record_b),
            (Part::Settings, settings),
            (Part::Settings, settings_b),
            (Part::Totals, self.totals),
            (Part::Events, self.events),
        ]
    }

    /// Accepts a layout that fits the flash.
    pub(super) fn check<F: NorFlash>(&self, flash: &F) -> Result<(), StoreError<F::Error>> {
        let fault = |part, fault| Err(StoreError::Layout { part, fault });
        if let Err(wrong) = sizes::<F>() {
            return fault(Part::Record, wrong);
        }
        for (i, (part, region)) in self.regions().into_iter().enumerate() {
            if let Err(wrong) = self.fits::<F>(part, region, flash.capacity() as u64) {
                return fault(part, wrong);
            }
            for (other, before) in self.regions().into_iter().take(i) {
                if u64::from(region.start) < before.end() && u64::from(before.start) < region.end() {
                    return fault(part, LayoutFault::Overlap(other));
                }
            }
        }
        Ok(())
    }

    fn fits<F: NorFlash>(&self, part: Part, region: Region, capacity: u64) -> Result<(), LayoutFault> {
        let page = F::ERASE_SIZE as u32;
        if !region.start.is_multiple_of(page) || !region.length.is_multiple_of(page) {
            return Err(LayoutFault::NotOnPages);
        }
        if region.end() > capacity {
            return Err(LayoutFault::BeyondFlash);
        }
        let frame = |length| frame_length(length, F::WRITE_SIZE);
        let (least, has) = match part {
            Part::Record => (frame(RECORD_LENGTH), region.length),
            Part::Settings => (frame(1), region.length),
            _ if region.length < 2 * page => (2 * page, region.length),
            Part::Totals => (frame(usize::from(self.totals_length)), page),
            Part::Events => (frame(EVENT_LENGTH), page),
        };
        if has < least { Err(LayoutFault::TooSmall(least)) } else { Ok(()) }
    }
}

/// Most bytes of contents in a frame that has a region of its own.
pub(super) const fn room(region: Region, word: usize) -> usize {
    let room = (region.length as usize).saturating_sub(word + HEADER_LENGTH);
    if room > u16::MAX as usize { u16::MAX as usize } else { room }
}

/// Accepts a flash with words of 4 to 32 bytes, whole words to a page and whole reads to a word.
///
/// One byte is too little: a frame's last word must be unlike noise.
fn sizes<F: NorFlash>() -> Result<(), LayoutFault> {
    if !matches!(F::WRITE_SIZE, 4 | 8 | 16 | 32) {
        return Err(LayoutFault::WordSize(F::WRITE_SIZE));
    }
    if F::READ_SIZE == 0 || F::WRITE_SIZE % F::READ_SIZE != 0 {
        return Err(LayoutFault::PageSize(F::READ_SIZE));
    }
    if F::ERASE_SIZE == 0 || F::ERASE_SIZE % F::WRITE_SIZE != 0 || F::ERASE_SIZE > u32::MAX as usize / 2 {
        return Err(LayoutFault::PageSize(F::ERASE_SIZE));
    }
    Ok(())
}
