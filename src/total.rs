//! Totals: what has flowed since the beginning, in whole sub-units, so that nothing is ever too small to count.
//!
//! A single-precision total stops growing after 2^24 steps. Here each step, flow times time, is an integer: the flow's
//! 24-bit mantissa times milliseconds times an integer factor, shifted by the flow's exponent, in nanolitres or
//! micrograms with 64 binary digits after the point.

mod counter; // one direction: count, fraction, rollover

mod running; // the totals as they grow

mod snapshot; // the totals as bytes

pub use counter::{Counter, NotCounted, ROLLOVER};
pub use running::{Total, Totals};
pub use snapshot::SNAPSHOT_LENGTH;
