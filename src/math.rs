//! The only door to `libm` and `micromath`, and the arithmetic that one kernel needs in two precisions.
//!
//! In single precision a stored curve is interpolated with integers inside: without a floating-point unit a curve then
//! costs a fifth, and 30 bits lose less than single precision does.
//!
//! Nothing else in the crate calls a function of either library, so the same bits come out on every machine.
//! `micromath` serves where only a seed is wanted: its bare `sqrt` is wrong by up to 6 %, and two Newton steps
//! bring it to 2e-6 (asserted in `tests/accuracy.rs`), which is harmless in an uncertainty.

use core::ops::{Add, Div, Mul, Neg, Sub};

/// The arithmetic of the kernels: implemented by `f32` (the device) and `f64` (the bench), by nothing else.
pub(crate) trait Real:
    Copy
    + PartialOrd
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
{
    /// The nearest value to a constant.
    fn of(value: f64) -> Self;
    /// The value of a stored single-precision number.
    fn stored(value: f32) -> Self;
    /// Square root, correctly rounded.
    fn root(self) -> Self;
    /// Square root to 2e-6, for small corrections and uncertainties.
    fn quick_root(self) -> Self;
    /// Exponential.
    fn exponential(self) -> Self;
    /// Absolute value.
    fn magnitude(self) -> Self;
    /// Whole part as a table index; 0 when negative or not a number.
    fn index(self) -> usize;
    /// Whether the value is neither NaN nor infinite.
    fn finite(self) -> bool;
    /// How far along a segment, as cubic Hermite interpolation needs it.
    type Along: Copy + core::fmt::Debug;
    /// Segment of a curve of `segments` (a power of two) at a share of the way from its first node to its last, 0 to 1,
    /// and the place in it.
    fn along(share: Self, segments: u32) -> (usize, Self::Along);
    /// `y0 + w (y1 - y0) + w0 m0 + w1 m1` of stored values and slopes (per segment) at a segment's ends.
    fn cubic(ends: [&[f32; 2]; 2], along: &Self::Along) -> Self;
    /// Between the slopes at a segment's ends.
    fn slope(ends: [&[f32; 2]; 2], along: &Self::Along) -> Self;
    /// The larger of two values.
    fn at_least(self, least: Self) -> Self {
        if self < least { least } else { self }
    }
}

impl Real for f32 {
    fn of(value: f64) -> Self {
        value as f32
    }
    fn stored(value: f32) -> Self {
        value
    }
    fn root(self) -> Self {
        libm::sqrtf(self)
    }
    fn quick_root(self) -> Self {
        // Two Newton steps on micromath's seed; the floor keeps the division finite at zero.
        let s = self.at_least(f32::MIN_POSITIVE);
        let y = micromath::F32Ext::sqrt(s);
        let y = 0.5 * (y + s / y);
        0.5 * (y + s / y)
    }
    fn exponential(self) -> Self {
        libm::expf(self)
    }
    fn magnitude(self) -> Self {
        self.abs()
    }
    fn index(self) -> usize {
        self as usize
    }
    fn finite(self) -> bool {
        self.is_finite()
    }
    type Along = Fractions;
    fn along(share: Self, segments: u32) -> (usize, Fractions) {
        let place = u64::from((share * 4_294_967_296.0) as u32) * u64::from(segments);
        ((place >> 32) as usize, Fractions::at(place as u32))
    }
    fn cubic([[y0, m0], [y1, m1]]: [&[f32; 2]; 2], along: &Fractions) -> Self {
        let ([y0, y1, m0, m1], exponent) = aligned([*y0, *y1, *m0, *m1]);
        let slopes = upper_signed(m0, along.w0).wrapping_sub(upper_signed(m1, along.w1));
        let half = (y0 >> 1).wrapping_add(upper_signed(y1.wrapping_sub(y0), along.w)).wrapping_add(slopes);
        scaled(half, exponent)
    }
    fn slope([[_, m0], [_, m1]]: [&[f32; 2]; 2], along: &Fractions) -> Self {
        let ([m0, m1], exponent) = aligned([*m0, *m1]);
        scaled((m0 >> 1).wrapping_add(upper_signed(m1.wrapping_sub(m0), along.t)), exponent)
    }
}

/// Fractions of 2^31: how far along a segment, and what cubic Hermite interpolation weighs there: the rise, the slope at
/// the start, less the slope at the end.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Fractions {
    t: i32,
    w: i32,
    w0: i32,
    w1: i32,
}

