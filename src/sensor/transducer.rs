//! Transducers on a bus: bytes to a raw word, the word's status bits and counts, counts to a quantity.

use super::fault::Fault;
use super::levels::Levels;
use super::transfer::Transfer;
use crate::error::{Error, within};
use crate::quantity::Quantity;

/// Most bytes of a word.
pub const MOST_BYTES: usize = 4;
/// Most bits of the counts; more would not fit a single-precision number exactly.
pub const MOST_BITS: u8 = 24;

/// Order of the bytes on the bus.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum ByteOrder {
    /// Most significant byte first.
    BigEndian,
    /// Least significant byte first.
    LittleEndian,
}

/// A word as the transducer sent it; it means nothing without its [`WordFormat`].
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct RawWord(u32);

impl RawWord {
    /// The bits of the word.
    pub const fn bits(self) -> u32 {
        self.0
    }
}

/// Status bits of a word, and which of their values mean what; any other value is a fault the sensor reports.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct StatusBits {
    /// The bits of the word that are status.
    pub mask: u32,
    /// Their value in a fresh, good word.
    pub good: u32,
    /// Their value in a word that was already fetched, where the transducer tells.
    pub stale: Option<u32>,
}

/// How a word is built: bytes, counts, status.
///
/// ```
/// use evenbore::sensor::Fault;
/// use evenbore::sensor::transducer::{ByteOrder, StatusBits, WordFormat};
/// // Two status bits above 14 bits of counts: a form that many pressure transducers share.
/// let status = StatusBits { mask: 0xC000, good: 0x0000, stale: Some(0x8000) };
/// let format = WordFormat::new(2, 14, ByteOrder::BigEndian)?.with_status(status)?;
/// let word = format.word(&[0x06, 0x66]).ok_or("two bytes")?;
/// assert_eq!(format.counts(word), Ok(1638));
/// let old = format.word(&[0x86, 0x66]).ok_or("two bytes")?;
/// assert_eq!(format.counts(old), Err(Fault::Stale));
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct WordFormat {
    bytes: u8,
    bits: u8,
    shift: u8,
    signed: bool,
    order: ByteOrder,
    status: StatusBits,
}

impl WordFormat {
    /// A word of `bytes` whose lowest `bits` are the counts, unsigned and without status.
    ///
    /// # Errors
    /// Names the number of bytes (1 to 4) or of bits (2 to 24, and no more than the bytes hold).
    pub fn new(bytes: u8, bits: u8, order: ByteOrder) -> Result<Self, Error> {
        within("bytes of the word", f32::from(bytes), 1.0, MOST_BYTES as f32)?;
        let room = bytes.saturating_mul(8).min(MOST_BITS);
        within("bits of the counts", f32::from(bits), 2.0, f32::from(room))?;
        let status = StatusBits { mask: 0, good: 0, stale: None };
        Ok(Self { bytes, bits, shift: 0, signed: false, order, status })
    }

    /// The same word with the counts `shift` bits above its lowest bit.
    ///
    /// # Errors
    /// Names the shift when the counts then exceed the word.
    pub fn with_shift(self, shift: u8) -> Result<Self, Error> {
        let room = self.bytes.saturating_mul(8).saturating_sub(self.bits);
        within("shift of the counts (bits)", f32::from(shift), 0.0, f32::from(room))?;
        Ok(Self { shift, ..self })
    }

    /// The same word with counts in two's complement.
    pub fn signed(self) -> Self {
        Self { signed: true, ..self }
    }

    /// The same word with status bits.
    ///
    /// # Errors
    /// Names the mask when it overlaps the counts or exceeds the word, and a value that its mask does not hold.
    pub fn with_status(self, status: StatusBits) -> Result<Self, Error> {
        let spare = u32::MAX.wrapping_shr(32_u32.saturating_sub(u32::from(self.bytes).saturating_mul(8)));
        let free = spare & !self.field().wrapping_shl(u32::from(self.shift));
        let unknown =
            |field, value: u32| Error::OutOfRange { field, value: value as f32, least: 0.0, most: free as f32 };
        if status.mask & !free != 0 {
            return Err(unknown("mask of the status bits", status.mask));
        }
        if status.good & !status.mask != 0 {
            return Err(unknown("good status", status.good));
        }
        match status.stale {
            Some(stale) if stale & !status.mask != 0 || stale == status.good => Err(unknown("stale status", stale)),
            _ => Ok(Self { status, ..self }),
        }
    }

