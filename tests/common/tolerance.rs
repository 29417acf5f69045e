//! Every tolerance of the library's tests, with what was measured. They may only tighten.

/// Single against double precision through the whole walk, relative. Measured: see the README's accuracy table.
pub const SINGLE_AGAINST_DOUBLE: f64 = 1e-6;

/// The fast arithmetic against double precision, relative.
pub const CURVE_AGAINST_DOUBLE: f64 = 1e-6;
/// Integrals of the velocity profile, absolute. Measured: 4e-8.
pub const PROFILE_INTEGRAL: f64 = 1e-6;

/// f Re against the tables, relative. Measured: 5.7e-8, the rounding of single precision.
pub const FRICTION_REYNOLDS: f64 = 1e-7;

/// The walk in the creeping limit against Poiseuille's law, relative. Measured: 3.8e-7 (tubes),
/// 2.3e-7 (plates): the rounding of the stored logarithm of viscosity.
pub const CREEPING_LIMIT: f64 = 5e-7;

/// Worked problems whose answer was computed from the stated inputs, relative. Measured: 9.1e-8.
pub const WORKED_COMPUTED: f64 = 3e-7;

/// Stanton & Pannell's scatter about 8/Re: air in bores of 7 mm. Measured: 4.7 %.
pub const MEASURED_AIR: f64 = 0.055;

/// Stanton & Pannell's scatter about 8/Re: thick oil, single table and the one of greater precision. Measured: 9.0 % in
/// the row at Re 10.4, whose friction differs between the two tables; 6.7 %.
pub const MEASURED_OIL: [f64; 2] = [0.0901, 0.068];

/// How far helium and nitrogen are from ideal where a table of reference conditions takes them as ideal, relative. Measured: 5.5e-5,
/// 2.6e-4.
pub const IDEAL_RATIO: [f64; 2] = [6e-5, 3e-4];

/// Factors of units, relative: half a unit in the last place of single precision, twice.
pub const UNIT_FACTOR: f64 = 1.2e-7;
