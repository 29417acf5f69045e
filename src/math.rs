//! The only door to `libm` and `micromath`, and the arithmetic that one kernel needs in two precisions.
//!
//! Nothing else in the crate calls a function of either library, so the same bits come out on every machine.
//! `micromath` serves where only a seed is wanted: its bare `sqrt` is wrong by up to 6 %, and two Newton steps
//! bring it to 2e-6 (asserted in `tests/accuracy.rs`), which is harmless in a slip correction of at most a few
//! percent and in an uncertainty.

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
/// Used for the thermal speed in the slip correction and for the root of a variance. Valid for positive normal
/// numbers; zero gives about 1e-19. Public so that its stated accuracy can be tested.
pub fn quick_root(value: f32) -> f32 {
    Real::quick_root(value)
}
