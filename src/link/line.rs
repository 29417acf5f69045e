//! Collects bytes into a message: a line ended by LF, in bounded memory, whatever arrives.
//!
//! A block (`#` and its length) may hold any byte, LF too. A line that does not fit is swallowed to its end and
//! refused as a whole, and so is one with a byte outside ASCII, which on a serial line means damage: nothing of it is
//! executed. Half a line for ever costs nothing but the line's memory.
//!
//! A block whose bytes do not come keeps the line waiting for at most 65 535 bytes. An instrument that talks to a
//! person or over a noisy line calls [`Line::clear`] when half a line has been silent for some seconds.

use super::error::LinkError;
use heapless::Vec;

/// Longest block whose bytes are counted although they do not fit; a longer one is noise, and ends at the next LF.
const LONGEST_SKIPPED: u32 = 65_535;

/// What the next byte belongs to.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Inside {
    Plain,
    Quotes(u8),
    Sign,
    Length { digits: u8, length: u32 },
    Block { left: u32 },
}

/// A line being collected, of at most `N` bytes without its LF.
///
/// ```
/// use evenbore::link::{Line, LinkError};
/// let mut line = Line::<8>::new();
/// assert!(b"*IDN?\r".iter().all(|&byte| line.push(byte).is_none()));
/// assert_eq!(line.push(b'\n'), Some(Ok(())));
/// assert_eq!(line.bytes(), b"*IDN?\r");
/// assert!(b"MEASURE:FLOW?".iter().all(|&byte| line.push(byte).is_none()));
/// assert_eq!(line.push(b'\n'), Some(Err(LinkError::InputOverrun)));
/// ```
#[derive(Debug, Clone)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Line<const N: usize> {
    bytes: Vec<u8, N>,
    inside: Inside,
    complete: bool,
    fault: Option<LinkError>,
}

impl<const N: usize> Line<N> {
    /// An empty line.
    pub const fn new() -> Self {
        Self { bytes: Vec::new(), inside: Inside::Plain, complete: false, fault: None }
    }

    /// Takes one byte; at the end of a line tells whether it may be executed.
    ///
    /// The bytes stay readable until the next byte is taken.
    pub fn push(&mut self, byte: u8) -> Option<Result<(), LinkError>> {
        if self.complete {
            self.clear();
        }
        let in_block = matches!(self.inside, Inside::Block { .. });
        if byte == b'\n' && !in_block {
            self.complete = true;
            self.inside = Inside::Plain;
            return Some(self.fault.map_or(Ok(()), Err));
        }
        if byte >= 0x7F && !in_block {
            self.fault.get_or_insert(LinkError::InvalidCharacter);
        }
        self.follow(byte);
        if self.bytes.push(byte).is_err() {
            self.fault.get_or_insert(LinkError::InputOverrun);
        }
        None
    }

    /// The bytes of the line, without its LF; of a refused line, what fitted.
    pub fn bytes(&self) -> &[u8] {
        &self.bytes
    }

    /// Forgets what was collected: a device clear, a break on the line, a client gone.
    pub fn clear(&mut self) {
        *self = Self::new();
    }

    fn follow(&mut self, byte: u8) {
        self.inside = match (self.inside, byte) {
            (Inside::Quotes(quote), _) if byte != quote => Inside::Quotes(quote),
            (Inside::Quotes(_), _) => Inside::Plain,
            (Inside::Block { left: 0 | 1 }, _) => Inside::Plain,
            (Inside::Block { left }, _) => Inside::Block { left: left - 1 },
            (Inside::Sign, b'1'..=b'9') => Inside::Length { digits: byte - b'0', length: 0 },
            (Inside::Length { digits, length }, b'0'..=b'9') => counted(digits, length * 10 + u32::from(byte - b'0')),
            (_, b'"' | b'\'') => Inside::Quotes(byte),
            (_, b'#') => Inside::Sign,
            _ => Inside::Plain,
        }
    }
}

/// After one more digit of a block's length; at most nine come, so that they fit 32 bits.
const fn counted(digits: u8, length: u32) -> Inside {
    match (digits, length) {
        (2.., _) => Inside::Length { digits: digits - 1, length },
        (_, 1..=LONGEST_SKIPPED) => Inside::Block { left: length },
        _ => Inside::Plain,
    }
}

impl<const N: usize> Default for Line<N> {
    fn default() -> Self {
        Self::new()
    }
}
