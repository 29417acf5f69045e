//! Two copies of one thing, written one after the other.
//!
//! The first to be written is the damaged or the older copy, so the only good one is never erased. The power may fail
//! at any word: before the last word of the first copy the old contents are read, after it the new ones, from that copy.

use super::error::{Part, Step, StoreError};
use super::frame::{self, Found, Header, Place};
use super::plan::{Region, room};
use embedded_storage::nor_flash::NorFlash;

/// In how many copies something is stored.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Copies {
    /// Nothing is stored, or nothing that can be read.
    None,
    /// One copy is good; the pages of the other are worn or need repair.
    One,
    /// As it should be.
    Two,
}

/// What was read: its version and its length.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Contents {
    /// Version of the contents, as given when they were written.
    pub version: u16,
    /// Bytes at the start of the buffer that were read.
    pub length: usize,
}

#[derive(Debug, Clone, Copy)]
pub(super) struct Pair {
    places: [Place; 2],
    room: usize,
}

/// Both copies as found.
struct Survey {
    /// The newest good frame: where, and its header.
    best: Option<(Place, Header)>,
    /// The other place, to be written first.
    other: Place,
    copies: Copies,
}

impl Pair {
    pub(super) fn new(part: Part, regions: [Region; 2], word: usize) -> Self {
        let places = regions.map(|r| Place { part, at: r.start, length: r.length });
        let [a, b] = regions.map(|r| room(r, word));
        Self { places, room: a.min(b) }
    }

    fn survey<F: NorFlash>(&self, flash: &mut F) -> Result<Survey, StoreError<F::Error>> {
        let [a, b] = self.places;
        let found = [frame::inspect(flash, a), frame::inspect(flash, b)];
        if let [Found::Unreadable(error), Found::Unreadable(_)] = found {
            return Err(frame::failed(a.part, Step::Read, error));
        }
        let [first, second] = found.map(|f| f.header());
        let one = |place, header, other| Survey { best: Some((place, header)), other, copies: Copies::One };
        Ok(match (first, second) {
            (Some(x), Some(y)) if x == y => Survey { best: Some((b, y)), other: a, copies: Copies::Two },
            (Some(x), Some(y)) if x.sequence >= y.sequence => one(a, x, b),
            (_, Some(y)) => one(b, y, a),
            (Some(x), None) => one(a, x, b),
            (None, None) => Survey { best: None, other: a, copies: Copies::None },
        })
    }

    /// In how many copies the contents are there.
    pub(super) fn copies<F: NorFlash>(&self, flash: &mut F) -> Result<Copies, StoreError<F::Error>> {
        Ok(self.survey(flash)?.copies)
    }

    /// What the newest good frame says about itself.
    pub(super) fn header<F: NorFlash>(&self, flash: &mut F) -> Result<Option<Header>, StoreError<F::Error>> {
        Ok(self.survey(flash)?.best.map(|(_, header)| header))
    }

    /// Reads the newest good contents.
    pub(super) fn read<F: NorFlash>(
        &self,
        flash: &mut F,
        buffer: &mut [u8],
    ) -> Result<Option<Contents>, StoreError<F::Error>> {
        let Some((place, header)) = self.survey(flash)?.best else { return Ok(None) };
        read_contents(flash, place, &header, buffer).map(Some)
    }

    /// Writes contents twice. An error means that the old contents are still there, `One` that the new ones are there
    /// but that the other copy could not be written.
    pub(super) fn write<F: NorFlash>(
        &self,
        flash: &mut F,
        version: u16,
        counter: u32,
        contents: &[u8],
    ) -> Result<Copies, StoreError<F::Error>> {
        let [Place { part, .. }, _] = self.places;
        if contents.len() > self.room {
            return Err(StoreError::TooLong { part, length: contents.len(), room: self.room });
        }
        let survey = self.survey(flash)?;
        let before = survey.best.map_or(0, |(_, header)| header.sequence);
        let sequence = before.checked_add(1).ok_or(StoreError::UsedUp { part })?;
        let header = Header::of(part, version, sequence, counter, contents);
        let last = self.other_than(survey.other);
        let first = write_one(flash, survey.other, &header, contents);
        if first.is_err() && survey.best.is_some() {
            return first.map(|()| Copies::None);
        }
        match (first, write_one(flash, last, &header, contents)) {
            (Ok(()), Ok(())) => Ok(Copies::Two),
            (Err(error), Err(_)) => Err(error),
            _ => Ok(Copies::One),
        }
    }

    fn other_than(&self, place: Place) -> Place {
        let [a, b] = self.places;
        if place == a { b } else { a }
    }

    /// Makes the second copy good again from the first.
    pub(super) fn repair<F: NorFlash>(&self, flash: &mut F) -> Result<Copies, StoreError<F::Error>> {
        let survey = self.survey(flash)?;
        match survey.best {
            Some((place, header)) if survey.copies == Copies::One => {
                let to = survey.other;
                frame::erase(flash, to.part, to.at, to.length)?;
                frame::copy(flash, place, to, &header)?;
                Ok(Copies::Two)
            }
            _ => Ok(survey.copies),
        }
    }

    /// Erases both copies, the good one last.
    pub(super) fn forget<F: NorFlash>(&self, flash: &mut F) -> Result<(), StoreError<F::Error>> {
        let [first, _] = self.places;
        let first = self.survey(flash).map_or(first, |survey| survey.other);
        let last = self.other_than(first);
        frame::erase(flash, first.part, first.at, first.length)?;
        frame::erase(flash, last.part, last.at, last.length)
    }
}

fn write_one<F: NorFlash>(
    flash: &mut F,
    place: Place,
    header: &Header,
    contents: &[u8],
) -> Result<(), StoreError<F::Error>> {
    frame::erase(flash, place.part, place.at, place.length)?;
    frame::write(flash, place, header, contents)
}

/// Reads the contents of a frame that was found good.
pub(super) fn read_contents<F: NorFlash>(
    flash: &mut F,
    place: Place,
    header: &Header,
    buffer: &mut [u8],
) -> Result<Contents, StoreError<F::Error>> {
    let (part, length, room) = (place.part, usize::from(header.length), buffer.len());
    if length > room {
        return Err(StoreError::TooLong { part, length, room });
    }
    if !frame::read(flash, place, header, buffer)? {
        return Err(StoreError::ReadBack { part });
    }
    Ok(Contents { version: header.version, length })
}
