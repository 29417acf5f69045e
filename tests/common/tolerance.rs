//! Every tolerance of the library's tests, with what was measured. They may only tighten.

/// Single against double precision through the whole walk, relative. Measured: see the README's accuracy table.
pub const SINGLE_AGAINST_DOUBLE: f64 = 1e-6;

/// Pt100: resistance against the standard's equations, ohm of a 100 ohm sensor. Measured: 4.95e-5.
pub const PT100_OHMS: f64 = 5e-5;

/// Pt100: temperature of a tabulated resistance, K. Measured: 1.46e-4, near 850 C where the last digit of a
/// resistance is 1e-4 K.
pub const PT100_KELVIN: f64 = 1.5e-4;

/// Thermistor: single against double precision, K. Measured: 4.4e-5, one and a half last digits of a temperature.
pub const THERMISTOR_KELVIN: f64 = 5e-5;

/// Straight transfer function against exact arithmetic, relative to the larger end value.
pub const TRANSFER: f64 = 2e-7;
