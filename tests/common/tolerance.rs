//! Every tolerance of the library's tests, with what was measured. They may only tighten.

/// Single against double precision through the whole walk, relative. Measured: 6.3e-7, rms 1.6e-7.
pub const SINGLE_AGAINST_DOUBLE: f64 = 8e-7;

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

/// Square root of two Newton steps, relative, as its documentation states. Measured: 1.57e-6.
pub const QUICK_ROOT: f64 = 2e-6;

/// The series of ln(p1/p2) down to half the line pressure, relative, as the law's documentation states.
/// Measured: 1.9e-7.
pub const LOG_RATIO: f64 = 3e-7;

/// Newton's two or three steps on x against the converged flow, relative. Measured: 5.7e-9.
pub const Q_UPDATES: f64 = 1e-8;

/// Oil tables against Walther's line, relative. Measured: 1.13e-6; 20 ppm are stated for tables of users' own.
pub const OIL_TABLE: f64 = 1.5e-6;

/// Glycol tables against rows of their polynomials, relative. Measured: 8.3e-8.
pub const GLYCOL_TABLE: f64 = 2e-7;

/// Density of moist air, relative. Measured: 2.62e-5 at 60 C, saturated.
pub const MOIST_DENSITY: f64 = 27e-6;

/// Viscosity of moist air to 40 C and to 60 C, relative.
pub const MOIST_VISCOSITY: [f64; 2] = [1e-3, 2.5e-3];

/// Sensitivities over the largest of them: pressure drop, temperature (times T), line pressure, viscosity, humidity, B/A.
/// Measured: 1.6e-3, 1.5e-2, 2.1e-3, 3.4e-6, 1.3e-4, 6.2e-6.
pub const SENSITIVITIES: [f64; 6] = [0.002, 0.0155, 0.0025, 5e-6, 0.0002, 8e-6];

/// Stated uncertainty against 20 000 draws, whose own spread is 0.5 %, relative. Measured: 0.65 %.
pub const MONTE_CARLO: f64 = 0.02;

/// Reverse against forward flow of a liquid of constant properties, relative: the same operations on the same numbers.
pub const ODD_SYMMETRY: f64 = 1e-6;

/// The same two end pressures from either side, relative.
pub const TURNED_ROUND: f64 = 2e-6;

/// Pressure drop of the flow of a pressure drop, relative.
pub const INVERSE: f64 = 2e-6;

/// The same where the gas loses 30 to 50 % of its pressure: flow of that drop, and the drop, relative.
/// Measured over two million draws: below 2e-6, 4.1e-6.
pub const INVERSE_STRONG: [f64; 2] = [2e-6, 8e-6];

/// Twice the tubes, three times the viscosity, relative.
pub const SCALING: f64 = 1e-6;

/// Reynolds number from dynamic and from kinematic viscosity, relative: a few roundings.
pub const REYNOLDS: f64 = 4e-7;

/// Single against double precision anywhere in the tables, laminar or not, relative.
pub const SINGLE_ANYWHERE: f64 = 1e-6;

/// Step at a segment's end over 0.2 uK, relative: property or slope.
pub const SEGMENT_STEP: f64 = 1e-5;

/// Flow of the pressure drop the inverse gives in double precision, relative. Measured: 3.9e-7.
pub const INVERSE_ROUNDS: f64 = 5e-7;

/// Slip against its closed form, relative: the rounding of the stored sizes.
pub const SLIP: f64 = 1e-6;
/// Pt100: resistance against the standard's equations, ohm of a 100 ohm sensor. Measured: 4.95e-5.
pub const PT100_OHMS: f64 = 5e-5;

/// Pt100: temperature of a tabulated resistance, K. Measured: 1.46e-4, near 850 C where the last digit of a
/// resistance is 1e-4 K.
pub const PT100_KELVIN: f64 = 1.5e-4;

/// Thermistor: single against double precision, K. Measured: 4.4e-5, one and a half last digits of a temperature.
pub const THERMISTOR_KELVIN: f64 = 5e-5;

/// Straight transfer function against exact arithmetic, relative to the larger end value: four roundings of a span that
/// is up to twice that value.
pub const TRANSFER: f64 = 5e-7;
