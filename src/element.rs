//! The element: its channels, the law that joins pressure drop to flow, and where that law holds.

pub mod geometry; // shape and size to the constants of the law

pub mod profile; // how the velocity is spread over a channel

pub mod ducts; // f Re of channels of other shapes

pub(crate) mod law; // E1: A X + B q X^2 = F, forward and inverse

pub use geometry::{Element, Shape};
