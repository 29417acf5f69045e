//! Fits, their uncertainties and the distributions that judge them.
//!
//! Everything here works on plain slices and knows nothing of flow; the calibration brings its columns and takes a
//! [`least_squares::Fit`] home.

use thiserror::Error;

pub mod distributions; // normal, Student, chi-squared, F

pub mod least_squares; // linear fits with priors

pub mod rank_one; // errors common to all points

pub mod both_axes; // a line with errors in both coordinates

pub mod welch; // effective degrees of freedom

/// Why a statistic could not be computed: which input, what it was, and what was allowed.
#[derive(Debug, Clone, PartialEq, Error)]
pub enum StatisticsError {
    /// A single number lies outside its domain.
    #[error("{name} is {value}, it must be {limit}")]
    OutOfRange {
        /// Name of the argument.
        name: &'static str,
        /// Value received.
        value: f64,
        /// Domain in words.
        limit: &'static str,
    },
    /// One entry of a list lies outside its domain.
    #[error("entry {index} of {name} is {value}, it must be {limit}")]
    Entry {
        /// Name of the list.
        name: String,
        /// Position, counted from zero.
        index: usize,
        /// Value received.
        value: f64,
        /// Domain in words.
        limit: &'static str,
    },
    /// A list has the wrong number of entries.
    #[error("{name} has {actual} entries, {needed} are needed")]
    Length {
        /// Name of the list.
        name: String,
        /// Entries received.
        actual: usize,
        /// Entries needed: exactly, or at least where the list is too short.
        needed: usize,
    },
    /// A prior names a column the design does not have.
    #[error("no column is called `{column}`")]
    UnknownColumn {
        /// Name asked for.
        column: String,
    },
    /// A column adds nothing to the columns before it.
    #[error("column `{column}` is a combination of the columns before it: sine of the angle {sine:e}, limit {limit:e}")]
    Dependent {
        /// Name of the column.
        column: String,
        /// Sine of the angle between the column and the span of those before it.
        sine: f64,
        /// Smallest sine accepted.
        limit: f64,
    },
    /// An iteration did not settle.
    #[error("no convergence after {iterations} iterations: last relative step {step:e}, limit {limit:e}")]
    NoConvergence {
        /// Iterations spent.
        iterations: usize,
        /// Last relative step.
        step: f64,
        /// Largest step accepted.
        limit: f64,
    },
}

/// Result of every computation in this module.
pub type Result<T> = std::result::Result<T, StatisticsError>;

/// Passes `value` on if `allowed`, otherwise names it.
fn require(allowed: bool, name: &'static str, value: f64, limit: &'static str) -> Result<f64> {
    if allowed { Ok(value) } else { Err(StatisticsError::OutOfRange { name, value, limit }) }
}

/// Checks the length of a list.
fn require_length(name: &str, actual: usize, needed: usize) -> Result<()> {
    if actual == needed { Ok(()) } else { Err(StatisticsError::Length { name: name.into(), actual, needed }) }
}

/// Checks that a list has enough entries.
fn require_at_least(name: &str, actual: usize, needed: usize) -> Result<()> {
    if actual >= needed { Ok(()) } else { Err(StatisticsError::Length { name: name.into(), actual, needed }) }
}

/// Checks every entry of a list and names the first that fails.
fn require_each(name: &str, values: &[f64], limit: &'static str, allowed: impl Fn(f64) -> bool) -> Result<()> {
    match values.iter().position(|&value| !allowed(value)) {
        None => Ok(()),
        Some(index) => Err(StatisticsError::Entry { name: name.into(), index, value: values[index], limit }),
    }
}

/// Checks that every entry is a finite number.
fn require_finite(name: &str, values: &[f64]) -> Result<()> {
    require_each(name, values, "finite", f64::is_finite)
}

/// Checks that every entry can serve as a standard uncertainty to divide by.
fn require_uncertainties(name: &str, values: &[f64]) -> Result<()> {
    require_each(name, values, "positive and finite", |u| u > 0.0 && u.is_finite())
}
