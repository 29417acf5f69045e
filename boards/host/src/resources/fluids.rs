//! Fluids by name: the catalogue's, and those a fluids file declares.

use crate::input::fluids_file::{self, DeclaredFluid, NamedFluid};
use crate::input::problem::{Problem, shown};
use evenbore::fluid::builder::{Frame, Row, interpolate, liquid};
use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::fluid::water_glycol::{Glycol, U_VISCOSITY, water_glycol};
use evenbore::fluid::{StoredFluid, catalogue};
use evenbore::quantity::{AbsolutePressure, Density, KinematicViscosity, Temperature};
use std::path::Path;

/// Uncertainty of a viscosity nobody stated: 1 % (common practice for a data sheet).
const UNSTATED_U_VISCOSITY: f64 = 0.01;

/// The fluids a command knows.
#[derive(Debug, Default)]
pub struct Fluids {
    own: Vec<StoredFluid>,
}

impl Fluids {
    /// The catalogue, and the fluids of a file if one is named.
    ///
    /// # Errors
    /// Where the file cannot be read, or a fluid of it makes no sense.
    pub fn open(file: Option<&Path>) -> Result<Self, Problem> {
        let Some(path) = file else { return Ok(Self::default()) };
        let name = path.display().to_string();
        let build = |fluid: &NamedFluid| {
            stored(fluid).map_err(|error| Problem::new(&name, format!("[{}]: {error}", fluid.name)))
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
            format!("no fluid is called {}; there are: {}", shown(name.as_bytes()), self.names().join(", "))
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
fn stored(declared: &NamedFluid) -> Result<StoredFluid, evenbore::error::Error> {
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
        DeclaredFluid::Table { rows, .. } => {
            let rows: Vec<Row> = rows
                .iter()
                .map(|row| Row { temperature: row.temperature, viscosity: row.viscosity, density: row.density })
                .collect();
            let ends = |t: Option<&Row>| Temperature::from_kelvin(t.map_or(f32::NAN, |row| row.temperature as f32));
            let frame = Frame {
                name: &declared.name,
                temperature_range: [ends(rows.first()), ends(rows.last())],
                pressure_range: [AbsolutePressure::from_pascals(1e3), AbsolutePressure::from_pascals(1e7)],
                at_pressure: AbsolutePressure::from_pascals(101_325.0),
                viscosity_per_pascal: 0.0,
                density_per_pascal: 0.0,
                u_viscosity,
                u_viscosity_ratio: u_viscosity,
            };
            liquid(
                &frame,
                |t| interpolate(&rows, |row| row.viscosity.ln(), t).exp(),
                |t| interpolate(&rows, |row| row.density, t),
            )
        }
    }
}
