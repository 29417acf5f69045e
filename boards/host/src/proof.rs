//! What the README claims, measured: the calibrated instrument against the virtual element.
//!
//! A run is made of the virtual element's flows, goes through `calibrate::verdict` as a real one does, and the record
//! that comes out reads back pressure drops of the virtual element. The law is judged by a solution that shares nothing
//! with it but the fluid's stored properties, the statement of uncertainty by errors drawn around the truth.

pub mod rig; // an element three times: drawn, made, true

pub mod accuracy; // errorless calibrations used elsewhere

pub mod coverage; // how often stated intervals hold the truth
