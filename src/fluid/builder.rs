//! A stored table from any smooth formulation: nodes and slopes sampled in double precision, once.

use super::stored::{Curve, FINE_NODES, LIQUID_SCALE, Name, Phase, StoredFluid};
use crate::error::{Error, within};
use crate::math::ln;
use crate::quantity::{AbsolutePressure, Temperature};

/// What a table is built from, beside its two property functions.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Frame<'a> {
    /// Name, 1 to 24 printable ASCII characters.
    pub name: &'a str,
    /// Lowest and highest temperature.
    pub temperature_range: [Temperature; 2],
    /// Lowest and highest absolute pressure.
    pub pressure_range: [AbsolutePressure; 2],
    /// Absolute pressure at which the property functions hold.
    pub at_pressure: AbsolutePressure,
    /// Relative change of viscosity per pascal.
    pub viscosity_per_pascal: f32,
    /// Relative change of density per pascal (liquids).
    pub density_per_pascal: f32,
    /// Relative standard uncertainty of viscosity.
    pub u_viscosity: f32,
    /// Relative standard uncertainty of its ratio to the value at 25 C.
    pub u_viscosity_ratio: f32,
}

/// Share of a segment used for the differences that give a node's slope.
const STEP: f64 = 1e-3;

/// Samples `y` (of kelvin) at uniform nodes over `range` (K), with slopes per segment.
fn sample<const NODES: usize>(range: [f64; 2], y: impl Fn(f64) -> f64) -> Curve<NODES> {
    let [low, high] = range;
    let segment = (high - low) / Curve::<NODES>::SEGMENTS as f64;
    let mut curve = Curve::constant(0.0);
    for (i, node) in curve.nodes.iter_mut().enumerate() {
        let t = low + segment * i as f64;
        let slope = (y(t + STEP * segment) - y(t - STEP * segment)) / (2.0 * STEP);
        *node = [y(t) as f32, slope as f32];
    }
    curve
}

/// A liquid from its viscosity (Pa s) and density (kg/m3) as functions of temperature (K).
///
/// Both functions are also called a thousandth of a segment beyond the range. Accuracy: 20 ppm of the functions for
/// oils over 120 K (asserted in `tests/accuracy.rs`).
///
/// # Errors
/// Names what is not finite or outside its limits.
pub fn liquid(
    frame: &Frame<'_>,
    viscosity: impl Fn(f64) -> f64,
    density: impl Fn(f64) -> f64,
) -> Result<StoredFluid, Error> {
    let p = f64::from(frame.at_pressure.as_pascals());
    let ranges = frame.temperature_range.map(|t| f64::from(t.as_kelvin()));
    check_frame(frame)?;
    let thinner = 1.0 + f64::from(frame.viscosity_per_pascal) * p;
    let lighter = 1.0 + f64::from(frame.density_per_pascal) * p;
    let viscosity = sample::<FINE_NODES>(ranges, |t| ln(viscosity(t) / (thinner * LIQUID_SCALE)));
    let extra = sample(ranges, |t| density(t) / lighter);
    let zero = Curve::constant(0.0);
    let fluid = StoredFluid {
        viscosity_pressure: [Curve::constant(frame.viscosity_per_pascal), zero],
        density_pressure: [Curve::constant(frame.density_per_pascal), zero, zero],
        ..empty(frame, Phase::Liquid, 1.0, viscosity, extra)?
    };
    fluid.check()?;
    Ok(fluid)
}

/// Conduction group of a gas whose conductivity is not known: the middle of common gases (nitrogen 0.26, argon 0.33,
/// carbon dioxide 0.23), which leaves the expansion term within 5 %.
const USUAL_CONDUCTION: f32 = 0.27;

