//! Numbers as text: `-1.234568E-03` and `12.375`, without the formatting of `core`.
//!
//! Correctly rounded (half to even on an exact tie), but for values within 2^-29 of a unit of the last digit of a tie,
//! which may come out one unit off. Nine digits come back as the same f32.

use super::binary::Binary;
use heapless::String;

/// A number as text.
pub type NumberText = String<16>;

/// Digits that let every f32 come back as itself.
pub const EXACT_DIGITS: u8 = 9;

/// `value` with 1 to 9 significant digits and an exponent (the form NR3 of IEEE 488.2).
///
/// What is not finite is written as SCPI-99 does (volume 1, 7.2.1): 9.9E+37, -9.9E+37, and 9.91E+37 for NaN.
///
/// ```
/// use evenbore::link::number::scientific;
/// assert_eq!(scientific(0.1, 7), "1.000000E-01");
/// assert_eq!(scientific(-0.1, 9), "-1.00000001E-01"); // the f32 nearest to a tenth
/// assert_eq!(scientific(f32::NAN, 7), "9.91E+37");
/// ```
pub fn scientific(value: f32, digits: u8) -> NumberText {
    let digits = digits.clamp(1, EXACT_DIGITS);
    let mut text = NumberText::new();
    if let Some(word) = not_finite(value) {
        put(&mut text, word);
        return text;
    }
    let (number, exponent) = leading(value, digits);
    if value < 0.0 {
        put(&mut text, "-");
    }
    digits_with_point(&mut text, number, digits, digits - 1);
    put(&mut text, if exponent < 0 { "E-" } else { "E+" });
    digits_with_point(&mut text, exponent.unsigned_abs(), 2, 0);
    text
}

/// `value` with 0 to 9 decimals (the form NR2 of IEEE 488.2, NR1 without decimals).
///
/// A value that needs more than nine digits is written by [`scientific`] with seven.
///
/// ```
/// use evenbore::link::number::fixed;
/// assert_eq!(fixed(12.375, 2), "12.38");
/// assert_eq!(fixed(-0.001, 2), "0.00");
/// assert_eq!(fixed(3e12, 1), "3.000000E+12");
/// ```
pub fn fixed(value: f32, decimals: u8) -> NumberText {
    let decimals = decimals.min(EXACT_DIGITS);
    let scaled = Binary::of(value).times_ten_to(i32::from(decimals)).integer();
    let Some(number) = u32::try_from(scaled).ok().filter(|&n| value.is_finite() && n < 1_000_000_000) else {
        return scientific(value, 7);
    };
    let mut text = NumberText::new();
    if value < 0.0 && number > 0 {
        put(&mut text, "-");
    }
    digits_with_point(&mut text, number, decimals + 1, decimals);
    text
}

/// An integer.
///
/// ```
/// use evenbore::link::number::integer;
/// assert_eq!(integer(-40), "-40");
/// ```
pub fn integer(value: i32) -> NumberText {
    let mut text = NumberText::new();
    if value < 0 {
        put(&mut text, "-");
    }
    digits_with_point(&mut text, value.unsigned_abs(), 1, 0);
    text
}

/// The first digits of a finite number as an integer, and the power of ten of the first.
fn leading(value: f32, digits: u8) -> (u32, i32) {
    let binary = Binary::of(value);
    if value == 0.0 {
        return (0, 0);
    }
    let least = 10_u64.pow(u32::from(digits) - 1);
    let exponent = binary.decimal_exponent();
    // The estimate is right or one too small; then, or when rounding up brings one digit more, the next is right.
    [exponent, exponent + 1]
        .into_iter()
        .map(|e| (binary.times_ten_to(i32::from(digits) - 1 - e).integer(), e))
        .find(|&(number, _)| number < least * 10)
        .map_or((least as u32, exponent + 1), |(number, e)| (number as u32, e))
}

const fn not_finite(value: f32) -> Option<&'static str> {
    if value.is_nan() {
        return Some("9.91E+37");
    }
    if value.is_infinite() {
        return Some(if value > 0.0 { "9.9E+37" } else { "-9.9E+37" });
    }
    None
}

/// Writes at least `least` digits, with a point before the last `decimals`.
fn digits_with_point(text: &mut NumberText, number: u32, least: u8, decimals: u8) {
    let mut reversed = [b'0'; 10];
    let (mut rest, mut count) = (number, 0);
    for place in &mut reversed {
        if rest == 0 && count >= least {
            break;
        }
        *place = b'0' + (rest % 10) as u8;
        rest /= 10;
        count += 1;
    }
    for (i, digit) in (0..count).zip(&reversed).rev() {
        let _ = text.push(char::from(*digit));
        if i == decimals && decimals > 0 {
            put(text, ".");
        }
    }
}

fn put(text: &mut NumberText, part: &str) {
    let _ = text.push_str(part);
}
