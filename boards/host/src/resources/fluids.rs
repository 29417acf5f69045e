//! Fluids by name: the catalogue's, and those a fluids file declares.

use crate::input::fluid_table::FluidRow;
use crate::input::fluids_file::{self, DeclaredFluid, NamedFluid};
use crate::input::nearest::did_you_mean;
use crate::input::problem::{Problem, shown};
use evenbore::double::Properties;
use evenbore::error::Error;
use evenbore::fluid::builder::{Frame, Row, gas, interpolate, liquid};
use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::fluid::water_glycol::{Glycol, U_VISCOSITY, water_glycol};
use evenbore::fluid::{StoredFluid, catalogue};
use evenbore::quantity::{AbsolutePressure, Density, KinematicViscosity, Temperature};
use std::path::Path;

/// Uncertainty of a viscosity nobody stated: 1 % (common practice for a data sheet).
const UNSTATED_U_VISCOSITY: f64 = 0.01;
/// Compressibility factors a gas that a laminar element measures may have.
const LEAST_Z: f64 = 0.8;
const LARGEST_Z: f64 = 1.2;
/// Absolute pressures a user's table serves, Pa: a gas's compressibility is taken as linear in pressure.
const LIQUID_PRESSURES: [f32; 2] = [1e3, 1e7];
const GAS_PRESSURES: [f32; 2] = [1e3, 1e6];
/// J/(mol K), exact since the SI of 2019.
const MOLAR_GAS_CONSTANT: f64 = 8.314_462_618_153_24;

/// The fluids a command knows.
#[derive(Debug, Default)]
pub struct Fluids {
    own: Vec<StoredFluid>,
}

impl Fluids {
    /// The catalogue, and the fluids of a file if one is named.
    ///
    /// # Errors
    /// Where the file cannot be read, or a fluid of it makes no sense or has a name of the catalogue.
    pub fn open(file: Option<&Path>) -> Result<Self, Problem> {
        let Some(path) = file else { return Ok(Self::default()) };
        let name = path.display().to_string();
        let build = |fluid: &NamedFluid| {
            let problem = |message: String| Problem::new(&name, format!("[{}]: {message}", fluid.name));
            if catalogue::find(&fluid.name).is_some() {
                return Err(problem("a fluid of the catalogue has this name: choose another".into()));
            }
            check_compressibility(fluid)?;
            let built = stored(fluid).map_err(|error| problem(error.to_string()))?;
            check_rows(fluid, &built).map(|()| built)
        };
        Ok(Self { own: fluids_file::open(path)?.iter().map(build).collect::<Result<_, _>>()? })
    }

    /// The fluid of a name; the user's own come first.
    ///
    /// # Errors
    /// Lists the names there are.
    pub fn find(&self, name: &str) -> Result<&StoredFluid, String> {
        let own = self.own.iter().find(|fluid| fluid.name() == name);
        own.or_else(|| catalogue::find(name).map(|entry| entry.fluid())).ok_or_else(|| {
            let (names, wrong) = (self.names(), shown(name.as_bytes()));
            format!("no fluid is called {wrong}: there are {}{}", names.join(", "), did_you_mean(name, &names))
        })
    }

    /// Names of all fluids, the user's own first.
    pub fn names(&self) -> Vec<&str> {
        self.all().map(StoredFluid::name).collect()
    }

    /// All fluids, the user's own first.
    pub fn all(&self) -> impl Iterator<Item = &StoredFluid> {
        self.own.iter().chain(catalogue::ALL.iter().map(|entry| entry.fluid()))
    }
}

/// Builds the stored table of a declared fluid.
///
/// # Errors
/// Names the value that no table can hold.
pub fn stored(declared: &NamedFluid) -> Result<StoredFluid, Error> {
    let u_viscosity = declared.u_viscosity_rel.unwrap_or(UNSTATED_U_VISCOSITY) as f32;
    match &declared.fluid {
        DeclaredFluid::Oil { kinematic_viscosity_mm2_s, density_kg_m3: [celsius, density], expansion_per_k } => {
            let point = |[celsius, nu]: [f64; 2]| {
                (
                    Temperature::from_celsius(celsius as f32),
                    KinematicViscosity::from_square_millimetres_per_second(nu as f32),
                )
            };
            mineral_oil(&OilData {
                name: &declared.name,
                viscosities: kinematic_viscosity_mm2_s.map(point),
                density: (
                    Temperature::from_celsius(*celsius as f32),
                    Density::from_kilograms_per_cubic_metre(*density as f32),
                ),
                expansion_per_kelvin: *expansion_per_k as f32,
                u_viscosity,
            })
        }
        DeclaredFluid::WaterGlycol { glycol, mass_fraction } => {
            let glycol = match glycol {
                fluids_file::Glycol::Ethylene => Glycol::Ethylene,
                fluids_file::Glycol::Propylene => Glycol::Propylene,
            };
            let u = declared.u_viscosity_rel.map_or(U_VISCOSITY, |u| u as f32);
            water_glycol(&declared.name, glycol, *mass_fraction as f32, u)
        }
        DeclaredFluid::Table { rows, molar_mass_g_mol, pressure_kpa, .. } => {
            let table = Table { name: &declared.name, rows, u_viscosity, pressure: pressure_kpa * 1e3 };
            match molar_mass_g_mol {
                Some(grams) => table.gas(grams * 1e-3),
                None => table.liquid(),
            }
        }
    }
}