    /// Bytes of a word.
    pub const fn length(&self) -> usize {
        self.bytes as usize
    }

    /// Smallest and largest counts the word can carry.
    pub const fn span(&self) -> [i32; 2] {
        let most = self.field() as i32;
        if self.signed { [-(most >> 1) - 1, most >> 1] } else { [0, most] }
    }

    /// A word from the bytes of the bus; nothing when their number is not that of the format.
    pub fn word(&self, bytes: &[u8]) -> Option<RawWord> {
        let join = |word: u32, byte: &u8| word.wrapping_shl(8) | u32::from(*byte);
        let word = match self.order {
            ByteOrder::BigEndian => bytes.iter().fold(0, join),
            ByteOrder::LittleEndian => bytes.iter().rev().fold(0, join),
        };
        (bytes.len() == self.length()).then_some(RawWord(word))
    }

    /// The counts of a word whose status is good.
    ///
    /// # Errors
    /// [`Fault::Stale`] or [`Fault::Reported`] by the status bits.
    pub fn counts(&self, raw: RawWord) -> Result<i32, Fault> {
        let status = raw.0 & self.status.mask;
        if Some(status) == self.status.stale {
            return Err(Fault::Stale);
        }
        if status != self.status.good {
            return Err(Fault::Reported);
        }
        let unsigned = raw.0.wrapping_shr(u32::from(self.shift)) & self.field();
        let above = 32_u32.saturating_sub(u32::from(self.bits));
        let extended = (unsigned.wrapping_shl(above) as i32).wrapping_shr(above);
        Ok(if self.signed { extended } else { unsigned as i32 })
    }

    /// The counts' bits, at the lower end of a word.
    const fn field(&self) -> u32 {
        1_u32.wrapping_shl(self.bits as u32).wrapping_sub(1)
    }
}

/// A transducer: the format of its word, its transfer function and its signal levels.
///
/// ```
/// use evenbore::quantity::PressureDrop;
/// use evenbore::sensor::Transducer;
/// use evenbore::sensor::transducer::{ByteOrder, WordFormat};
/// let format = WordFormat::new(2, 14, ByteOrder::BigEndian)?;
/// let (low, high) = (PressureDrop::from_pascals(-500.0), PressureDrop::from_pascals(500.0));
/// let transducer = Transducer::new(format, (1638, low), (14745, high))?;
/// let raw = format.word(&0x2000_u16.to_be_bytes()).ok_or("two bytes")?;
/// assert!((transducer.read(raw)?.as_pascals() - 0.038).abs() < 1e-3);
/// # Ok::<(), Box<dyn core::error::Error>>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Transducer<Q> {
    format: WordFormat,
    transfer: Transfer<Q>,
    levels: Levels,
}

impl<Q: Quantity> Transducer<Q> {
    /// A transducer that gives the counts `low.0` at the quantity `low.1` and `high.0` at `high.1`. The two end codes
    /// of its word are taken for saturation; a bus that nobody drives reads as one of them.
    ///
    /// # Errors
    /// Names the counts that the word cannot carry, and what the transfer function refuses.
    pub fn new(format: WordFormat, low: (i32, Q), high: (i32, Q)) -> Result<Self, Error> {
        let [least, most] = format.span().map(|counts| counts as f32);
        within("counts at the low end", low.0 as f32, least, most)?;
        within("counts at the high end", high.0 as f32, least, most)?;
        let transfer = Transfer::new((low.0 as f32, low.1), (high.0 as f32, high.1))?;
        Ok(Self { format, transfer, levels: Levels::measured(least + 1.0, most - 1.0)? })
    }

    /// The same transducer with levels of its own, in counts.
    pub fn with_levels(self, levels: Levels) -> Self {
        Self { levels, ..self }
    }

    /// The format of its word.
    pub const fn format(&self) -> &WordFormat {
        &self.format
    }

    /// The quantity that a word stands for.
    ///
    /// # Errors
    /// The fault that the status bits or the signal level say.
    pub fn read(&self, raw: RawWord) -> Result<Q, Fault> {
        let counts = self.format.counts(raw)?;
        Ok(self.transfer.apply(self.levels.judge(counts as f32)?))
    }
}
