//! Calibration: a bench run becomes coefficients, a verdict and a record.
//!
//! points -> samples (the law's columns and how each source of error moves them) -> fit (effective variance, common
//! parts) -> findings (what is wrong with the run) -> outcome (all of it, for people and files).

pub mod outcome; // what is found: the content of calibration.json

pub mod samples; // points into the law's columns, with derivatives

pub mod fit; // A and B with their covariance

pub mod findings; // lack of fit and its cause

pub mod certainty; // uncertainty over the range, and its budget

pub mod verdict; // the whole run judged, the record written