/// A user's table on its way into a stored one.
struct Table<'a> {
    name: &'a str,
    rows: &'a [FluidRow],
    u_viscosity: f32,
    /// Absolute pressure of the data, Pa.
    pressure: f64,
}

impl Table<'_> {
    fn frame(&self, pressures: [f32; 2]) -> Frame<'_> {
        let end = |row: Option<&FluidRow>| row.map_or(f32::NAN, |row| row.temperature as f32);
        Frame {
            name: self.name,
            temperature_range: [end(self.rows.first()), end(self.rows.last())].map(Temperature::from_kelvin),
            pressure_range: pressures.map(AbsolutePressure::from_pascals),
            at_pressure: AbsolutePressure::from_pascals(self.pressure as f32),
            viscosity_per_pascal: 0.0,
            density_per_pascal: 0.0,
            u_viscosity: self.u_viscosity,
            u_viscosity_ratio: self.u_viscosity,
        }
    }

    fn rows(&self) -> Vec<Row> {
        let row = |row: &FluidRow| Row { temperature: row.temperature, viscosity: row.viscosity, density: row.density };
        self.rows.iter().map(row).collect()
    }

    fn liquid(&self) -> Result<StoredFluid, Error> {
        let rows = self.rows();
        liquid(
            &self.frame(LIQUID_PRESSURES),
            |t| interpolate(&rows, |row| row.viscosity.ln(), t).exp(),
            |t| interpolate(&rows, |row| row.density, t),
        )
    }

    /// A gas of `molar_mass` (kg/mol); its compressibility factor follows from its densities.
    fn gas(&self, molar_mass: f64) -> Result<StoredFluid, Error> {
        let rows = self.rows();
        let ideal = |t: f64| self.pressure * molar_mass / (MOLAR_GAS_CONSTANT * t);
        gas(
            &self.frame(GAS_PRESSURES),
            molar_mass as f32,
            |t| interpolate(&rows, |row| row.viscosity, t),
            |t| ideal(t) / interpolate(&rows, |row| row.density, t),
        )
    }
}

/// Refuses a table whose stored curves miss its own rows, and gas rows that the molar mass contradicts.
///
/// # Errors
/// Names the line, the value and the limit.
pub fn check_rows(declared: &NamedFluid, fluid: &StoredFluid) -> Result<(), Problem> {
    let DeclaredFluid::Table { data, rows, pressure_kpa, residual_limit, .. } = &declared.fluid else {
        return Ok(());
    };
    let file = data.display().to_string();
    for row in rows {
        let at = Properties::at(fluid, row.temperature);
        let pressure = pressure_kpa * 1e3;
        let found =
            [("viscosity", at.viscosity(pressure), row.viscosity), ("density", at.density(pressure), row.density)];
        if let Some((what, stored, given)) = found.into_iter().find(|(_, s, g)| (s / g - 1.0).abs() > *residual_limit) {
            let message = format!(
                "[{}]: the stored curve gives a {what} of {stored:.5e} where the row has {given:.5e}, {:+.2} % (limit \
                 {} %): rows this far from a smooth curve need a narrower range of temperature or a second look",
                declared.name,
                100.0 * (stored / given - 1.0),
                100.0 * residual_limit
            );
            return Err(Problem::new(file, message).at_line(row.line));
        }
    }
    Ok(())
}

/// Refuses a gas's table whose densities do not go with its molar mass and pressure, before anything is built of it.
///
/// # Errors
/// The first row with an impossible compressibility factor.
pub fn check_compressibility(declared: &NamedFluid) -> Result<(), Problem> {
    let DeclaredFluid::Table { data, rows, molar_mass_g_mol: Some(grams), pressure_kpa, .. } = &declared.fluid else {
        return Ok(());
    };
    let pressure = pressure_kpa * 1e3;
    for row in rows {
        let z = pressure * grams * 1e-3 / (MOLAR_GAS_CONSTANT * row.temperature * row.density);
        if !(LEAST_Z..=LARGEST_Z).contains(&z) {
            let message = format!(
                "[{}]: a density of {} kg/m3 at {pressure_kpa} kPa and a molar mass of {grams} g/mol give a \
                 compressibility factor of {z:.3} (limits {LEAST_Z} to {LARGEST_Z}): one of the three is in the wrong unit",
                declared.name, row.density
            );
            return Err(Problem::new(data.display().to_string(), message).at_line(row.line));
        }
    }
    Ok(())
}
