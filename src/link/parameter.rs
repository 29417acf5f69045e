//! Parameters of a command: numbers with units and limits, choices, switches, strings, blocks.
//!
//! Every reader takes the next parameter and returns the standard's error when it is missing (-109) or of another type
//! (-104), so a handler reads all its parameters first and acts only then.

use super::decimal::Decimal;
use super::error::LinkError;
use super::header::{Suffixes, is_word};
use super::lexer::{block, cut, trim, trim_start};
use super::unit::{Unit, in_si};
use core::ops::RangeInclusive;
use heapless::String;

/// Most characters of a mnemonic.
const MOST_CHARACTERS: usize = 12;

/// What a numeric parameter may be, in SI.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Numeric {
    /// Units it may carry; of [`super::unit`], or a table of one's own.
    pub units: &'static [Unit],
    /// Smallest value, what `MINimum` means.
    pub least: f32,
    /// Largest value, what `MAXimum` means.
    pub most: f32,
    /// What `DEFault` means.
    pub default: f32,
}

impl Numeric {
    /// The limit a word names.
    fn limit(&self, word: &[u8]) -> Option<f32> {
        let limits = [("MINimum", self.least), ("MAXimum", self.most), ("DEFault", self.default)];
        limits.into_iter().find(|(name, _)| is_word(name.as_bytes(), word)).map(|(_, limit)| limit)
    }
}

/// The parameters of one command, read from left to right.
///
/// ```
/// use evenbore::link::{Arguments, LinkError, Numeric, unit};
/// const DROP: Numeric = Numeric { units: unit::PRESSURE, least: 0.0, most: 5e3, default: 1e3 };
/// let mut arguments = Arguments::new(b"2.5 kPa, MAX, on, \"say \"\"so\"\"\", 9e9");
/// assert_eq!(arguments.number(&DROP)?, 2500.0);
/// assert_eq!(arguments.number(&DROP)?, 5000.0);
/// assert!(arguments.boolean()?);
/// assert_eq!(arguments.string::<16>()?, "say \"so\"");
/// assert_eq!(arguments.number(&DROP), Err(LinkError::DataOutOfRange));
/// assert_eq!(arguments.boolean(), Err(LinkError::MissingParameter));
/// # Ok::<(), LinkError>(())
/// ```
#[derive(Debug, Clone)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Arguments<'a> {
    rest: Option<&'a [u8]>,
    suffixes: Suffixes,
    port: u8,
}

impl<'a> Arguments<'a> {
    /// The parameters in `text`, which stand between a header and the end of its unit.
    pub fn new(text: &'a [u8]) -> Self {
        let text = trim_start(text);
        Self { rest: (!text.is_empty()).then_some(text), suffixes: Suffixes::new(), port: 0 }
    }

    /// The same parameters after a header with `suffixes`, come in at `port`.
    pub(crate) fn of(self, suffixes: Suffixes, port: u8) -> Self {
        Self { suffixes, port, ..self }
    }

    /// The port at which the message came in.
    pub const fn port(&self) -> u8 {
        self.port
    }

    /// Whether no parameter is left.
    pub const fn is_empty(&self) -> bool {
        self.rest.is_none()
    }

    /// How many parameters are left.
    ///
    /// # Errors
    /// `InvalidString` or `InvalidBlock` when one does not end.
    pub fn count(&self) -> Result<usize, LinkError> {
        let (mut rest, mut count) = (self.rest, 0);
        while let Some(text) = rest {
            rest = cut(text, b',')?.1;
            count += 1;
        }
        Ok(count)
    }

    /// The number that stands for the pattern's `#` of this place, counted from 0; 1 when it was left out.
    ///
    /// # Errors
    /// `HeaderSuffix` outside `range`.
    pub fn suffix(&self, place: usize, range: RangeInclusive<u16>) -> Result<u16, LinkError> {
        let suffix = self.suffixes.get(place).copied().unwrap_or(1);
        if range.contains(&suffix) { Ok(suffix) } else { Err(LinkError::HeaderSuffix) }
    }

    /// A number in SI, converted from its unit, or one of its limits by name.
    ///
    /// # Errors
    /// `DataOutOfRange` outside the limits, `InvalidSuffix`, `SuffixNotAllowed`, or what [`Decimal::read`] finds.
    pub fn number(&mut self, numeric: &Numeric) -> Result<f32, LinkError> {
        let text = self.next()?;
        if text.first().is_some_and(u8::is_ascii_alphabetic) {
            return numeric.limit(text).ok_or(LinkError::DataType);
        }
        let (number, suffix) = Decimal::read(of_number(text)?)?;
        let value = in_si(number, suffix, numeric.units)?;
        if value >= numeric.least && value <= numeric.most { Ok(value) } else { Err(LinkError::DataOutOfRange) }
    }

