//! Numbers as a certificate states them (JCGM 100:2008, 7.2.6).
//!
//! A standard or expanded uncertainty is given to two significant digits and its value to the same place. Rounding is to
//! the nearest, ties away from zero, on the decimal digits a person would write down: 0.0345 becomes 0.035 whatever its
//! binary form is. The place is fixed before rounding, so a carry keeps it: 9.96 becomes 10.0.

/// What stands where a value is missing.
pub const MISSING: &str = "–";
/// Thin, non-breaking space between groups of three digits.
const THIN: char = '\u{202f}';
/// Non-breaking space around signs.
const SPACE: char = '\u{a0}';
/// Places beyond these are not written out as plain digits.
const PLACES: std::ops::RangeInclusive<i32> = -18..=18;

/// A value and its uncertainty, rounded together, both to be multiplied by ten to `exponent`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Stated {
    /// The value.
    pub value: String,
    /// Its uncertainty, two significant digits; [`MISSING`] when there is none.
    pub uncertainty: String,
    /// Shared power of ten; 0 when the numbers stand as they are.
    pub exponent: i32,
}

/// The decimal exponent of the leading digit; absent for zero and for what is not finite.
pub fn exponent_of(value: f64) -> Option<i32> {
    if !value.is_finite() || value == 0.0 {
        return None;
    }
    format!("{value:e}").split_once('e').and_then(|(_, exponent)| exponent.parse().ok())
}

/// The place (power of ten) of the second significant digit of an uncertainty; absent for zero.
pub fn place_of_uncertainty(u: f64) -> Option<i32> {
    exponent_of(u).map(|exponent| exponent - 1)
}

/// `value` rounded to the digit at ten to `place`, grouped by thin spaces, with a proper minus sign.
pub fn at_place(value: f64, place: i32) -> String {
    if !value.is_finite() {
        return MISSING.to_string();
    }
    let place = place.clamp(*PLACES.start(), *PLACES.end());
    let magnitude = grouped(&rounded_digits(value.abs(), place), place);
    let zero = magnitude.chars().all(|c| matches!(c, '0' | '.' | THIN));
    if value < 0.0 && !zero { format!("\u{2212}{magnitude}") } else { magnitude }
}

/// `value` with a fixed number of decimals.
pub fn fixed(value: f64, decimals: i32) -> String {
    at_place(value, -decimals)
}

/// As [`fixed`], with a plus sign before positive values.
pub fn signed(value: f64, decimals: i32) -> String {
    let text = fixed(value, decimals);
    let plain = value > 0.0 && text.chars().any(|c| c.is_ascii_digit() && c != '0');
    if plain { format!("+{text}") } else { text }
}

/// `value` to `digits` significant digits, in powers of ten when it is very large or very small.
pub fn significant(value: f64, digits: i32) -> String {
    let Some(exponent) = exponent_of(value) else {
        return if value == 0.0 { "0".to_string() } else { MISSING.to_string() };
    };
    if (-4..6).contains(&exponent) {
        return at_place(value, exponent - digits + 1);
    }
    format!("{}{SPACE}×{SPACE}10{}", fixed(scaled(value, exponent), digits - 1), superscript(exponent))
}

/// A relative uncertainty in percent, two significant digits, without the sign `%`.
pub fn percent(relative: f64) -> String {
    significant(relative * 100.0, 2)
}

/// Degrees of freedom: whole ones without decimals.
pub fn freedom(dof: f64) -> String {
    fixed(dof, if (dof - dof.round()).abs() < 0.05 { 0 } else { 1 })
}

/// A probability with its sign of equality: two significant digits, `< 0.001` below that.
pub fn probability(p: f64) -> String {
    match p {
        p if !p.is_finite() => format!("={SPACE}{MISSING}"),
        p if p < 0.001 => format!("<{SPACE}0.001"),
        p if p > 0.99 => format!("={SPACE}{}", fixed(p, 3)),
        p => format!("={SPACE}{}", significant(p, 2)),
    }
}

/// Rounds a value and its uncertainty together; without a usable uncertainty the value keeps six significant digits.
pub fn stated(value: f64, u: f64) -> Stated {
    let exponent = [value, u].into_iter().filter_map(exponent_of).max().unwrap_or(0);
    let exponent = if (-3..5).contains(&exponent) { 0 } else { exponent };
    let (value, u) = (scaled(value, exponent), scaled(u, exponent));
    match place_of_uncertainty(u) {
        Some(place) => Stated { value: at_place(value, place), uncertainty: at_place(u, place), exponent },
        None => Stated { value: significant(value, 6), uncertainty: MISSING.to_string(), exponent },
    }
}

/// Decimals that show the smallest non-zero of `values` with `digits` significant digits, but write the largest with no
/// more than seven.
pub fn decimals_for(values: impl Iterator<Item = f64>, digits: i32) -> i32 {
    let exponents: Vec<i32> = values.filter_map(exponent_of).collect();
    let Some(smallest) = exponents.iter().min() else { return 0 };
    let largest = exponents.iter().max().unwrap_or(smallest);
    (digits - 1 - smallest).min(6 - (*largest).max(0)).clamp(0, 12)
}

