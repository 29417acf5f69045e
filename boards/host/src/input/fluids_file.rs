//! The fluids file: fluids of the user's own, each a TOML table.

use std::path::{Path, PathBuf};

use crate::input::{
    fluid_table::{FluidRow, read_rows},
    problem::{Problem, shown},
    toml_table::{Limits, Section},
    toml_text::TomlText,
};

/// Longest name of a fluid, in characters: what a record has room for.
const LONGEST_NAME: usize = evenbore::fluid::stored::NAME_LENGTH;
const TEMPERATURE: Limits = Limits::new(-150.0, 400.0, "C");
const KINEMATIC_VISCOSITY: Limits = Limits::new(0.2, 1e6, "mm2/s");
const DENSITY: Limits = Limits::new(300.0, 3000.0, "kg/m3");
const EXPANSION: Limits = Limits::new(0.0, 5e-3, "1/K");
const U_VISCOSITY: Limits = Limits::new(0.0, 1.0, "");
const MOLAR_MASS: Limits = Limits::new(1.0, 1000.0, "g/mol");
const PRESSURE: Limits = Limits::new(1.0, 20_000.0, "kPa");
const RESIDUAL: Limits = Limits::new(1e-6, 0.05, "");
/// Share of a row's value by which a stored curve may miss it when the file says nothing.
pub const USUAL_RESIDUAL: f64 = 1e-3;
const MASS_FRACTION: Limits = Limits::new(0.0, 1.0, "");

/// Pressure of a gas table that states none: the standard atmosphere, kPa.
const STANDARD_PRESSURE: f64 = 101.325;

const KINDS: &[&str] = &["oil", "water-glycol", "table"];
const GLYCOLS: &[&str] = &["ethylene", "propylene"];
/// Keys of each kind, in the order of [`KINDS`].
const KEYS: [&[&str]; 3] = [
    &["kind", "kinematic_viscosity_mm2_s", "density_kg_m3", "expansion_per_K", "u_viscosity_rel"],
    &["kind", "glycol", "mass_fraction", "u_viscosity_rel"],
    &["kind", "data", "molar_mass_g_mol", "pressure_kPa", "u_viscosity_rel", "residual_limit_rel"],
];

/// A fluid of the user's own.
#[derive(Clone, Debug, PartialEq)]
pub struct NamedFluid {
    /// Name as used in `fluid` columns and on the command line.
    pub name: String,
    /// Relative standard uncertainty of the viscosity, where stated.
    pub u_viscosity_rel: Option<f64>,
    /// What is known of it.
    pub fluid: DeclaredFluid,
}

/// What is known of a fluid, in the units of the file.
#[derive(Clone, Debug, PartialEq)]
pub enum DeclaredFluid {
    /// An oil through two kinematic viscosities.
    Oil {
        /// Two pairs of temperature, C, and kinematic viscosity, mm2/s, the colder first.
        kinematic_viscosity_mm2_s: [[f64; 2]; 2],
        /// Temperature, C, and density, kg/m3.
        density_kg_m3: [f64; 2],
        /// Volume expansion with temperature, 1/K.
        expansion_per_k: f64,
    },
    /// A mixture of water and a glycol.
    WaterGlycol {
        /// Which glycol.
        glycol: Glycol,
        /// Part of the mass that is glycol, 0 to 1.
        mass_fraction: f64,
    },
    /// A table of measured values, the coldest first.
    Table {
        /// Where the table stands.
        data: PathBuf,
        /// At least four rows, SI.
        rows: Vec<FluidRow>,
        /// Molar mass, g/mol, which makes it a gas; a liquid has none.
        molar_mass_g_mol: Option<f64>,
        /// Absolute pressure at which a gas has the densities of its rows, kPa.
        pressure_kpa: f64,
        /// Share of a row's value by which the stored curve may miss it.
        residual_limit: f64,
    },
}

/// A glycol.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Glycol {
    /// Ethylene glycol, ethane-1,2-diol.
    Ethylene,
    /// Propylene glycol, propane-1,2-diol.
    Propylene,
}

/// Reads a fluids file with the tables it names.
///
/// * `path`: of the TOML file, or `-` for standard input; tables are looked for in its folder
///
/// # Errors
/// Where a file is unreadable, a key is unknown or missing, a value is out of range, or no fluid is declared.
pub fn open(path: impl AsRef<Path>) -> Result<Vec<NamedFluid>, Problem> {
    let path = path.as_ref();
    read(&TomlText::open(path)?, path.parent().unwrap_or(Path::new("")))
}

