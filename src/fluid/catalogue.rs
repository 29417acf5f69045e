//! The fluids that come with the library.
//!
//! Each file below is generated (DEVELOPERS.md, "Adding a fluid"); each entry names its sources, its range, how far the
//! stored table lies from its formulation, and what its viscosity is worth.

pub use super::stored::CatalogueEntry;

mod air;
mod argon;
mod carbon_dioxide;
mod helium;
mod hydrogen;
mod krypton;
mod methane;
mod neon;
mod nitrogen;
mod oxygen;
mod propane;
mod sulfur_hexafluoride;
mod water;
mod xenon;

pub use air::AIR;
pub use argon::ARGON;
pub use carbon_dioxide::CARBON_DIOXIDE;
pub use helium::HELIUM;
pub use hydrogen::HYDROGEN;
pub use krypton::KRYPTON;
pub use methane::METHANE;
pub use neon::NEON;
pub use nitrogen::NITROGEN;
pub use oxygen::OXYGEN;
pub use propane::PROPANE;
pub use sulfur_hexafluoride::SULFUR_HEXAFLUORIDE;
pub use water::WATER;
pub use xenon::XENON;

/// Every fluid of the catalogue.
pub static ALL: [&CatalogueEntry; 14] = [
    &NITROGEN,
    &AIR,
    &ARGON,
    &HELIUM,
    &OXYGEN,
    &HYDROGEN,
    &CARBON_DIOXIDE,
    &METHANE,
    &PROPANE,
    &SULFUR_HEXAFLUORIDE,
    &NEON,
    &KRYPTON,
    &XENON,
    &WATER,
];

/// The fluid of a name, if the catalogue has it.
///
/// ```
/// use evenbore::fluid::catalogue::find;
/// assert_eq!(find("helium").map(|entry| entry.fluid().name()), Some("helium"));
/// assert!(find("phlogiston").is_none());
/// ```
pub fn find(name: &str) -> Option<&'static CatalogueEntry> {
    ALL.into_iter().find(|entry| entry.fluid().name() == name)
}
