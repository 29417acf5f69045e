//! One stored item: header, contents, and a last word that is programmed when all before it has been read back.
//!
//! | offset | bytes | content |
//! |---|---|---|
//! | 0 | 4 | mark `EVB` and a letter for the part |
//! | 4 | 2 | version of the contents |
//! | 6 | 2 | length of the contents |
//! | 8 | 4 | sequence number: of two frames of a part the larger is newer |
//! | 12 | 4 | calibration counter when the frame was written |
//! | 16 | 4 | CRC-32 (ISO-HDLC) of the 16 bytes before and of the contents |
//! | 20 | | contents, filled up with ones to a whole word |
//! | | 1 word | all zeros: the frame is complete. Every bit must have fallen, the farthest from an erased word |

use super::error::{Part, Step, StoreError};
use embedded_storage::nor_flash::NorFlash;

/// Bytes of a frame's header.
pub(super) const HEADER_LENGTH: usize = 20;
/// Bytes read or written at once: a multiple of every accepted word size.
const CHUNK: usize = 64;
/// Bytes read to look at a header; no frame is shorter.
const FIRST: usize = 32;
const CRC: crc::Crc<u32> = crc::Crc::<u32>::new(&crc::CRC_32_ISO_HDLC);

/// Bytes that a frame of `length` bytes of contents takes in a flash with words of `word` bytes.
pub(super) const fn frame_length(length: usize, word: usize) -> u32 {
    let frame = (HEADER_LENGTH + length).next_multiple_of(word) + word;
    (if frame < FIRST { FIRST } else { frame }) as u32
}

/// Where a frame is or may be.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Place {
    pub part: Part,
    pub at: u32,
    pub length: u32,
}

/// What a frame says about itself.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Header {
    pub version: u16,
    pub length: u16,
    pub sequence: u32,
    pub counter: u32,
    checksum: u32,
}

/// What a place holds.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Found<E> {
    Blank,
    Damaged,
    Unreadable(E),
    Frame(Header),
}

impl<E> Found<E> {
    pub(super) fn header(&self) -> Option<Header> {
        if let Self::Frame(header) = self { Some(*header) } else { None }
    }
}

impl Header {
    /// The header of a frame with these contents.
    pub(super) fn of(part: Part, version: u16, sequence: u32, counter: u32, contents: &[u8]) -> Self {
        let mut header = Self { version, length: contents.len() as u16, sequence, counter, checksum: 0 };
        let mut sum = CRC.digest();
        sum.update(&header.start(part));
        sum.update(contents);
        header.checksum = sum.finalize();
        header
    }

    fn start(&self, part: Part) -> [u8; 16] {
        let [v0, v1] = self.version.to_le_bytes();
        let [l0, l1] = self.length.to_le_bytes();
        let [s0, s1, s2, s3] = self.sequence.to_le_bytes();
        let [c0, c1, c2, c3] = self.counter.to_le_bytes();
        [b'E', b'V', b'B', letter(part), v0, v1, l0, l1, s0, s1, s2, s3, c0, c1, c2, c3]
    }

    fn decode(bytes: &[u8; FIRST], part: Part) -> Option<Self> {
        let [b'E', b'V', b'B', mark, v0, v1, l0, l1, s0, s1, s2, s3, c0, c1, c2, c3, k0, k1, k2, k3, ..] = *bytes
        else {
            return None;
        };
        (mark == letter(part)).then_some(Self {
            version: u16::from_le_bytes([v0, v1]),
            length: u16::from_le_bytes([l0, l1]),
            sequence: u32::from_le_bytes([s0, s1, s2, s3]),
            counter: u32::from_le_bytes([c0, c1, c2, c3]),
            checksum: u32::from_le_bytes([k0, k1, k2, k3]),
        })
    }

    /// Bytes of header and contents in whole words: where the last word stands.
    fn body(&self, word: usize) -> u32 {
        (HEADER_LENGTH + usize::from(self.length)).next_multiple_of(word) as u32
    }
}

const fn letter(part: Part) -> u8 {
    match part {
        Part::Record => b'R',
        Part::Settings => b'S',
        Part::Totals => b'T',
        Part::Events => b'E',
    }
}

/// Reads `length` bytes from `at` in chunks, as long as `visit` says go on; whether it always did.
fn chunks<F: NorFlash>(
    flash: &mut F,
    at: u32,
    length: u32,
    mut visit: impl FnMut(&[u8]) -> bool,
) -> Result<bool, F::Error> {
    let mut buffer = [0; CHUNK];
    let mut done = 0;
    while done < length {
        let size = (length - done).min(CHUNK as u32);
        let Some(part) = buffer.get_mut(..size as usize) else { break };
        flash.read(at + done, part)?;
        if !visit(part) {
            return Ok(false);
        }
        done += size;
    }
    Ok(true)
}

fn all<F: NorFlash>(flash: &mut F, at: u32, length: u32, value: u8) -> Result<bool, F::Error> {
    chunks(flash, at, length, |part| part.iter().all(|&byte| byte == value))
}

