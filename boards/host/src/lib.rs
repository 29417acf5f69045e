//! skeleton

pub mod statistics;
