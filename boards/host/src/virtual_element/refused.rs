//! Why the virtual element gives no flow: one enum, each variant with the numbers that decided.

use thiserror::Error;

/// A case that is physically impossible, or that the solution cannot stand behind.
#[derive(Debug, Clone, PartialEq, Error)]
#[non_exhaustive]
pub enum Refused {
    /// An input is not finite or outside what is accepted.
    #[error("{name} is {value}; accepted: {least} to {most}")]
    OutOfRange {
        /// Name of the input, with its unit.
        name: &'static str,
        /// The value given.
        value: f64,
        /// Smallest accepted value.
        least: f64,
        /// Largest accepted value.
        most: f64,
    },
    /// A shape without known channels.
    #[error("an element of shape \"other\" has no channels to compute a flow in")]
    UnknownChannels,
    /// The pressure falls to vacuum before the outlet.
    #[error("the pressure reaches {pressure:.0} Pa at {position:.3} of the length: this flow cannot be driven")]
    Vacuum {
        /// Pressure reached, Pa.
        pressure: f64,
        /// Where, as a fraction of the length.
        position: f64,
    },
    /// The flow is too fast for a solution that holds pressure uniform over the section and knows no shock.
    #[error("Mach {mach:.2} at {position:.3} of the length, at most {limit} is computed")]
    Choking {
        /// Mach number of the mean velocity.
        mach: f64,
        /// Where, as a fraction of the length.
        position: f64,
        /// Largest Mach number accepted.
        limit: f64,
    },
    /// The fluid's table excludes the state: another phase may begin there.
    #[error(
        "{temperature:.2} K and {pressure:.0} Pa lie outside the table of {fluid} ({low:.2} to {high:.2} K, {bottom:.0} to {top:.0} Pa)"
    )]
    OutsideTable {
        /// Name of the fluid.
        fluid: String,
        /// Temperature of the state, K.
        temperature: f64,
        /// Absolute pressure of the state, Pa.
        pressure: f64,
        /// Lowest temperature of the table, K.
        low: f64,
        /// Highest temperature of the table, K.
        high: f64,
        /// Lowest pressure of the table, Pa.
        bottom: f64,
        /// Highest pressure of the table, Pa.
        top: f64,
    },
    /// The equations of a step, or the search for the flow, did not settle.
    #[error("{what} did not settle: last relative change {change:e}")]
    NotSettled {
        /// What was iterated.
        what: &'static str,
        /// Last relative change.
        change: f64,
    },
}

/// Accepts a finite value within limits, else names it.
pub(crate) fn within(name: &'static str, value: f64, least: f64, most: f64) -> Result<f64, Refused> {
    if value >= least && value <= most { Ok(value) } else { Err(Refused::OutOfRange { name, value, least, most }) }
}