/// A gas from its viscosity (Pa s) and compressibility factor at `frame.at_pressure`, as functions of temperature (K);
/// `molar_mass` in kg/mol. The compressibility factor is taken as linear in pressure.
///
/// # Errors
/// Names what is not finite or outside its limits.
pub fn gas(
    frame: &Frame<'_>,
    molar_mass: f32,
    viscosity: impl Fn(f64) -> f64,
    compressibility: impl Fn(f64) -> f64,
) -> Result<StoredFluid, Error> {
    let p = f64::from(frame.at_pressure.as_pascals());
    let ranges = frame.temperature_range.map(|t| f64::from(t.as_kelvin()));
    check_frame(frame)?;
    let thinner = 1.0 + f64::from(frame.viscosity_per_pascal) * p;
    let viscosity = sample::<FINE_NODES>(ranges, |t| viscosity(t) / thinner);
    let zero = Curve::constant(0.0);
    let fluid = StoredFluid {
        viscosity_pressure: [Curve::constant(frame.viscosity_per_pascal), zero],
        density_pressure: [sample(ranges, |t| (compressibility(t) - 1.0) / p), zero, zero],
        ..empty(frame, Phase::Gas, molar_mass, viscosity, Curve::constant(USUAL_CONDUCTION))?
    };
    fluid.check()?;
    Ok(fluid)
}

fn check_frame(frame: &Frame<'_>) -> Result<(), Error> {
    let [low, high] = frame.temperature_range.map(Temperature::as_kelvin);
    within("lowest table temperature (K)", low, 1.0, 2000.0)?;
    within("highest table temperature (K)", high, low + 1.0, 3000.0)?;
    within("pressure of the data (Pa)", frame.at_pressure.as_pascals(), 1.0, 1e9)?;
    Ok(())
}

fn empty(
    frame: &Frame<'_>,
    phase: Phase,
    molar_mass: f32,
    viscosity: Curve<FINE_NODES>,
    extra: Curve<9>,
) -> Result<StoredFluid, Error> {
    Ok(StoredFluid {
        name: Name::checked(frame.name)?,
        phase,
        molar_mass,
        temperature_range: frame.temperature_range.map(Temperature::as_kelvin),
        pressure_range: frame.pressure_range.map(AbsolutePressure::as_pascals),
        u_viscosity: frame.u_viscosity,
        u_viscosity_ratio: frame.u_viscosity_ratio,
        viscosity,
        viscosity_pressure: [Curve::constant(0.0); 2],
        density_pressure: [Curve::constant(0.0); 3],
        extra,
    })
}

/// A row of a user's table.
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Row {
    /// Temperature, K.
    pub temperature: f64,
    /// Dynamic viscosity, Pa s.
    pub viscosity: f64,
    /// Density, kg/m3.
    pub density: f64,
}

/// Interpolates one column of rows sorted by temperature: cubic through the neighbours' parabola slopes (Bessel).
///
/// Between rows it meets each row exactly; beyond the ends it follows the end cubic. Fewer than two rows give NaN,
/// which the builders then refuse.
pub fn interpolate(rows: &[Row], column: impl Fn(&Row) -> f64, temperature: f64) -> f64 {
    let last = rows.len().saturating_sub(2);
    let start = rows.iter().skip(1).position(|row| temperature < row.temperature).unwrap_or(last).min(last);
    let (Some(a), Some(b)) = (rows.get(start), rows.get(start + 1)) else { return f64::NAN };
    let width = b.temperature - a.temperature;
    let chord = |p: &Row, q: &Row| (column(q) - column(p)) / (q.temperature - p.temperature);
    let middle = chord(a, b);
    let parabola = |near: f64, near_width: f64, far: f64, far_width: f64| {
        (near * far_width + far * near_width) / (near_width + far_width)
    };
    let before = start.checked_sub(1).and_then(|i| rows.get(i));
    let after = rows.get(start + 2);
    let left = before.map(|p| parabola(middle, width, chord(p, a), a.temperature - p.temperature));
    let right = after.map(|q| parabola(middle, width, chord(b, q), q.temperature - b.temperature));
    let (m0, m1) = match (left, right) {
        (Some(l), Some(r)) => (l, r),
        (Some(l), None) => (l, 2.0 * middle - l),
        (None, Some(r)) => (2.0 * middle - r, r),
        (None, None) => (middle, middle),
    };
    let t = (temperature - a.temperature) / width;
    let (y0, rise) = (column(a), column(b) - column(a));
    let (m0, m1) = (m0 * width, m1 * width);
    let c3 = m0 + m1 - 2.0 * rise;
    y0 + t * (m0 + t * (rise - m0 - c3 + t * c3))
}
