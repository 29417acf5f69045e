#![doc = include_str!("../README.md")]
#![no_std]

// In the order in which a reading becomes a flow; a file imports only from files above it (tests/layers.rs).

pub mod error; // what can be wrong when something is built

pub mod status; // what a flow is worth, or why there is none

mod math; // the only door to libm and micromath

pub mod quantity; // SI inside, units in names

pub mod reading; // what the sensors say

pub mod fluid; // viscosity and density

pub mod element; // geometry and the law

pub mod reference; // conditions at which flow is quoted

pub mod calibration; // how well the element is known

pub mod regime; // where the law holds

mod state; // fluid and law together, in either precision

pub mod uncertainty; // what the flow is uncertain by

pub mod conditions; // the slow half: per change of temperature and line pressure

pub mod flow_curve; // the fast arithmetic: integers inside

pub mod flow; // the walk

pub mod record; // the calibration as bytes

pub mod double; // the same kernels in double precision, for the bench

#[doc(inline)]
pub use crate::element::Element;
#[doc(inline)]
pub use crate::flow::{Flow, Meter};
#[doc(inline)]
pub use crate::math::quick_root;
#[doc(inline)]
pub use crate::reading::Reading;
#[doc(inline)]
pub use crate::record::Record;
#[doc(inline)]
pub use crate::status::{Refusal, Status};