impl Fractions {
    /// At a fraction of 2^32 along the segment.
    const fn at(t: u32) -> Self {
        let (square, product) = (upper(t, t), upper(t, !t));
        let (w0, w1) = (upper(product, !t), upper(product, t));
        let w = square.wrapping_add(w1).wrapping_add(w1); // t^2 + 2 t^2 (1 - t), below 1
        Self { t: (t >> 1) as i32, w: (w >> 1) as i32, w0: (w0 >> 1) as i32, w1: (w1 >> 1) as i32 }
    }
}

/// Numbers as integers of up to 30 bits over one power of two, with its stored exponent. Numbers below 2^-95 beside no
/// larger one count as zero.
#[inline(always)] // with its loops unrolled
fn aligned<const N: usize>(values: [f32; N]) -> ([i32; N], u32) {
    let bits = values.map(f32::to_bits);
    let exponent = bits.iter().map(|b| b << 1).fold(0, |a, b| if a > b { a } else { b }) >> 24;
    let align = |b: u32| {
        let away = (exponent + 2).wrapping_sub((b >> 23) & 0xff) as i32;
        let size = ((b << 8) | 0x8000_0000).wrapping_shr(away.clamp(0, 31) as u32) as i32;
        let sign = (b as i32) >> 31;
        (size ^ sign).wrapping_sub(sign)
    };
    (bits.map(align), exponent)
}

/// The number whose half, over the power of two of a stored exponent, is an integer.
fn scaled(half: i32, exponent: u32) -> f32 {
    if half == 0 || exponent < 32 {
        return 0.0;
    }
    f32::from_bits((half as f32).to_bits().wrapping_add(exponent.wrapping_sub(155).wrapping_shl(23)))
}

/// Upper half of a product.
pub(crate) const fn upper(a: u32, b: u32) -> u32 {
    ((a as u64 * b as u64) >> 32) as u32
}

/// Upper half of a signed product.
pub(crate) const fn upper_signed(a: i32, b: i32) -> i32 {
    ((a as i64 * b as i64) >> 32) as i32
}

impl Real for f64 {
    fn of(value: f64) -> Self {
        value
    }
    fn stored(value: f32) -> Self {
        f64::from(value)
    }
    fn root(self) -> Self {
        libm::sqrt(self)
    }
    fn quick_root(self) -> Self {
        libm::sqrt(self)
    }
    fn exponential(self) -> Self {
        libm::exp(self)
    }
    fn magnitude(self) -> Self {
        self.abs()
    }
    fn index(self) -> usize {
        self as usize
    }
    fn finite(self) -> bool {
        self.is_finite()
    }
    type Along = f64;
    fn along(share: Self, segments: u32) -> (usize, f64) {
        let position = share * f64::from(segments);
        let segment = position.index().min(segments.saturating_sub(1) as usize);
        (segment, position - segment as f64)
    }
    fn cubic([[y0, m0], [y1, m1]]: [&[f32; 2]; 2], along: &f64) -> Self {
        let [y0, m0, y1, m1] = [y0, m0, y1, m1].map(|v| f64::from(*v));
        let (t, left) = (*along, 1.0 - *along);
        y0 + ((y1 - y0) * (t * t * (1.0 + 2.0 * left)) + (m0 * (t * left * left) - m1 * (t * t * left)))
    }
    fn slope([[_, m0], [_, m1]]: [&[f32; 2]; 2], along: &f64) -> Self {
        f64::from(*m0) + along * (f64::from(*m1) - f64::from(*m0))
    }
}

/// Share `1 - exp(-x)` of its way that a first-order lag has gone after `x` time constants; x >= 0.
///
/// Through `expm1`: the difference `1 - exp(-x)` would leave, at 1000 samples per time constant, an error of 1.4e-4 in
/// the share with `micromath`'s `exp` (1.4e-7 on 1) and of 3e-5 with a correctly rounded one.
pub(crate) fn approached(x: f32) -> f32 {
    -libm::expm1f(-x)
}

/// Natural logarithm in single precision.
pub(crate) fn logarithm(value: f32) -> f32 {
    libm::logf(value)
}

/// Natural logarithm in double precision, for tables that are built once.
pub(crate) fn ln(value: f64) -> f64 {
    libm::log(value)
}

/// Base-10 logarithm in double precision, for tables that are built once.
pub(crate) fn log10(value: f64) -> f64 {
    libm::log10(value)
}

/// Power of ten in double precision, for tables that are built once.
pub(crate) fn exp10(value: f64) -> f64 {
    libm::exp10(value)
}

/// Square root to 2e-6 relative on the device: `micromath`'s seed and two Newton steps.
///
/// Used for the root of a variance. Valid for positive normal
/// numbers; zero gives about 1e-19. Public so that its stated accuracy can be tested.
pub fn quick_root(value: f32) -> f32 {
    Real::quick_root(value)
}
