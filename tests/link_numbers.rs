//! Numbers of the link against those of `std`.
#![cfg(feature = "link")]

use evenbore::link::number::{fixed, integer, scientific};
use evenbore::link::{Decimal, LinkError};

/// A generator of Marsaglia's (xorshift64), so that a failure repeats.
struct Random(u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0
    }
    fn finite(&mut self) -> f32 {
        loop {
            let value = f32::from_bits(self.next() as u32);
            if value.is_finite() {
                return value;
            }
        }
    }
    fn below(&mut self, n: u64) -> u64 {
        (self.next() >> 16) % n
    }
}

/// Digits and exponent of a number in scientific form.
fn parts(text: &str) -> (i64, i32) {
    let (mantissa, exponent) = text.split_once(['e', 'E']).unwrap();
    (mantissa.replace('.', "").parse().unwrap(), exponent.parse().unwrap())
}

/// Distance in units of the last digit.
fn apart(a: &str, b: &str, digits: u32) -> i64 {
    let ((m, e), (n, f)) = (parts(a), parts(b));
    match e - f {
        0 => (m - n).abs(),
        1 => (m * 10 - n).abs(),
        -1 => (n * 10 - m).abs(),
        _ => 10_i64.pow(digits),
    }
}

#[test]
fn a_million_numbers_are_written_as_std_does() {
    let mut random = Random(0x9E37_79B9_7F4A_7C15);
    let mut differences = 0;
    for _ in 0..1_000_000 {
        let value = random.finite();
        let (seven, nine) = (scientific(value, 7), scientific(value, 9));
        let (std_seven, std_nine) = (format!("{value:.6e}"), format!("{value:.8e}"));
        let off = apart(&seven, &std_seven, 7).max(apart(&nine, &std_nine, 9));
        assert!(off <= 1, "{value:e}: {seven} {nine}");
        differences += i64::from(off != 0);
        assert_eq!(nine.parse::<f32>().unwrap().to_bits(), value.to_bits(), "{nine}");
    }
    assert_eq!(differences, 0, "correctly rounded");
}

#[test]
fn awkward_numbers_are_written_as_std_does() {
    let powers_of_two = (0..255).map(|e| f32::from_bits(e << 23));
    let powers_of_ten = (-45..39).map(|e| format!("1e{e}").parse::<f32>().unwrap());
    let nines = (-45..38).map(|e| format!("9.9999995e{e}").parse::<f32>().unwrap());
    let small = (1..2000).map(f32::from_bits);
    let ties = [0.5, 2.5, 1_234_567.5, 1_234_568.5, 12_345_675.0, 12_345_685.0, f32::MAX, f32::MIN_POSITIVE];
    for value in powers_of_two.chain(powers_of_ten).chain(nines).chain(small).chain(ties) {
        for digits in 1..=9 {
            let (ours, theirs) = (scientific(value, digits), format!("{value:.*e}", usize::from(digits) - 1));
            if value != 0.0 {
                assert_eq!(parts(&ours), parts(&theirs), "{value:e} with {digits} digits: {ours}");
            }
        }
    }
}

#[test]
fn fixed_decimals_are_written_as_std_does() {
    let mut random = Random(42);
    for _ in 0..200_000 {
        let value = (random.next() as i32) as f32 / 2_f32.powi(random.below(40) as i32 + 1);
        let decimals = random.below(5) as u8;
        if value.abs() * 10_f32.powi(i32::from(decimals)) > 9e8 {
            continue;
        }
        let theirs = format!("{value:.*}", usize::from(decimals));
        let negative_zero = theirs.starts_with('-') && theirs.bytes().all(|b| b"-0.".contains(&b));
        let theirs = if negative_zero { &theirs[1..] } else { &theirs };
        assert_eq!(fixed(value, decimals), *theirs, "{value}");
    }
}

#[test]
fn forms_of_numbers() {
    for (value, digits, text) in [
        (0.0, 7, "0.000000E+00"),
        (-0.0, 3, "0.00E+00"),
        (1.0, 1, "1E+00"),
        (-1.5e-40, 3, "-1.50E-40"),
        (9.999_9e-5, 3, "1.00E-04"),
        (f32::INFINITY, 7, "9.9E+37"),
        (f32::NEG_INFINITY, 7, "-9.9E+37"),
        (f32::NAN, 7, "9.91E+37"),
    ] {
        assert_eq!(scientific(value, digits), text);
    }
    for (value, decimals, text) in
        [(0.0, 0, "0"), (-0.05, 1, "-0.1"), (99.996, 2, "100.00"), (1e9, 0, "1.000000E+09"), (0.25, 1, "0.2")]
    {
        assert_eq!(fixed(value, decimals), text);
    }
    for (value, text) in [(0, "0"), (i32::MIN, "-2147483648"), (i32::MAX, "2147483647"), (-7, "-7")] {
        assert_eq!(integer(value), text);
    }
}

