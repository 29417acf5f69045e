//! Before and after a calibration: sizes for an element, points for its calibration, what it is worth elsewhere.
//!
//! Nothing here has a law of its own. Every flow is that of `evenbore::double::Conditions` or `evenbore::Meter`, every
//! planned calibration goes through `calibrate::fit` with the points it would have, and every uncertainty is the
//! statement of the instrument.

pub mod state; // temperature, line pressure and humidity of a question

pub mod budget; // where an uncertainty comes from, source by source

pub mod stock; // sizes a workshop finds on the shelf

pub mod task; // what an element is sized for

pub mod design; // one candidate, judged by the law

pub mod sizing; // the shortlist, and why the rest is not on it

pub mod bench; // a bench run before it is made

pub mod spacing; // where set-points may lie

pub mod schedule; // what is asked of a calibration, and a plan for it

mod search; // the fewest points that reach a target

pub mod planner; // the plan, or why there is none

pub mod points_file; // the plan as a points file to fill in

pub mod prediction; // what a calibrated element is worth at another state

pub mod prediction_page; // the prediction as table and page

pub mod fluid_build; // a stored table from measured values

pub mod fluid_plot; // viscosity over temperature
