//! Elements and fluids from their files, as the library's own types.

pub mod elements; // element files

pub mod fluids; // the catalogue and fluids files
