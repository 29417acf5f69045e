//! Shared by the tests: tolerances in one table, elements in one place.
#![allow(dead_code)] // every test file uses its own part

pub mod tolerance;

use evenbore::fluid::StoredFluid;
use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::quantity::{Density, KinematicViscosity, Length, Temperature};
use evenbore::{Element, fluid::catalogue};

/// Elements as makers build them: bundle, large bundle, fine capillaries, short tubes, plates.
pub fn elements() -> [(&'static str, Element); 5] {
    let tubes = |n, bore, length| {
        Element::round_tubes(n, Length::from_millimetres(bore), Length::from_millimetres(length)).unwrap()
    };
    let plates = Element::parallel_plates(
        Length::from_millimetres(0.2),
        Length::from_millimetres(400.0),
        Length::from_millimetres(60.0),
    );
    let steel = |e: Element| e.with_expansion(16e-6, Temperature::from_celsius(20.0)).unwrap();
    [
        ("bundle", steel(tubes(100, 0.5, 100.0))),
        ("large bundle", steel(tubes(600, 0.6, 80.0))),
        ("fine capillaries", steel(tubes(4, 0.2, 100.0))),
        ("short tubes", steel(tubes(200, 0.8, 40.0))),
        ("plates", steel(plates.unwrap())),
    ]
}

/// An ISO VG 32 oil of our own.
pub fn workshop_oil() -> StoredFluid {
    let at = |c, nu| (Temperature::from_celsius(c), KinematicViscosity::from_square_millimetres_per_second(nu));
    mineral_oil(&OilData {
        name: "workshop-oil",
        viscosities: [at(40.0, 32.0), at(100.0, 5.4)],
        density: (Temperature::from_celsius(15.0), Density::from_kilograms_per_cubic_metre(870.0)),
        expansion_per_kelvin: 7.3e-4,
        u_viscosity: 0.005,
    })
    .unwrap()
}

/// All fluids of the catalogue and an oil.
pub fn fluids() -> Vec<StoredFluid> {
    catalogue::ALL.iter().map(|entry| *entry.fluid()).chain([workshop_oil()]).collect()
}

/// `n` values from `low` to `high`, evenly spaced.
pub fn sweep(low: f64, high: f64, n: usize) -> impl Iterator<Item = f64> + Clone {
    (0..n).map(move |i| low + (high - low) * i as f64 / (n - 1) as f64)
}

/// `n` values from `low` to `high`, evenly spaced in their logarithm.
pub fn decades(low: f64, high: f64, n: usize) -> impl Iterator<Item = f64> + Clone {
    sweep(low.ln(), high.ln(), n).map(f64::exp)
}
