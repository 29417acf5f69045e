//! Friction of ducts of other shapes: what a matrix of rectangles, rings, triangles or ovals has for f Re.
//!
//! Each function gives the Fanning friction factor times the Reynolds number on the hydraulic diameter
//! `Dh = 4 area/perimeter`, for developed laminar flow; four times it is Darcy's. A maker who plans such a matrix hands it to
//! [`Element::duct`](super::Element::duct), which turns it into a nominal A.
//!
//! Computed in double precision and rounded once; values within 1e-7 of the references in `tests/published_ducts.rs`.

use crate::error::{Error, within};
use crate::math::{Real, ln};

/// f Re of an equilateral triangle, 40/3, exact (Shah & London 1978).
pub const EQUILATERAL_TRIANGLE: f32 = 40.0 / 3.0;

/// f Re of a circle, exact.
const CIRCLE: f64 = 16.0;
/// f Re of parallel plates, exact.
const PLATES: f64 = 24.0;

/// Odd terms of the rectangle's series; the first one left out is below 1e-8 of the sum.
const RECTANGLE_TERMS: usize = 20;

/// f Re of a rectangle.
///
/// `f Re = 24/((1 + alpha)^2 K)`, `K = 1 - 192 alpha/pi^5 sum tanh(n pi/(2 alpha))/n^5` over odd n, with
/// - `short_over_long` = alpha: short side over long side, 0 (parallel plates, 24) to 1 (square, 14.227).
///
/// Accuracy: single precision. Source: exact solution of Poisson's equation; values as in Shah & London, Laminar Flow
/// Forced Convection in Ducts (1978), table 45.
///
/// # Errors
/// Names an aspect ratio outside 0..1.
///
/// ```
/// use evenbore::element::ducts::rectangle;
/// assert!((rectangle(0.25)? - 18.232_78).abs() < 1e-5);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
pub fn rectangle(short_over_long: f32) -> Result<f32, Error> {
    let alpha = f64::from(within("short over long side", short_over_long, 0.0, 1.0)?);
    let pi = core::f64::consts::PI;
    let mut sum = 0.0;
    for i in 0..RECTANGLE_TERMS {
        let n = (2 * i + 1) as f64;
        let decayed = (-n * pi / alpha).exponential();
        let tanh = (1.0 - decayed) / (1.0 + decayed);
        sum += tanh / (n * n * n * n * n);
    }
    let k = 1.0 - 192.0 * alpha * sum / (pi * pi * pi * pi * pi);
    Ok((PLATES / ((1.0 + alpha) * (1.0 + alpha) * k)) as f32)
}

/// Radius ratio from which a ring is indistinguishable from parallel plates in single precision.
const THIN_RING: f64 = 0.999;

/// f Re of the ring between two concentric circles.
///
/// `f Re = 16 (1 - r)^2/(1 + r^2 - 2 m^2)`, `m^2 = (1 - r^2)/(2 ln(1/r))`, with
/// - `inner_over_outer` = r: inner radius over outer radius, 0 (circle, 16) to 1 (parallel plates, 24);
/// - m: radius of the fastest layer over the outer radius.
///
/// The circle's limit is reached slowly: a wire of a thousandth of the bore already gives 18.7.
/// Accuracy: single precision. Source: exact solution, Lamb, Hydrodynamics (from memory); Shah & London 1978.
///
/// # Errors
/// Names a radius ratio outside 0..1.
///
/// ```
/// use evenbore::element::ducts::concentric_annulus;
/// assert!((concentric_annulus(0.5)? - 23.813).abs() < 1e-3);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
pub fn concentric_annulus(inner_over_outer: f32) -> Result<f32, Error> {
    let r = f64::from(within("inner over outer radius", inner_over_outer, 0.0, 1.0)?);
    if r <= 0.0 {
        return Ok(CIRCLE as f32);
    }
    if r > THIN_RING {
        return Ok(PLATES as f32); // below this the formula would divide what cancellation left
    }
    let fastest = (1.0 - r * r) / (-2.0 * ln(r));
    Ok((CIRCLE * (1.0 - r) * (1.0 - r) / (1.0 + r * r - 2.0 * fastest)) as f32)
}

/// Halvings of the arithmetic-geometric mean; each doubles the correct digits.
const MEAN_ROUNDS: usize = 8;

/// f Re of an ellipse.
///
/// `f Re = 2 (1 + b^2) (pi/E)^2`, E the complete elliptic integral of the second kind for `m = 1 - b^2`, with
/// - `short_over_long` = b: short axis over long axis, 0.001 to 1 (circle, 16).
///
/// Accuracy: single precision; E by the arithmetic-geometric mean (Abramowitz & Stegun, 17.6). Source: exact solution;
/// Shah & London 1978.
///
/// # Errors
/// Names an axis ratio outside 0.001..1.
///
/// ```
/// use evenbore::element::ducts::ellipse;
/// assert!((ellipse(0.5)? - 16.823_3).abs() < 1e-4);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
pub fn ellipse(short_over_long: f32) -> Result<f32, Error> {
    let b = f64::from(within("short over long axis", short_over_long, 1e-3, 1.0)?);
    let (mut mean, mut geometric) = (1.0, b);
    let mut weight = 1.0;
    let mut lost = (1.0 - b * b) / 2.0;
    for _ in 0..MEAN_ROUNDS {
        let half = (mean - geometric) / 2.0;
        (mean, geometric) = ((mean + geometric) / 2.0, (mean * geometric).root());
        lost += weight * half * half;
        weight = weight + weight;
    }
    let pi = core::f64::consts::PI;
    let e = pi / (2.0 * mean) * (1.0 - lost);
    Ok((2.0 * (1.0 + b * b) * (pi / e) * (pi / e)) as f32)
}
