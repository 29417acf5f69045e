//! Which category a cause belongs to.

use super::causes::Causes;
use crate::error::Error;
use core::fmt;

/// The categories of NE 107 and good, in rising severity.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Category {
    /// Nothing is wrong.
    Good,
    /// M: the flow is right, but something wears out or falls due.
    MaintenanceRequired,
    /// S: the flow may be less certain than stated.
    OutOfSpecification,
    /// C: the value is for the time being not that of the process.
    FunctionCheck,
    /// F: there is no flow worth showing.
    Failure,
}

impl Category {
    /// The category's name, lower case with hyphens.
    pub const fn name(self) -> &'static str {
        match self {
            Self::Good => "good",
            Self::MaintenanceRequired => "maintenance-required",
            Self::OutOfSpecification => "out-of-specification",
            Self::FunctionCheck => "function-check",
            Self::Failure => "failure",
        }
    }
}

impl fmt::Display for Category {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

/// The category of each cause. A cause can be moved but not silenced: none maps to good.
///
/// ```
/// use evenbore::health::{Category, Causes, Mapping};
/// let mapping = Mapping::default().with(Causes::NOISY, Category::MaintenanceRequired)?;
/// assert_eq!(mapping.category(Causes::NOISY), Category::MaintenanceRequired);
/// assert_eq!(mapping.category(Causes::NOISY | Causes::OPEN), Category::Failure);
/// assert!(mapping.with(Causes::OPEN, Category::OutOfSpecification).is_err());
/// # Ok::<(), evenbore::error::Error>(())
/// ```
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Mapping {
    failure: Causes,
    function_check: Causes,
    maintenance: Causes,
}

impl Mapping {
    /// The same mapping with some causes in another category.
    ///
    /// # Errors
    /// Names the category good, and any but failure for one of [`Causes::NO_NUMBER`].
    pub fn with(self, causes: Causes, category: Category) -> Result<Self, Error> {
        let fixed = category != Category::Failure && causes.intersects(Causes::NO_NUMBER);
        if fixed || category == Category::Good {
            return Err(Error::UnknownCode { field: "category of a cause", code: category as u8 });
        }
        let place = |set: Causes, here| if category == here { set | causes } else { set - causes };
        Ok(Self {
            failure: place(self.failure, Category::Failure),
            function_check: place(self.function_check, Category::FunctionCheck),
            maintenance: place(self.maintenance, Category::MaintenanceRequired),
        })
    }

    /// The most severe category among `causes`. What no set names is out of specification.
    pub const fn category(&self, causes: Causes) -> Category {
        if causes.intersects(self.failure) {
            Category::Failure
        } else if causes.intersects(self.function_check) {
            Category::FunctionCheck
        } else if causes.difference(self.maintenance).bits() != 0 {
            Category::OutOfSpecification
        } else if causes.bits() != 0 {
            Category::MaintenanceRequired
        } else {
            Category::Good
        }
    }
}

impl Default for Mapping {
    /// Failure: what leaves no number, a sensor's own report, stale and frozen samples, no record. Function check:
    /// simulation. Maintenance: a drifted zero, a calibration due. Out of specification: all else.
    fn default() -> Self {
        Self {
            failure: Causes::NO_NUMBER | Causes::REPORTED | Causes::STALE | Causes::FROZEN | Causes::RECORD_MISSING,
            function_check: Causes::SIMULATION,
            maintenance: Causes::ZERO_DRIFTED | Causes::CALIBRATION_DUE,
        }
    }
}
