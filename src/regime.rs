//! Where the law holds: limits on Reynolds number, range, expansion and slip, and the flags they raise.
//!
//! The Reynolds number `Re = mdot Dh/(a mu) = U Dh/nu` follows from `x = mdot/mu` alone, so the dynamic and the
//! kinematic form are one number.

use crate::element::law::Solution;
use crate::status::Status;

/// Reynolds number up to which the law is held to be laminar (transition begins near 2000; Stanton & Pannell 1914
/// measured 18 % too much friction at 2200).
pub const LAMINAR_LIMIT: f32 = 1800.0;

/// How far beyond the largest calibrated x a flow may go unflagged.
pub const RANGE_MARGIN: f32 = 1.2;

/// ln(p1/p2) above which the expansion term is past its checked range.
pub const EXPANSION_LIMIT: f32 = 0.7;

/// The pressure drop over line pressure at that limit: 1 - exp(-0.7).
pub(crate) const LARGEST_EXPANSION: f32 = 0.503_414_7;

/// Slip s above which the neglected second order shows (Knudsen number xi/R of 0.015 in tubes).
pub const SLIP_LIMIT: f32 = 0.06;

/// The flags of a solution at its Reynolds number; `x_calibrated` is the largest calibrated x (m), 0 when there is none.
pub(crate) fn judge(reynolds: f32, x_calibrated: f32, at: &Solution<f32>) -> Status {
    let mut status = Status::empty();
    let beyond = x_calibrated > 0.0 && at.x.abs() > RANGE_MARGIN * x_calibrated;
    status.set(Status::NOT_LAMINAR, reynolds > LAMINAR_LIMIT);
    status.set(Status::BEYOND_CALIBRATION, beyond);
    status.set(Status::STRONG_EXPANSION, at.log_ratio > EXPANSION_LIMIT);
    status.set(Status::STRONG_SLIP, at.slip > SLIP_LIMIT);
    status
}
