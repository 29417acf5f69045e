//! The virtual element: the flow through known channels by a numerical solution along them.
//!
//! It shares no formula with the device's law, so a simulated check against it is not circular: what both use is the
//! fluid's stored viscosity, density and conduction group, nothing of the element module (a test asserts that).
//!
//! | included | left out |
//! |---|---|
//! | real-gas density and viscosity at local pressure and temperature; liquids | creeping end loss (`3 pi R/8` of length, Dagan et al. 1982, from memory) |
//! | developing profile from an isentropic, rounded inlet | separation at a sharp inlet edge |
//! | momentum of the expanding gas, no pressure recovery at the outlet | turbulence: beyond Re 2000 a result is flagged |
//! | first-order slip and temperature jump | second-order slip, axial conduction and viscous stress |
//! | viscous heating, expansion and Joule-Thomson cooling; wall isothermal or adiabatic | heat capacity of the wall |
//! | thermal expansion of the element, spread of the bores | bends, roughness, humidity |
//!
//! The equations stand in [`march`].

pub mod refused; // why there is no flow

pub mod heat; // heat capacities, and conductivity of liquids

pub mod substance; // the fluid at a local pressure and temperature

pub mod section; // what a tube and a slot differ in

mod grid; // points across the channel and operators on them

mod differences; // differences along the channel

mod inlet; // plenum to uniform profile

mod profile; // what is carried along the channel

pub mod channel; // one channel, its wall, the units of a march

mod step; // one position of the march

pub mod march; // one channel, inlet to outlet

mod search; // the flow for a pressure drop

pub mod spread; // unequal bores

pub mod element; // channels in parallel

#[doc(inline)]
pub use channel::Wall;
#[doc(inline)]
pub use element::{Outcome, Upstream, VirtualElement};
pub use march::{Resolution, Station};
#[doc(inline)]
pub use refused::Refused;
#[doc(inline)]
pub use section::Section;
#[doc(inline)]
pub use spread::Spread;
#[doc(inline)]
pub use substance::Substance;
