//! Health: what is wrong, which of the categories of NE 107 that is, and whether the flow may be shown as good.
//!
//! Faults of sensors, refusals and flags of a flow, ages of samples and the detectors all become [`Causes`]; a
//! [`Mapping`] puts each into a [`Category`]; [`assess()`] joins them with the flow. What it returns holds no flow at
//! all in the category failure, and calls none good in any category but good. The categories are those of NAMUR NE 107
//! (common practice, from memory); their order of severity is this library's own.

pub mod causes; // every cause as a flag

pub mod mapping; // cause to category

pub mod detectors; // stuck, frozen, noisy, calibration due

pub mod assess; // causes and flow to what may be shown

pub use assess::{Assessed, assess};
pub use causes::Causes;
pub use mapping::{Category, Mapping};
