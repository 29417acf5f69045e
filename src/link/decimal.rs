//! Decimal numbers as a message carries them, read without the parser of `core`.
//!
//! Reads the flexible form of IEEE 488.2 (7.7.2): sign, digits with or without a point, exponent after optional white
//! space; and the binary, octal and hexadecimal forms (7.7.4). The nearest f32 results when the number has at most 19
//! digits, is not within 2^-35 of a unit in the last place of a tie, and mostly even then; at worst its neighbour.

use super::binary::Binary;
use super::error::LinkError;
use super::lexer::trim;

/// Most digits of a number.
const MOST_DIGITS: usize = 255;
/// Largest exponent that may be written.
const MOST_EXPONENT: i32 = 32_000;

/// A decimal number `digits 10^exponent`, before it is rounded to anything.
///
/// ```
/// use evenbore::link::Decimal;
/// let (number, rest) = Decimal::read(b"-1.25E3 KPA")?;
/// assert_eq!((number.single(0), rest), (-1250.0, &b"KPA"[..]));
/// assert_eq!(number.single(3), -1.25e6); // kilo
/// # Ok::<(), evenbore::link::LinkError>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Decimal {
    negative: bool,
    digits: u64,
    exponent: i32,
}

impl Decimal {
    /// Reads a number from the start of `text` and returns what follows it, without the white space between.
    ///
    /// # Errors
    /// `InvalidCharacterInNumber` where no digit stands, `TooManyDigits` beyond 255, `ExponentTooLarge` beyond 32000.
    pub fn read(text: &[u8]) -> Result<(Self, &[u8]), LinkError> {
        if let Some((radix, digits)) = radix_of(text) {
            return based(radix, digits);
        }
        let (negative, text) = sign(text);
        let mut number = Self { negative, digits: 0, exponent: 0 };
        let rest = number.mantissa(text)?;
        let rest = number.power(trim(rest))?;
        Ok((number, trim(rest)))
    }

    /// The f32 nearest to this number times a power of ten; infinite when too large.
    pub fn single(self, power: i32) -> f32 {
        let magnitude = Binary::new(self.digits, 0).times_ten_to(self.exponent.saturating_add(power)).single();
        if self.negative { -magnitude } else { magnitude }
    }

    /// The nearest integer; `None` when it is beyond an i32.
    pub fn integer(self) -> Option<i32> {
        let magnitude = match self.exponent {
            0 => self.digits,
            power => Binary::new(self.digits, 0).times_ten_to(power).integer(),
        };
        let magnitude = i64::try_from(magnitude).ok()?;
        i32::try_from(if self.negative { -magnitude } else { magnitude }).ok()
    }

    /// Takes digits and a point from the start of `text`.
    fn mantissa<'a>(&mut self, text: &'a [u8]) -> Result<&'a [u8], LinkError> {
        let (mut count, mut point) = (0, false);
        let mut rest = text;
        while let [byte, after @ ..] = rest {
            match byte {
                b'0'..=b'9' => {
                    count += 1;
                    self.digit(byte - b'0', point);
                }
                b'.' if !point => point = true,
                _ => break,
            }
            rest = after;
        }
        match count {
            0 => Err(LinkError::InvalidCharacterInNumber),
            1..=MOST_DIGITS => Ok(rest),
            _ => Err(LinkError::TooManyDigits),
        }
    }

    /// Appends a digit; those that no longer fit only move the point.
    fn digit(&mut self, digit: u8, after_point: bool) {
        let fits = self.digits < u64::MAX / 10;
        if fits {
            self.digits = self.digits * 10 + u64::from(digit);
        }
        self.exponent += i32::from(!fits) - i32::from(after_point);
    }

    /// Takes an exponent from the start of `text` if one stands there; a unit may begin with E too.
    fn power<'a>(&mut self, text: &'a [u8]) -> Result<&'a [u8], LinkError> {
        let [b'E' | b'e', after @ ..] = text else { return Ok(text) };
        let (negative, mut rest) = sign(after);
        if !matches!(rest, [b'0'..=b'9', ..]) {
            return Ok(text);
        }
        let mut power = 0;
        while let [digit @ b'0'..=b'9', after @ ..] = rest {
            power = power * 10 + i32::from(digit - b'0');
            if power > MOST_EXPONENT {
                return Err(LinkError::ExponentTooLarge);
            }
            rest = after;
        }
        self.exponent += if negative { -power } else { power };
        Ok(rest)
    }
}

fn sign(text: &[u8]) -> (bool, &[u8]) {
    match text {
        [b'-', rest @ ..] => (true, rest),
        [b'+', rest @ ..] => (false, rest),
        _ => (false, text),
    }
}

const fn radix_of(text: &[u8]) -> Option<(u32, &[u8])> {
    match text {
        [b'#', b'H' | b'h', rest @ ..] => Some((16, rest)),
        [b'#', b'Q' | b'q', rest @ ..] => Some((8, rest)),
        [b'#', b'B' | b'b', rest @ ..] => Some((2, rest)),
        _ => None,
    }
}

/// A number of another base; it takes no unit.
fn based(radix: u32, text: &[u8]) -> Result<(Decimal, &[u8]), LinkError> {
    if text.is_empty() {
        return Err(LinkError::InvalidCharacterInNumber);
    }
    let mut digits = 0_u64;
    for &byte in text {
        let digit = char::from(byte).to_digit(radix).ok_or(LinkError::InvalidCharacterInNumber)?;
        digits = digits.checked_mul(u64::from(radix)).ok_or(LinkError::TooManyDigits)? + u64::from(digit);
    }
    Ok((Decimal { negative: false, digits, exponent: 0 }, &[]))
}
