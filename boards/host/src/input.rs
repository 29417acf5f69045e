//! Files coming in: bench tables, element files and fluids files, read with errors that say where and what was expected.
//!
//! Every value leaves this module in SI units (Pa, K, m3/s, kg/s, s, and 1 for humidity), in double precision. Element
//! and fluids files keep the units of their keys, since those names are what the user reads.

pub mod problem;

pub mod nearest;
pub mod number;
pub mod source;

pub mod units;

pub mod header;
pub mod written;

pub mod lines;
pub mod row;

pub mod table;

pub mod plausible;
pub mod uncertain;

pub mod readings;

pub mod points;

pub mod toml_text;

pub mod toml_table;

pub mod element_file;
pub mod fluid_table;
pub mod fluids_file;