/// Whether header and contents in the flash are those that `header` describes; hands the contents to `each`.
fn intact<F: NorFlash>(
    flash: &mut F,
    place: Place,
    header: &Header,
    mut each: impl FnMut(u8),
) -> Result<bool, F::Error> {
    let mut sum = CRC.digest();
    sum.update(&header.start(place.part));
    let mut stored = [0_u8; HEADER_LENGTH];
    let mut places = stored.iter_mut();
    let mut left = usize::from(header.length);
    chunks(flash, place.at, header.body(F::WRITE_SIZE), |part| {
        let mut bytes = part.iter();
        for (to, from) in (&mut places).zip(&mut bytes) {
            *to = *from;
        }
        let contents = bytes.as_slice();
        let contents = contents.get(..left.min(contents.len())).unwrap_or(contents);
        left -= contents.len();
        sum.update(contents);
        contents.iter().for_each(|&byte| each(byte));
        true
    })?;
    let start = stored.first_chunk() == Some(&header.start(place.part));
    let end = stored.last_chunk() == Some(&header.checksum.to_le_bytes());
    Ok(start && end && sum.finalize() == header.checksum)
}

fn complete<F: NorFlash>(flash: &mut F, place: Place, header: &Header) -> Result<bool, F::Error> {
    all(flash, place.at + header.body(F::WRITE_SIZE), F::WRITE_SIZE as u32, 0)
}

/// Looks at what a place holds.
pub(super) fn inspect<F: NorFlash>(flash: &mut F, place: Place) -> Found<F::Error> {
    try_inspect(flash, place).unwrap_or_else(Found::Unreadable)
}

fn try_inspect<F: NorFlash>(flash: &mut F, place: Place) -> Result<Found<F::Error>, F::Error> {
    let mut first = [0; FIRST];
    flash.read(place.at, &mut first)?;
    let Some(header) = Header::decode(&first, place.part) else {
        return Ok(if all(flash, place.at, place.length, 0xFF)? { Found::Blank } else { Found::Damaged });
    };
    let fits = header.body(F::WRITE_SIZE) + F::WRITE_SIZE as u32 <= place.length;
    let good = fits && complete(flash, place, &header)? && intact(flash, place, &header, |_| ())?;
    Ok(if good { Found::Frame(header) } else { Found::Damaged })
}

/// Reads the contents of the frame that `inspect` found into `buffer`, which is long enough; whether they are intact.
pub(super) fn read<F: NorFlash>(
    flash: &mut F,
    place: Place,
    header: &Header,
    buffer: &mut [u8],
) -> Result<bool, StoreError<F::Error>> {
    let mut places = buffer.iter_mut();
    let fill = |byte| {
        if let Some(to) = places.next() {
            *to = byte;
        }
    };
    intact(flash, place, header, fill).map_err(|error| failed(place.part, Step::Read, error))
}

/// Writes a frame to erased flash and reads it back.
pub(super) fn write<F: NorFlash>(
    flash: &mut F,
    place: Place,
    header: &Header,
    contents: &[u8],
) -> Result<(), StoreError<F::Error>> {
    let sum = header.checksum.to_le_bytes();
    let start = header.start(place.part);
    let mut bytes = start.iter().chain(&sum).chain(contents);
    let next = |_, part: &mut [u8], _: &mut F| {
        part.iter_mut().zip(&mut bytes).for_each(|(to, from)| *to = *from);
        Ok(())
    };
    write_body(flash, place, header, next)
}

/// Copies the frame at `from` to erased flash and reads it back.
pub(super) fn copy<F: NorFlash>(
    flash: &mut F,
    from: Place,
    to: Place,
    header: &Header,
) -> Result<(), StoreError<F::Error>> {
    let next = |offset, part: &mut [u8], flash: &mut F| flash.read(from.at + offset, part);
    write_body(flash, to, header, next)
}

/// Writes a frame's body from what `next` puts into each chunk, compares it, then writes the last word.
fn write_body<F: NorFlash>(
    flash: &mut F,
    place: Place,
    header: &Header,
    mut next: impl FnMut(u32, &mut [u8], &mut F) -> Result<(), F::Error>,
) -> Result<(), StoreError<F::Error>> {
    let reading = |error| failed(place.part, Step::Read, error);
    let writing = |error| failed(place.part, Step::Write, error);
    let body = header.body(F::WRITE_SIZE);
    let mut done = 0;
    while done < body {
        let mut buffer = [0xFF; CHUNK];
        let size = (body - done).min(CHUNK as u32);
        let Some(part) = buffer.get_mut(..size as usize) else { break };
        next(done, part, flash).map_err(reading)?;
        flash.write(place.at + done, part).map_err(writing)?;
        done += size;
    }
    let worn = StoreError::ReadBack { part: place.part };
    if !intact(flash, place, header, |_| ()).map_err(reading)? {
        return Err(worn);
    }
    let last = [0; FIRST];
    flash.write(place.at + body, last.get(..F::WRITE_SIZE).unwrap_or(&last)).map_err(writing)?;
    if complete(flash, place, header).map_err(reading)? { Ok(()) } else { Err(worn) }
}

/// Erases the pages from `at`.
pub(super) fn erase<F: NorFlash>(flash: &mut F, part: Part, at: u32, length: u32) -> Result<(), StoreError<F::Error>> {
    flash.erase(at, at + length).map_err(|error| failed(part, Step::Erase, error))
}

/// The error of a flash that refused.
pub(super) const fn failed<E>(part: Part, step: Step, error: E) -> StoreError<E> {
    StoreError::Flash { part, step, error }
}