/// `exponent` as superscript characters.
pub fn superscript(exponent: i32) -> String {
    let sign = if exponent < 0 { "⁻" } else { "" };
    let digits = exponent.unsigned_abs().to_string();
    let raised = digits.bytes().map(|b| ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'][usize::from(b - b'0')]);
    sign.chars().chain(raised).collect()
}

/// `value` divided by ten to `exponent`, through its decimal text, so that no digit changes.
fn scaled(value: f64, exponent: i32) -> f64 {
    if exponent == 0 || !value.is_finite() {
        return value;
    }
    let text = format!("{value:e}");
    let moved = text.split_once('e').and_then(|(mantissa, own)| {
        let own: i32 = own.parse().ok()?;
        format!("{mantissa}e{}", own - exponent).parse().ok()
    });
    moved.unwrap_or(value)
}

/// The digits of a non-negative value counted in units of ten to `place`, rounded half up.
fn rounded_digits(value: f64, place: i32) -> String {
    let text = format!("{value:e}");
    let (mantissa, exponent) = text.split_once('e').unwrap_or(("0", "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    let digits: Vec<u8> = mantissa.bytes().filter(u8::is_ascii_digit).collect();
    let Ok(keep) = usize::try_from(exponent - place + 1) else { return "0".to_string() };
    let mut kept: Vec<u8> = (0..keep).map(|i| digits.get(i).copied().unwrap_or(b'0')).collect();
    if digits.get(keep).is_some_and(|d| *d >= b'5') {
        increment(&mut kept);
    }
    let start = kept.iter().position(|d| *d != b'0').unwrap_or(kept.len());
    let significant: String = kept[start..].iter().map(|d| char::from(*d)).collect();
    if significant.is_empty() { "0".to_string() } else { significant }
}

/// Adds one to a decimal number held as digits.
fn increment(digits: &mut Vec<u8>) {
    for digit in digits.iter_mut().rev() {
        if *digit != b'9' {
            *digit += 1;
            return;
        }
        *digit = b'0';
    }
    digits.insert(0, b'1');
}

/// Writes `digits` × 10^`place` as a plain number, in groups of three from the decimal marker once five digits stand together.
fn grouped(digits: &str, place: i32) -> String {
    let decimals = usize::try_from(-place).unwrap_or(0);
    let zeros = if digits == "0" { 0 } else { usize::try_from(place).unwrap_or(0) };
    let padded = format!("{digits:0>width$}{}", "0".repeat(zeros), width = decimals + 1);
    let (whole, part) = padded.split_at(padded.len() - decimals);
    let lead = if whole.len() > 4 { whole.len() % 3 } else { 0 };
    let mut text = group_from(whole, lead);
    if !part.is_empty() {
        text.push('.');
        text.push_str(&group_from(part, 0));
    }
    text
}

/// Groups of three digits after the first `lead`; numbers of four digits or fewer stay whole.
fn group_from(digits: &str, lead: usize) -> String {
    if digits.len() <= 4 {
        return digits.to_string();
    }
    let breaks = |i: usize| i > 0 && i >= lead && (i - lead).is_multiple_of(3);
    digits.char_indices().flat_map(|(i, c)| breaks(i).then_some(THIN).into_iter().chain([c])).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_uncertainty_keeps_two_digits_and_ties_go_up() {
        let round = |u| at_place(u, place_of_uncertainty(u).unwrap_or(0));
        assert_eq!(round(0.0345), "0.035");
        assert_eq!(round(0.03449), "0.034");
        assert_eq!(round(0.0355), "0.036");
        assert_eq!(round(9.96), "10.0");
        assert_eq!(round(28.05), "28");
        assert_eq!(round(1234.0), "1200");
    }

    #[test]
    fn value_and_uncertainty_end_at_the_same_place() {
        let plain = stated(10.057_62, 0.027);
        assert_eq!((plain.value.as_str(), plain.uncertainty.as_str(), plain.exponent), ("10.058", "0.027", 0));
        let large = stated(3.401_23e11, 4.96e8);
        assert_eq!((large.value.as_str(), large.uncertainty.as_str(), large.exponent), ("3.4012", "0.0050", 11));
    }

    #[test]
    fn odd_values_do_not_break_anything() {
        assert_eq!(stated(0.0, 0.0).value, "0");
        assert_eq!(stated(1.0, 0.0).uncertainty, MISSING);
        assert_eq!(fixed(f64::NAN, 2), MISSING);
        assert_eq!(significant(f64::INFINITY, 3), MISSING);
        assert_eq!(fixed(-0.0001, 2), "0.00");
        assert_eq!(fixed(1e300, 2).chars().next(), Some('1'));
        assert_eq!(fixed(f64::MIN_POSITIVE, 3), "0.000");
        assert_eq!(decimals_for([].into_iter(), 3), 0);
    }

    #[test]
    fn digits_stand_in_groups_with_a_proper_minus() {
        assert_eq!(fixed(-12_345.678, 1), "−12\u{202f}345.7");
        assert_eq!(fixed(1234.0, 0), "1234");
        assert_eq!(signed(0.25, 2), "+0.25");
        assert_eq!(signed(0.001, 2), "0.00");
        assert_eq!(significant(2.5e-7, 2), "2.5\u{a0}×\u{a0}10⁻⁷");
        assert_eq!(probability(0.000_04), "<\u{a0}0.001");
    }
}
