//! The bench of evenbore: files, calibration, statistics and reports behind the `evenbore` command.
//!
//! It holds no law of its own: fluids, elements and flows are those of the `evenbore` library.

// In the order in which a file becomes a certificate; a file imports only from files above it (tests/layers.rs).

pub mod random; // seeded, the same everywhere

pub mod parallel; // independent work on all processors

pub mod input; // files and command-line values into SI

pub mod output; // whole files or none

pub mod statistics; // fits, distributions, covariances

pub mod resources; // elements and fluids from their files

pub mod virtual_element; // an element computed along its channels, without the law

pub mod virtual_bench; // a scenario into readings with the truth beside them

pub mod calibrate; // points into coefficients, findings and a verdict

pub mod proof; // the claims of the README, measured

pub mod record_file; // the record as text and bytes

pub mod report; // the outcome as one page

pub mod planning; // before and after a calibration: sizes, points, what to expect