/// Reads the text of a fluids file.
///
/// * `text`: with its name
/// * `folder`: where the tables it names are looked for
///
/// # Errors
/// As for [`open`].
///
/// ```
/// use std::path::Path;
/// use evenbore_bench::input::{fluids_file, toml_text::TomlText};
/// let text = "[coolant]\nkind = \"water-glycol\"\nglycol = \"ethylene\"\nmass_fraction = 0.3\n";
/// let fluids = fluids_file::read(&TomlText::new("fluids.toml", text), Path::new(""))?;
/// assert_eq!(fluids[0].name, "coolant");
/// # Ok::<(), evenbore_bench::input::problem::Problem>(())
/// ```
pub fn read(text: &TomlText, folder: &Path) -> Result<Vec<NamedFluid>, Problem> {
    let top = Section::top(text)?;
    let nothing = top.problem("", "the file declares no fluid: a line [name] with keys below it was expected");
    let fluids: Vec<NamedFluid> =
        top.into_tables()?.iter().map(|keys| named(keys, folder)).collect::<Result<_, _>>()?;
    if fluids.is_empty() { Err(nothing) } else { Ok(fluids) }
}

/// Reads one fluid.
fn named(keys: &Section<'_>, folder: &Path) -> Result<NamedFluid, Problem> {
    check_name(keys)?;
    let kind = keys.choice("kind", KINDS)?;
    keys.accept(KEYS[kind])?;
    let fluid = match kind {
        0 => oil(keys)?,
        1 => water_glycol(keys)?,
        _ => table(keys, folder)?,
    };
    let u_viscosity_rel = keys.optional_number("u_viscosity_rel", U_VISCOSITY)?;
    Ok(NamedFluid { name: keys.name().to_owned(), u_viscosity_rel, fluid })
}

/// Refuses names that could not be written in a column or on a command line.
fn check_name(keys: &Section<'_>) -> Result<(), Problem> {
    let name = keys.name();
    let plain = name.bytes().all(|byte| byte.is_ascii_alphanumeric() || b"-_.".contains(&byte));
    if plain && !name.is_empty() && name.len() <= LONGEST_NAME {
        return Ok(());
    }
    let name = shown(name.as_bytes());
    let message = format!("the name {name} is not 1 to {LONGEST_NAME} letters, digits, hyphens, underscores or points");
    Err(keys.problem("", message))
}

/// Reads an oil.
fn oil(keys: &Section<'_>) -> Result<DeclaredFluid, Problem> {
    let key = "kinematic_viscosity_mm2_s";
    let mut pairs = keys.two_pairs(key, [TEMPERATURE, KINEMATIC_VISCOSITY])?;
    pairs.sort_by(|a, b| a[0].total_cmp(&b[0]));
    let [[cold, thick], [warm, thin]] = pairs;
    if cold == warm || thick <= thin {
        let message = format!(
            "{thick} mm2/s at {cold} C and {thin} mm2/s at {warm} C: two temperatures were expected, the warmer with \
             the lower viscosity"
        );
        return Err(keys.problem(key, message));
    }
    Ok(DeclaredFluid::Oil {
        kinematic_viscosity_mm2_s: pairs,
        density_kg_m3: keys.pair("density_kg_m3", [TEMPERATURE, DENSITY])?,
        expansion_per_k: keys.number("expansion_per_K", EXPANSION)?,
    })
}

/// Reads a mixture of water and a glycol.
fn water_glycol(keys: &Section<'_>) -> Result<DeclaredFluid, Problem> {
    let glycol = if keys.choice("glycol", GLYCOLS)? == 0 { Glycol::Ethylene } else { Glycol::Propylene };
    Ok(DeclaredFluid::WaterGlycol { glycol, mass_fraction: keys.number("mass_fraction", MASS_FRACTION)? })
}

/// Reads a fluid given by a table.
fn table(keys: &Section<'_>, folder: &Path) -> Result<DeclaredFluid, Problem> {
    let data = folder.join(keys.text("data")?);
    let molar_mass_g_mol = keys.optional_number("molar_mass_g_mol", MOLAR_MASS)?;
    if molar_mass_g_mol.is_none() && keys.has("pressure_kPa") {
        let message = "belongs to a gas, which has a molar_mass_g_mol; without one the table is a liquid's";
        return Err(keys.problem("pressure_kPa", message));
    }
    let pressure_kpa = keys.optional_number("pressure_kPa", PRESSURE)?.unwrap_or(STANDARD_PRESSURE);
    let residual_limit = keys.optional_number("residual_limit_rel", RESIDUAL)?.unwrap_or(USUAL_RESIDUAL);
    Ok(DeclaredFluid::Table { rows: read_rows(&data)?, data, molar_mass_g_mol, pressure_kpa, residual_limit })
}
