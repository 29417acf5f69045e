//! Fluids: stored tables of viscosity and density, and what is built into the same form from a few numbers.

pub mod stored; // the stored table and its units of storage

#[cfg(feature = "serde")]
mod as_text; // names and curves for serde

pub(crate) mod properties; // a table evaluated at one temperature

pub mod catalogue; // the fluids that come with the library, with source, range and residual

pub mod moist_air; // water vapour in air: a correction to the dry table

pub mod builder; // a table from any smooth formulation

pub mod mineral_oil; // ASTM D341 through two kinematic viscosities

pub mod water_glycol; // published polynomials in concentration and temperature

pub use stored::CatalogueEntry;
pub use stored::{Phase, StoredFluid};