    /// The limit a query asks for, as in `...? MAX`; `None` when it asks for the setting.
    ///
    /// # Errors
    /// `DataType` for any other parameter.
    pub fn limit(&mut self, numeric: &Numeric) -> Result<Option<f32>, LinkError> {
        if self.is_empty() {
            return Ok(None);
        }
        numeric.limit(self.next()?).map(Some).ok_or(LinkError::DataType)
    }

    /// An integer; a number with decimals is rounded.
    ///
    /// # Errors
    /// `DataOutOfRange` outside `range`, `SuffixNotAllowed`, or what [`Decimal::read`] finds.
    pub fn integer(&mut self, range: RangeInclusive<i32>) -> Result<i32, LinkError> {
        let (number, suffix) = Decimal::read(of_number(self.next()?)?)?;
        in_si(number, suffix, &[])?;
        number.integer().filter(|value| range.contains(value)).ok_or(LinkError::DataOutOfRange)
    }

    /// `ON`, `OFF`, or a number, which is on unless it rounds to 0.
    ///
    /// # Errors
    /// `InvalidCharacterData` for another word.
    pub fn boolean(&mut self) -> Result<bool, LinkError> {
        let mut ahead = self.clone();
        if ahead.next()?.first().is_some_and(u8::is_ascii_alphabetic) {
            return Ok(self.choice(&["OFF", "ON"])? == 1);
        }
        Ok(self.integer(i32::MIN..=i32::MAX)? != 0)
    }

    /// The place among `words` of a mnemonic in its short or long form.
    ///
    /// # Errors
    /// `InvalidCharacterData` for a mnemonic that is not among them.
    pub fn choice(&mut self, words: &[&str]) -> Result<usize, LinkError> {
        let text = self.next()?;
        if !text.first().is_some_and(u8::is_ascii_alphabetic) {
            return Err(LinkError::DataType);
        }
        if text.len() > MOST_CHARACTERS {
            return Err(LinkError::CharacterDataTooLong);
        }
        words.iter().position(|word| is_word(word.as_bytes(), text)).ok_or(LinkError::InvalidCharacterData)
    }

    /// The text between quotes, of which a doubled one is one.
    ///
    /// # Errors
    /// `TooMuchData` beyond `N` bytes, `InvalidString` for what is not printable ASCII.
    pub fn string<const N: usize>(&mut self) -> Result<String<N>, LinkError> {
        let text = self.next()?;
        let (quote, mut rest) = match text {
            [quote @ (b'"' | b'\''), rest @ ..] => (*quote, rest),
            _ => return Err(LinkError::DataType),
        };
        let mut string = String::new();
        while let [byte, after @ ..] = rest {
            rest = match after {
                [] if *byte == quote => return Ok(string),
                [next, after @ ..] if *byte == quote && *next == quote => after,
                _ if *byte == quote || !(b' '..=b'~').contains(byte) => return Err(LinkError::InvalidString),
                _ => after,
            };
            string.push(char::from(*byte)).map_err(|_| LinkError::TooMuchData)?;
        }
        Err(LinkError::InvalidString)
    }

    /// The bytes of a block of definite length, `#3123...`.
    ///
    /// # Errors
    /// `InvalidBlock` when its length is not what it says.
    pub fn block(&mut self) -> Result<&'a [u8], LinkError> {
        let [b'#', rest @ ..] = self.next()? else { return Err(LinkError::DataType) };
        let (prefix, data) = block(rest)?.ok_or(LinkError::DataType)?;
        if prefix + data.len() == rest.len() { Ok(data) } else { Err(LinkError::InvalidBlock) }
    }

    fn next(&mut self) -> Result<&'a [u8], LinkError> {
        let (text, rest) = cut(self.rest.ok_or(LinkError::MissingParameter)?, b',')?;
        self.rest = rest;
        let text = trim_start(text);
        // A block may end in what looks like white space.
        let text = if let [b'#', b'0'..=b'9', ..] = text { of_block(text) } else { trim(text) };
        match text {
            [] => Err(LinkError::MissingParameter),
            [b'(', ..] => Err(LinkError::ExpressionNotAllowed),
            _ => Ok(text),
        }
    }
}

/// Without the white space after a block.
fn of_block(text: &[u8]) -> &[u8] {
    let length =
        text.get(1..).and_then(|rest| block(rest).ok().flatten()).map_or(0, |(prefix, data)| 1 + prefix + data.len());
    match text.split_at_checked(length) {
        Some((block, rest)) if trim(rest).is_empty() => block,
        _ => text,
    }
}

/// Accepts what can be a number: nothing in quotes, no block.
const fn of_number(text: &[u8]) -> Result<&[u8], LinkError> {
    match text {
        [b'"' | b'\'', ..] | [b'#', b'0'..=b'9', ..] | [b'A'..=b'Z' | b'a'..=b'z', ..] => Err(LinkError::DataType),
        _ => Ok(text),
    }
}
