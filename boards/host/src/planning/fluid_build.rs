//! A stored table from a user's measured values, and how far it lies from them.

pub use crate::input::fluids_file::USUAL_RESIDUAL as USUAL_LIMIT;
use crate::input::fluids_file::{self, DeclaredFluid, NamedFluid};
use crate::input::problem::Problem;
use crate::input::toml_text::TomlText;
use crate::resources::fluids::{check_compressibility, check_rows, stored};
use evenbore::double::Properties;
use evenbore::fluid::StoredFluid;
use serde::Serialize;
use std::path::Path;

/// Pressure at which the rows of a liquid hold, Pa.
const LIQUID_PRESSURE: f64 = 101_325.0;

/// What the user says of the fluid.
#[derive(Debug, Clone, Copy)]
pub struct Declaration<'a> {
    /// Name of the fluid.
    pub name: &'a str,
    /// The CSV file as the fluids file is to name it.
    pub data: &'a str,
    /// Molar mass, g/mol, of a gas.
    pub molar_mass_g_mol: Option<f64>,
    /// Absolute pressure of a gas's rows, kPa.
    pub pressure_kpa: Option<f64>,
    /// Relative standard uncertainty of viscosity.
    pub u_viscosity: Option<f64>,
    /// Share by which the table may miss a row.
    pub limit: f64,
}

/// The worst row of a table in one property.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct Residual {
    /// Stored over given, less one, ppm.
    pub ppm: f64,
    /// Line in the CSV file.
    pub line: u64,
}

/// A built table.
#[derive(Debug, Clone)]
pub struct Built {
    /// Lines for a fluids file.
    pub stanza: String,
    /// The stored table, as `--fluids` makes it.
    pub fluid: StoredFluid,
    /// Rows of the CSV file.
    pub rows: usize,
    /// Worst residual of viscosity and of density.
    pub residuals: [Residual; 2],
}

impl Declaration<'_> {
    /// Lines for a fluids file.
    ///
    /// ```
    /// use evenbore_bench::planning::fluid_build::{Declaration, USUAL_LIMIT};
    /// let declaration = Declaration {
    ///     name: "brine", data: "brine.csv", molar_mass_g_mol: None, pressure_kpa: None, u_viscosity: Some(0.005),
    ///     limit: USUAL_LIMIT,
    /// };
    /// assert_eq!(
    ///     declaration.stanza(),
    ///     "[brine]\nkind = \"table\"\ndata = \"brine.csv\"\nu_viscosity_rel = 0.005\n"
    /// );
    /// ```
    pub fn stanza(&self) -> String {
        let quoted = |text: &str| toml::Value::String(text.into()).to_string();
        let plain = self.name.bytes().all(|c| c.is_ascii_alphanumeric() || c == b'-' || c == b'_');
        let name = if plain && !self.name.is_empty() { self.name.into() } else { quoted(self.name) };
        let mut text = format!("[{name}]\nkind = \"table\"\ndata = {}\n", quoted(self.data));
        let further = [
            ("molar_mass_g_mol", self.molar_mass_g_mol),
            ("pressure_kPa", self.pressure_kpa),
            ("u_viscosity_rel", self.u_viscosity),
            ("residual_limit_rel", (self.limit > USUAL_LIMIT).then_some(self.limit)),
        ];
        for (key, value) in further {
            if let Some(value) = value {
                text += &format!("{key} = {value:?}\n");
            }
        }
        text
    }

    /// Builds the table through the very reader of fluids files, and compares it with its rows.
    ///
    /// * `folder`: in which `data` is looked for
    ///
    /// # Errors
    /// What a fluids file of these lines would be refused for, and a row that the table misses by more than the limit.
    pub fn build(&self, folder: &Path) -> Result<Built, Problem> {
        let stanza = self.stanza();
        let declared = fluids_file::read(&TomlText::new("the table's own lines", &stanza), folder)?;
        let Some(named) = declared.first() else { return Err(Problem::new(self.data, "declares no fluid")) };
        check_compressibility(named)?;
        let fluid = stored(named).map_err(|error| Problem::new(self.data, error.to_string()))?;
        let (rows, residuals) = compare(named, &fluid);
        for (residual, what) in residuals.iter().zip(["viscosity", "density"]) {
            if residual.ppm.abs() > 1e6 * self.limit {
                return Err(self.missed(residual, what));
            }
        }
        check_rows(named, &fluid)?;
        Ok(Built { stanza, fluid, rows, residuals })
    }

    fn missed(&self, residual: &Residual, what: &str) -> Problem {
        let message = format!(
            "the stored curve misses the {what} of this row by {:+.0} ppm (limit {:.0} ppm): a mistyped row, or a range of \
             temperature too wide for 32 segments; narrow it, or raise --limit",
            residual.ppm,
            1e6 * self.limit
        );
        Problem::new(self.data, message).at_line(residual.line)
    }
}

/// Number of rows, and the worst residual of viscosity and of density.
fn compare(named: &NamedFluid, fluid: &StoredFluid) -> (usize, [Residual; 2]) {
    let DeclaredFluid::Table { rows, molar_mass_g_mol, pressure_kpa, .. } = &named.fluid else {
        return (0, [Residual { ppm: 0.0, line: 0 }; 2]);
    };
    let pressure = if molar_mass_g_mol.is_some() { pressure_kpa * 1e3 } else { LIQUID_PRESSURE };
    let mut worst = [Residual { ppm: 0.0, line: rows.first().map_or(0, |row| row.line) }; 2];
    for row in rows {
        let at = Properties::at(fluid, row.temperature);
        let found = [at.viscosity(pressure) / row.viscosity, at.density(pressure) / row.density];
        for (worst, ratio) in worst.iter_mut().zip(found) {
            let ppm = 1e6 * (ratio - 1.0);
            if ppm.abs() > worst.ppm.abs() {
                *worst = Residual { ppm, line: row.line };
            }
        }
    }
    (rows.len(), worst)
}
