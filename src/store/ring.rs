//! A log of frames of one size in two pages or more, used in turn so that all wear alike.
//!
//! A page is erased when the log enters it; the page that holds the newest frame never is. A torn frame is skipped, a
//! page that no longer erases or programs is left out as long as another one works.

use super::error::{Part, Step, StoreError};
use super::frame::{self, Found, Header, Place, frame_length};
use super::pair::{Contents, read_contents};
use super::plan::Region;
use embedded_storage::nor_flash::NorFlash;

/// A slot: which page of the ring, which slot of the page.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
struct Slot {
    page: u32,
    slot: u32,
}

#[derive(Debug, Clone, Copy)]
pub(super) struct Ring {
    part: Part,
    start: u32,
    page: u32,
    pages: u32,
    slot: u32,
    per_page: u32,
    /// The newest frame: where, and its header.
    head: Option<(Slot, Header)>,
    /// The largest calibration counter of all frames.
    pub counter: u32,
}

impl Slot {
    const FIRST: Self = Self { page: 0, slot: 0 };
}

impl Ring {
    /// Looks through all slots of a checked region for the newest frame.
    pub(super) fn open<F: NorFlash>(
        flash: &mut F,
        part: Part,
        region: Region,
        contents: usize,
    ) -> Result<Self, StoreError<F::Error>> {
        let (page, slot) = (F::ERASE_SIZE as u32, frame_length(contents, F::WRITE_SIZE));
        let (pages, per_page) = (region.length / page, page.checked_div(slot).unwrap_or(0));
        let mut ring = Self { part, start: region.start, page, pages, slot, per_page, head: None, counter: 0 };
        let (mut unreadable, mut reason, mut at) = (0, None, Slot::FIRST);
        for _ in 0..ring.count() {
            match frame::inspect(flash, ring.place(at)) {
                Found::Frame(header) => ring.saw(at, header),
                Found::Unreadable(error) => {
                    unreadable += 1;
                    reason = Some(error);
                }
                Found::Blank | Found::Damaged => {}
            }
            at = ring.after(at);
        }
        match reason {
            Some(error) if unreadable == ring.count() => Err(frame::failed(part, Step::Read, error)),
            _ => Ok(ring),
        }
    }

    fn saw(&mut self, at: Slot, header: Header) {
        self.counter = self.counter.max(header.counter);
        if self.head.is_none_or(|(_, newest)| header.sequence > newest.sequence) {
            self.head = Some((at, header));
        }
    }

    const fn count(&self) -> u32 {
        self.pages * self.per_page
    }

    const fn after(&self, at: Slot) -> Slot {
        if at.slot + 1 < self.per_page { Slot { slot: at.slot + 1, ..at } } else { self.page_after(at) }
    }

    const fn page_after(&self, at: Slot) -> Slot {
        Slot { page: if at.page + 1 < self.pages { at.page + 1 } else { 0 }, slot: 0 }
    }

    const fn before(&self, at: Slot) -> Slot {
        match (at.page, at.slot) {
            (0, 0) => Slot { page: self.pages.saturating_sub(1), slot: self.per_page.saturating_sub(1) },
            (page, 0) => Slot { page: page - 1, slot: self.per_page.saturating_sub(1) },
            (page, slot) => Slot { page, slot: slot - 1 },
        }
    }

    const fn place(&self, at: Slot) -> Place {
        let at = self.start + at.page * self.page + at.slot * self.slot;
        Place { part: self.part, at, length: self.slot }
    }

    /// What the newest frame says about itself.
    pub(super) fn header(&self) -> Option<Header> {
        self.head.map(|(_, header)| header)
    }

    /// Bytes of contents there is room for.
    const fn room<F: NorFlash>(&self) -> usize {
        self.slot as usize - F::WRITE_SIZE - frame::HEADER_LENGTH
    }

