//! Why a sensor gives no value.

use core::fmt;

/// A sensor's fault; a sensor that has one delivers no quantity.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Fault {
    /// A wire or the sensor is broken.
    Open,
    /// A wire or the sensor is short-circuited.
    Short,
    /// The signal lies below what the sensor measures.
    SaturatedLow,
    /// The signal lies above what the sensor measures.
    SaturatedHigh,
    /// The sensor says that this value was already fetched.
    Stale,
    /// The sensor's status bits report a fault of its own.
    Reported,
    /// The signal is not a number or not a word of the sensor's format.
    Invalid,
    /// The bus gave no answer.
    Silent,
}

impl Fault {
    /// The fault's name, lower case with hyphens.
    pub const fn name(self) -> &'static str {
        match self {
            Self::Open => "open",
            Self::Short => "short",
            Self::SaturatedLow => "saturated-low",
            Self::SaturatedHigh => "saturated-high",
            Self::Stale => "stale",
            Self::Reported => "reported",
            Self::Invalid => "invalid",
            Self::Silent => "silent",
        }
    }
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

impl core::error::Error for Fault {}