/// Distance of two floats in units in the last place.
fn ulps(a: f32, b: f32) -> i64 {
    let ordered = |v: f32| {
        let bits = i64::from(v.to_bits() & 0x7FFF_FFFF);
        if v.is_sign_negative() { -bits } else { bits }
    };
    (ordered(a) - ordered(b)).abs()
}

fn random_decimal(random: &mut Random) -> String {
    let digit = |random: &mut Random| char::from(b'0' + random.below(10) as u8);
    let mut text = ["", "-", "+"][random.below(3) as usize].to_owned();
    let (whole, after) = (random.below(12), random.below(20));
    text.extend((0..whole).map(|_| digit(random)));
    if after > 0 || whole == 0 {
        text.push('.');
        text.extend((0..after.max(1)).map(|_| digit(random)));
    }
    if random.below(3) > 0 {
        text.push_str(&format!("e{}", random.below(100) as i64 - 50));
    }
    text
}

#[test]
fn a_million_decimals_are_read_as_std_does() {
    let mut random = Random(0xDA94_2042_E4DD_58B5);
    let mut differences = 0;
    for i in 0..1_000_000 {
        let text = if i % 4 == 0 { format!("{:e}", random.finite()) } else { random_decimal(&mut random) };
        let (number, rest) = Decimal::read(text.as_bytes()).unwrap();
        assert!(rest.is_empty(), "{text}");
        let (ours, theirs) = (number.single(0), text.parse::<f32>().unwrap());
        assert!(ulps(ours, theirs) <= 1, "{text}: {ours:e} {theirs:e}");
        differences += i64::from(ours != theirs);
    }
    // Decimals half-way between two floats, such as 9876543.5 after its division by ten.
    assert!(differences <= 7, "{differences} are the neighbour of the nearest");
}

#[test]
fn decimals_that_are_hard_or_wrong() {
    for text in ["1e-46", "7e-46", "1e-9999", "3.4028236e38", "3.5e38", "1e9999", "16777217", "0e99", "00012.5", "1."] {
        assert_eq!(Decimal::read(text.as_bytes()).unwrap().0.single(0), text.parse::<f32>().unwrap(), "{text}");
    }
    // Half-way between two floats after a division: at worst the neighbour.
    let tie = Decimal::read(b"8388608.5").unwrap().0.single(0);
    assert!(ulps(tie, 8_388_608.5) <= 1);
    let long = format!("0.{}1", "0".repeat(300));
    for (text, error) in [
        ("", LinkError::InvalidCharacterInNumber),
        (".", LinkError::InvalidCharacterInNumber),
        ("+-1", LinkError::InvalidCharacterInNumber),
        ("1e32001", LinkError::ExponentTooLarge),
        ("1e-99999999999999", LinkError::ExponentTooLarge),
        ("#H", LinkError::InvalidCharacterInNumber),
        ("#B12", LinkError::InvalidCharacterInNumber),
        ("#HFFFFFFFFFFFFFFFFF", LinkError::TooManyDigits),
        (&long, LinkError::TooManyDigits),
    ] {
        assert_eq!(Decimal::read(text.as_bytes()), Err(error), "{text}");
    }
}

#[test]
fn integers_and_other_bases() {
    for (text, value) in [
        ("12", Some(12)),
        ("-12.5E0", Some(-12)),
        ("12.51", Some(13)),
        ("1200E-2", Some(12)),
        ("#HfF", Some(255)),
        ("#Q17", Some(15)),
        ("#b101", Some(5)),
        ("2147483647", Some(i32::MAX)),
        ("-2147483648", Some(i32::MIN)),
        ("2147483648", None),
        ("1E30", None),
        ("18446744073709551616", None),
    ] {
        assert_eq!(Decimal::read(text.as_bytes()).unwrap().0.integer(), value, "{text}");
    }
}
