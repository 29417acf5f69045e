//! Every tolerance of the library's tests, with what was measured. They may only tighten.

/// Single against double precision through the whole walk, relative. Measured: see the README's accuracy table.
pub const SINGLE_AGAINST_DOUBLE: f64 = 1e-6;

/// The fast arithmetic against double precision, relative.
pub const CURVE_AGAINST_DOUBLE: f64 = 1e-6;
