//! Shared by the tests: tolerances in one table, elements in one place.
#![allow(dead_code)] // every test file uses its own part

pub mod tolerance;

use evenbore::fluid::StoredFluid;
use evenbore::fluid::builder::{Frame, liquid};
use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::quantity::{AbsolutePressure, Density, KinematicViscosity, Length, Temperature};
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

/// Cells of a comma-separated file under `tests/published`, without its comments and its line of names.
pub fn rows(file: &str) -> Vec<Vec<String>> {
    let path = format!("{}/tests/published/{file}", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(&path).unwrap_or_else(|error| panic!("{path}: {error}"));
    let lines = text.lines().filter(|line| !line.starts_with('#') && !line.is_empty()).skip(1);
    lines.map(|line| line.split(',').map(|cell| cell.trim().to_owned()).collect()).collect()
}

/// The number in a cell.
pub fn number(row: &[String], column: usize) -> f64 {
    row[column].parse().unwrap_or_else(|_| panic!("column {column} of {row:?} is no number"))
}

/// The fluid of one viscosity (Pa s) and density (kg/m3) at every temperature and pressure.
pub fn constant_liquid(viscosity: f64, density: f64) -> StoredFluid {
    let frame = Frame {
        name: "constant",
        temperature_range: [Temperature::from_celsius(0.0), Temperature::from_celsius(100.0)],
        pressure_range: [AbsolutePressure::from_pascals(1e3), AbsolutePressure::from_pascals(1e7)],
        at_pressure: AbsolutePressure::from_pascals(1e5),
        viscosity_per_pascal: 0.0,
        density_per_pascal: 0.0,
        u_viscosity: 0.0,
        u_viscosity_ratio: 0.0,
    };
    liquid(&frame, |_| viscosity, |_| density).unwrap()
}

/// Largest and root-mean-square error of a sweep; an error that is not a number fails at once.
#[derive(Default)]
pub struct Errors {
    /// Largest magnitude.
    pub worst: f64,
    /// Where it is.
    pub place: String,
    /// How many there were.
    pub count: usize,
    squares: f64,
}

impl Errors {
    /// Takes in one error.
    pub fn add(&mut self, error: f64, place: impl FnOnce() -> String) {
        assert!(error.is_finite(), "error {error} at {}", place());
        self.squares += error * error;
        self.count += 1;
        if error.abs() > self.worst {
            (self.worst, self.place) = (error.abs(), place());
        }
    }

    /// Prints the figures and asserts that there were errors to judge, and that none exceeds `limit`.
    pub fn judge(&self, what: &str, limit: f64) {
        let rms = (self.squares / self.count as f64).sqrt();
        println!("{what}: worst {:.3e} at {}, rms {rms:.3e}, {} cases", self.worst, self.place, self.count);
        assert!(self.count > 0 && self.worst <= limit, "{what}: {:.3e} > {limit:e} at {}", self.worst, self.place);
    }
}
