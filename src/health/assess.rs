//! Causes and flow to what may be shown.

use super::causes::Causes;
use super::mapping::{Category, Mapping};
use crate::conditions::Sample;
use crate::quantity::VolumeFlow;

/// A flow as far as it may be shown, its category and all causes.
///
/// Its fields are private, so that a flow cannot be had without having been asked for by its worth: [`Assessed::good`],
/// or [`Assessed::shown`] beside [`Assessed::category`].
#[derive(Debug, Clone, Copy, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Assessed {
    sample: Option<Sample>,
    category: Category,
    causes: Causes,
}

impl Assessed {
    /// The flow when nothing is wrong, else nothing.
    pub const fn good(&self) -> Option<&Sample> {
        match self.category {
            Category::Good => self.sample.as_ref(),
            _ => None,
        }
    }

    /// The flow in every category but failure; the caller shows the category beside it.
    pub const fn shown(&self) -> Option<&Sample> {
        self.sample.as_ref()
    }

    /// The most severe category.
    pub const fn category(&self) -> Category {
        self.category
    }

    /// Everything that is wrong.
    pub const fn causes(&self) -> Causes {
        self.causes
    }
}

/// Joins the outcome of a measurement with what else is known to be wrong.
///
/// `outcome` is the flow, or what stood in its way: [`Fault`](crate::sensor::Fault) and
/// [`Refusal`](crate::status::Refusal) convert into [`Causes`] by `?`. The flow's own status joins `also`. The
/// contract, tested with every cause and every mapping (`tests/signal_health.rs`): in the category failure there is no
/// flow; a flow is good only without any cause; without a flow the category is failure.
///
/// ```
/// use evenbore::health::{Category, Causes, Mapping, assess};
/// use evenbore::sensor::Fault;
/// let broken = assess(Err(Fault::Open.into()), Causes::empty(), &Mapping::default());
/// assert_eq!(broken.category(), Category::Failure);
/// assert!(broken.shown().is_none() && broken.good().is_none());
/// ```
pub fn assess(outcome: Result<Sample, Causes>, also: Causes, mapping: &Mapping) -> Assessed {
    match outcome {
        Ok(sample) => {
            let numbers = if is_finite(&sample) { Causes::empty() } else { Causes::INVALID };
            let causes = also | Causes::from(sample.status) | numbers;
            let category = mapping.category(causes);
            let sample = if category == Category::Failure { None } else { Some(sample) };
            Assessed { sample, category, causes }
        }
        Err(why) => {
            let why = if why.is_empty() { Causes::INVALID } else { why };
            Assessed { sample: None, category: Category::Failure, causes: also | why }
        }
    }
}

/// Whether every flow of a sample is a number, whoever made it.
fn is_finite(sample: &Sample) -> bool {
    let standard = sample.standard.map_or(0.0, VolumeFlow::as_cubic_metres_per_second);
    sample.volume.as_cubic_metres_per_second().is_finite()
        && sample.mass.as_kilograms_per_second().is_finite()
        && standard.is_finite()
}
