//! The fully developed velocity profile: how much faster than the mean a layer runs, by its place in the channel.
//!
//! What shape says to the law is the integrals of these curves: the kinetic-energy factor is that of the cube, and the
//! slope at the wall is f Re. Their values are asserted in `tests/published_ducts.rs`.

use crate::math::Real;

/// Velocity over mean velocity in a round tube.
///
/// `u/U = 2 (1 - (r/R)^2)`, with
/// - `position` = r/R: distance from the axis over the inner radius, 0 to 1 and of either sign; beyond the wall 0.
///
/// Accuracy: the rounding of single precision. Source: Hagen 1839, Poiseuille 1840; exact for steady, laminar flow of
/// constant viscosity, far from the inlet and without slip.
///
/// ```
/// use evenbore::element::profile::round_tube;
/// assert_eq!(round_tube(0.0), 2.0); // on the axis
/// assert_eq!(round_tube(0.5), 1.5);
/// assert_eq!(round_tube(1.0), 0.0); // at the wall
/// ```
pub fn round_tube(position: f32) -> f32 {
    2.0 * below_wall(position)
}

/// Velocity over mean velocity between parallel plates.
///
/// `u/U = 3/2 (1 - (y/h)^2)`, with
/// - `position` = y/h: distance from the middle plane over half the gap, -1 to 1; beyond the wall 0.
///
/// Accuracy: the rounding of single precision. Source: Poiseuille's balance in a plane; exact for steady, laminar flow
/// of constant viscosity, far from the inlet and the side walls and without slip.
///
/// ```
/// use evenbore::element::profile::parallel_plates;
/// assert_eq!(parallel_plates(0.0), 1.5); // in the middle plane
/// assert_eq!(parallel_plates(-1.0), 0.0); // at the wall
/// ```
pub fn parallel_plates(position: f32) -> f32 {
    1.5 * below_wall(position)
}

/// `1 - s^2`, and 0 beyond the wall; written as a product, which loses nothing close to it. NaN stays NaN.
fn below_wall(position: f32) -> f32 {
    let s = position.magnitude();
    if s > 1.0 { 0.0 } else { (1.0 - s) * (1.0 + s) }
}