    /// Stores contents as the newest frame; returns its sequence number.
    pub(super) fn append<F: NorFlash>(
        &mut self,
        flash: &mut F,
        version: u16,
        counter: u32,
        contents: &[u8],
    ) -> Result<u32, StoreError<F::Error>> {
        let part = self.part;
        if contents.len() > self.room::<F>() {
            return Err(StoreError::TooLong { part, length: contents.len(), room: self.room::<F>() });
        }
        let mut sequence = self.head.map_or(0, |(_, header)| header.sequence);
        let mut at = self.head.map_or(Slot::FIRST, |(head, _)| self.after(head));
        let mut failure = StoreError::ReadBack { part };
        for _ in 0..self.count() {
            sequence = sequence.checked_add(1).ok_or(StoreError::UsedUp { part })?;
            let header = Header::of(part, version, sequence, counter, contents);
            at = match self.try_slot(flash, at, &header, contents) {
                Tried::Written => {
                    self.saw(at, header);
                    return Ok(sequence);
                }
                Tried::SlotFailed(error) => {
                    failure = error;
                    self.after(at)
                }
                Tried::NotBlank => self.after(at),
                Tried::PageFailed(error) => {
                    failure = error;
                    self.page_after(at)
                }
                Tried::Around => break,
            };
        }
        Err(failure)
    }

    fn try_slot<F: NorFlash>(
        &self,
        flash: &mut F,
        at: Slot,
        header: &Header,
        contents: &[u8],
    ) -> Tried<StoreError<F::Error>> {
        let place = self.place(at);
        if at.slot == 0 {
            if self.head.is_some_and(|(newest, _)| newest.page == at.page) {
                return Tried::Around;
            }
            if let Err(error) = frame::erase(flash, self.part, place.at, self.page) {
                return Tried::PageFailed(error);
            }
        } else if !matches!(frame::inspect(flash, place), Found::Blank) {
            return Tried::NotBlank;
        }
        match frame::write(flash, place, header, contents) {
            Ok(()) => Tried::Written,
            Err(error) => Tried::SlotFailed(error),
        }
    }

    /// Reads the newest contents; if they were damaged since, the newest that are good.
    pub(super) fn newest<F: NorFlash>(
        &self,
        flash: &mut F,
        buffer: &mut [u8],
    ) -> Result<Option<Contents>, StoreError<F::Error>> {
        let Some((mut at, _)) = self.head else { return Ok(None) };
        for _ in 0..self.count() {
            let place = self.place(at);
            if let Found::Frame(header) = frame::inspect(flash, place) {
                return read_contents(flash, place, &header, buffer).map(Some);
            }
            at = self.before(at);
        }
        Ok(None)
    }

    /// Reads frames from the oldest to the newest, those after `sequence`, as far as `buffer` holds them.
    pub(super) fn since<F: NorFlash>(
        &self,
        flash: &mut F,
        sequence: u32,
        buffer: &mut [u8],
        mut each: impl FnMut(&Header, &[u8]),
    ) -> Result<(), StoreError<F::Error>> {
        let Some((mut at, _)) = self.head else { return Ok(()) };
        let mut last = sequence;
        for _ in 0..self.count() {
            at = self.after(at);
            let place = self.place(at);
            let Found::Frame(header) = frame::inspect(flash, place) else { continue };
            if header.sequence > last && usize::from(header.length) <= buffer.len() {
                last = header.sequence;
                let contents = read_contents(flash, place, &header, buffer)?;
                each(&header, buffer.get(..contents.length).unwrap_or(&[]));
            }
        }
        Ok(())
    }

    /// Erases all pages, that of the newest frame last.
    pub(super) fn forget<F: NorFlash>(&mut self, flash: &mut F) -> Result<(), StoreError<F::Error>> {
        let mut at = self.head.map_or(Slot::FIRST, |(head, _)| head);
        for _ in 0..self.pages {
            at = self.page_after(at);
            frame::erase(flash, self.part, self.place(at).at, self.page)?;
        }
        self.head = None;
        Ok(())
    }
}

/// How an attempt to write to a slot ended.
enum Tried<E> {
    Written,
    /// Something stands there: a torn frame.
    NotBlank,
    SlotFailed(E),
    PageFailed(E),
    /// Only the page of the newest frame is left.
    Around,
}
