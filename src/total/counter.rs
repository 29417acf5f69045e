//! A counter of one direction, and the exact product that it adds.

use core::fmt;

/// Sub-units at which a counter starts again at zero: 1e18, which is a million cubic metres in nanolitres and a million
/// tonnes in micrograms.
pub const ROLLOVER: u64 = 1_000_000_000_000_000_000;

/// Largest flow that is counted, SI units.
const MOST_FLOW: f32 = 1000.0;
/// Longest time that is counted as one step, ms.
const MOST_MILLISECONDS: u32 = 3_600_000;

/// Why a step was not counted.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum NotCounted {
    /// The flow is not finite.
    NotFinite,
    /// The flow is larger than 1000 m3/s or 1000 kg/s.
    TooLarge,
    /// The step is longer than an hour; what flowed meanwhile is not known from one sample.
    TooLong,
}

impl fmt::Display for NotCounted {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::NotFinite => "flow is not finite",
            Self::TooLarge => "flow is above 1000 SI units",
            Self::TooLong => "step is longer than an hour",
        })
    }
}

impl core::error::Error for NotCounted {}

/// Whole sub-units in one direction.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Counter {
    pub(super) rollovers: u32,
    pub(super) units: u64,
    /// 2^-64 sub-units.
    pub(super) fraction: u64,
}

impl Counter {
    /// Whole sub-units since the last rollover, below [`ROLLOVER`].
    pub const fn units(&self) -> u64 {
        self.units
    }

    /// How often the counter has rolled over; it stays at its largest value.
    pub const fn rollovers(&self) -> u32 {
        self.rollovers
    }

    /// Whole sub-units since the beginning.
    pub const fn whole(&self) -> i128 {
        (self.rollovers as i128).wrapping_mul(ROLLOVER as i128).wrapping_add(self.units as i128)
    }

    /// Whole sub-units since an earlier state of this counter, rollovers included; 0 when that state is a later one.
    ///
    /// ```
    /// use evenbore::total::Counter;
    /// assert_eq!(Counter::default().since(&Counter::default()), 0);
    /// ```
    pub fn since(&self, earlier: &Self) -> u64 {
        let passed = self.whole().wrapping_sub(earlier.whole());
        u64::try_from(passed).unwrap_or(if passed < 0 { 0 } else { u64::MAX })
    }

    /// Adds 2^-64 sub-units; one step stays below four rollovers.
    pub(super) const fn add(&mut self, size: u128) {
        let sum = (self.fraction as u128).wrapping_add(size & u64::MAX as u128);
        self.fraction = sum as u64;
        // Below 2^64: units < 1e18, a step < 3.6e18, the carry is 1.
        self.units = self.units.wrapping_add((size >> 64) as u64).wrapping_add((sum >> 64) as u64);
        while self.units >= ROLLOVER {
            self.units = self.units.wrapping_sub(ROLLOVER);
            self.rollovers = self.rollovers.saturating_add(1);
        }
    }
}

/// What one sample adds, in 2^-64 sub-units.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Step {
    pub reverse: bool,
    pub size: u128,
}

/// `flow` times `elapsed_ms` times `scale` (sub-units per SI unit of flow and millisecond), without rounding but for
/// what lies below 2^-64 sub-units.
///
/// A finite single-precision number is `mantissa 2^(exponent - 150)`; the product of mantissa (24 bits), time (22 bits)
/// and scale (30 bits) fits 76 bits, and the limits keep the shifted product below 2^126.
///
/// # Errors
/// Not finite, too large, too long.
pub(super) const fn step(flow: f32, elapsed_ms: u32, scale: u64) -> Result<Step, NotCounted> {
    if !flow.is_finite() {
        return Err(NotCounted::NotFinite);
    }
    if flow.abs() > MOST_FLOW {
        return Err(NotCounted::TooLarge);
    }
    if elapsed_ms > MOST_MILLISECONDS {
        return Err(NotCounted::TooLong);
    }
    let bits = flow.to_bits();
    let (exponent, stored) = (bits.wrapping_shr(23) & 0xFF, bits & 0x7F_FFFF);
    // A subnormal number has no leading one and the exponent of the smallest normal one.
    let (exponent, mantissa) = if exponent == 0 { (1, stored) } else { (exponent, stored | 0x80_0000) };
    let product = (mantissa as u128).wrapping_mul(elapsed_ms as u128).wrapping_mul(scale as u128);
    // 2^(exponent - 150 + 64)
    let size = match exponent.checked_sub(86) {
        Some(up) => product.wrapping_shl(up),
        None => product.wrapping_shr(86_u32.wrapping_sub(exponent)),
    };
    Ok(Step { reverse: flow < 0.0, size })
}
