//! The virtual bench: a scenario's flows by the virtual element, read by virtual sensors, with faults on demand.
//!
//! What it writes is a readings file with the truth beside each reading. The same scenario gives the same file on every
//! machine: all noise comes from its seed.

pub mod physical; // states that cannot be, and why

pub mod moist_air; // air with water vapour as a gas of its own

pub mod truth; // the virtual element, tabulated where many samples share conditions

pub mod sensor; // what a sensor makes of a true value

pub mod fault; // what goes wrong, and when

pub mod scenario; // the file

pub mod run; // scenario into rows
