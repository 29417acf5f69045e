//! Powers of ten on a 64-bit mantissa: the one arithmetic under writing and reading decimal numbers.
//!
//! `core`'s formatting and parsing of floats cost 14 to 20 kB; this costs a table of 224 bytes. Each step multiplies by
//! a constant good to 2^-64 and truncates at 2^-63, so a number that needs seven steps is wrong by less than 2^-59
//! relative, which is 2^-35 of a unit in the last place of an f32 and 2^-29 of the ninth decimal digit.

/// A number `mantissa 2^exponent` with the mantissa's top bit set, or zero.
#[derive(Clone, Copy)]
pub(crate) struct Binary {
    mantissa: u64,
    exponent: i32,
}

/// 10 to the 1, 2, 4, ... 64, nearest.
const TENS: [Binary; 7] = [
    Binary { mantissa: 0xA000_0000_0000_0000, exponent: -60 },
    Binary { mantissa: 0xC800_0000_0000_0000, exponent: -57 },
    Binary { mantissa: 0x9C40_0000_0000_0000, exponent: -50 },
    Binary { mantissa: 0xBEBC_2000_0000_0000, exponent: -37 },
    Binary { mantissa: 0x8E1B_C9BF_0400_0000, exponent: -10 },
    Binary { mantissa: 0x9DC5_ADA8_2B70_B59E, exponent: 43 },
    Binary { mantissa: 0xC278_1F49_FFCF_A6D5, exponent: 149 },
];

/// 10 to the -1, -2, -4, ... -64, nearest.
const TENTHS: [Binary; 7] = [
    Binary { mantissa: 0xCCCC_CCCC_CCCC_CCCD, exponent: -67 },
    Binary { mantissa: 0xA3D7_0A3D_70A3_D70A, exponent: -70 },
    Binary { mantissa: 0xD1B7_1758_E219_652C, exponent: -77 },
    Binary { mantissa: 0xABCC_7711_8461_CEFD, exponent: -90 },
    Binary { mantissa: 0xE695_94BE_C44D_E15B, exponent: -117 },
    Binary { mantissa: 0xCFB1_1EAD_4539_94BA, exponent: -170 },
    Binary { mantissa: 0xA87F_EA27_A539_E9A5, exponent: -276 },
];

impl Binary {
    /// The number `mantissa 2^exponent`.
    pub(crate) fn new(mantissa: u64, exponent: i32) -> Self {
        let shift = mantissa.leading_zeros() & 63;
        Self { mantissa: mantissa << shift, exponent: exponent - shift as i32 }
    }

    /// The magnitude of a finite number, exactly.
    pub(crate) fn of(value: f32) -> Self {
        let bits = value.to_bits() & 0x7FFF_FFFF;
        let (biased, fraction) = (bits >> 23, bits & 0x7F_FFFF);
        if biased == 0 {
            return Self::new(u64::from(fraction), -149);
        }
        Self::new(u64::from(fraction | 0x80_0000), biased as i32 - 150)
    }

    /// This number times a power of ten; powers beyond 127 act as 127, far outside every f32.
    pub(crate) fn times_ten_to(self, power: i32) -> Self {
        let table = if power < 0 { &TENTHS } else { &TENS };
        let bits = power.unsigned_abs().min(127);
        let chosen = table.iter().enumerate().filter(|(i, _)| bits >> i & 1 == 1);
        chosen.fold(self, |product, (_, step)| product.times(*step))
    }

    fn times(self, other: Self) -> Self {
        let high = (u128::from(self.mantissa) * u128::from(other.mantissa)) >> 64;
        Self::new(high as u64, self.exponent + other.exponent + 64)
    }

    /// The power of ten of the leading digit, or one less.
    pub(crate) const fn decimal_exponent(self) -> i32 {
        ((self.exponent + 63) * 1233) >> 12
    }

    /// The nearest integer, half to even; the largest one when there is none.
    pub(crate) fn integer(self) -> u64 {
        if self.exponent > 0 && self.mantissa != 0 {
            return u64::MAX;
        }
        shifted(self.mantissa, self.exponent.unsigned_abs())
    }

    /// The nearest f32, infinite when there is none.
    pub(crate) fn single(self) -> f32 {
        if self.mantissa == 0 {
            return 0.0;
        }
        let shift = (-149 - self.exponent).max(40);
        let place = self.exponent + shift + 149;
        if place > 253 {
            return f32::INFINITY;
        }
        // The hidden bit carries into the exponent, and so does rounding up.
        f32::from_bits(((place as u32) << 23) + shifted(self.mantissa, shift as u32) as u32)
    }
}

/// `mantissa / 2^shift` to the nearest integer, half to even.
fn shifted(mantissa: u64, shift: u32) -> u64 {
    match shift {
        0 => mantissa,
        1..=64 => {
            let whole = mantissa.checked_shr(shift).unwrap_or(0);
            let rest = mantissa << (64 - shift);
            let half = 1 << 63;
            whole + u64::from(rest > half || (rest == half && whole & 1 == 1))
        }
        _ => 0,
    }
}
