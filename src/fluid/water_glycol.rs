//! Water with ethylene or propylene glycol, from published polynomials.
//!
//! `y = sum c_ij (T - T0)^i (x - x0)^j` for density and ln(viscosity), x the mass fraction of glycol (Melinder,
//! Properties of Secondary Working Fluids, IIR 2010). The fit of the polynomials to their source is 1 to 5 %
//! (worst 11 %), so the standard uncertainty of viscosity is taken as 3 %.

use super::builder::{Frame, liquid};
use super::stored::StoredFluid;
use crate::error::{Error, within};
use crate::math::Real;
use crate::quantity::{AbsolutePressure, Temperature};

/// A glycol.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Glycol {
    /// Ethane-1,2-diol.
    Ethylene,
    /// Propane-1,2-diol.
    Propylene,
}

/// Coefficients by power of temperature, then of mass fraction.
type Polynomial = [[f64; 6]; 4];

struct Formulation {
    base_temperature: f64,
    base_fraction: f64,
    density: Polynomial,
    ln_viscosity: Polynomial,
    /// Freezing temperature, K, by power of mass fraction.
    freezing: [f64; 6],
}

const ETHYLENE: Formulation = Formulation {
    base_temperature: 304.878,
    base_fraction: 0.308_462,
    density: [
        [1034.0, 131.1, 0.749, -106.2, -96.23, 489.1],
        [-0.4781, -0.6876, 0.7855, 1.229, -7.211, 0.0],
        [-0.002_692, 0.004_805, -0.003_995, -0.011_53, 0.0, 0.0],
        [4.725e-6, 1.69e-6, 4.982e-5, 0.0, 0.0, 0.0],
    ],
    ln_viscosity: [
        [-6.437_255, 2.471, 0.033_28, 1.659, 3.089, -18.65],
        [-0.0255, -0.011_71, 0.010_86, 0.003_157, 0.018_31, 0.0],
        [0.000_178_2, 0.000_105_2, 0.000_105_1, 0.000_406_3, 0.0, 0.0],
        [-7.669e-7, -1.634e-6, -6.475e-6, 0.0, 0.0, 0.0],
    ],
    freezing: [257.9, -80.8, -133.4, -72.93, 100.6, 11.4],
};

const PROPYLENE: Formulation = Formulation {
    base_temperature: 305.8583,
    base_fraction: 0.307_031,
    density: [
        [1018.0, 76.04, -24.98, -155.0, -113.1, 234.2],
        [-0.5406, -0.945, 0.27, 2.829, -2.221, 0.0],
        [-0.002_666, 0.005_541, -0.004_018, -0.007_175, 0.0, 0.0],
        [1.347e-5, -1.343e-5, 3.376e-5, 0.0, 0.0, 0.0],
    ],
    ln_viscosity: [
        [-6.224_055, 3.328, 0.5453, -3.9, -1.587, 35.64],
        [-0.030_45, -0.039_84, -0.000_86, 0.1054, 0.044_75, 0.0],
        [0.000_252_5, 0.000_433_2, -0.000_159_3, -0.001_589, 0.0, 0.0],
        [-1.399e-6, -1.86e-6, -4.465e-7, 0.0, 0.0, 0.0],
    ],
    freezing: [259.9, -66.31, -109.4, -228.3, -340.9, 146.5],
};

/// Kelvin kept above freezing.
const ABOVE_FREEZING: f64 = 1.0;
/// Highest temperature of the tables, K: the mixture must not boil at the table's lowest pressure.
const HIGHEST: f64 = 363.15;
/// Relative standard uncertainty of viscosity.
pub const U_VISCOSITY: f32 = 0.03;
/// Isothermal compressibility of water near room temperature, 1/Pa; its effect here is below 0.1 %.
const DENSITY_PER_PASCAL: f32 = 4.5e-10;

fn horner(coefficients: &[f64], x: f64) -> f64 {
    coefficients.iter().rev().fold(0.0, |sum, c| sum * x + c)
}

impl Formulation {
    fn at(&self, polynomial: &Polynomial, fraction: f64, t: f64) -> f64 {
        let x = fraction - self.base_fraction;
        polynomial.iter().rev().fold(0.0, |sum, row| sum * (t - self.base_temperature) + horner(row, x))
    }
}

/// The stored table of a mixture, from 1 K above its freezing temperature to 90 C.
///
/// `mass_fraction`: of glycol; `u_viscosity`: relative standard uncertainty of viscosity, [`U_VISCOSITY`] unless known
/// better. Pressure dependence of viscosity is not known and taken as none.
///
/// # Errors
/// Names a mass fraction outside 0.1..0.6, or a name that is not 1 to 24 printable ASCII characters.
///
/// ```
/// use evenbore::fluid::water_glycol::{Glycol, U_VISCOSITY, water_glycol};
/// use evenbore::quantity::{AbsolutePressure, Temperature};
/// let coolant = water_glycol("coolant", Glycol::Ethylene, 0.3, U_VISCOSITY)?;
/// let mu = coolant.viscosity(Temperature::from_celsius(40.0), AbsolutePressure::from_bars(1.0)).unwrap();
/// assert!((mu.as_millipascal_seconds() - 1.2856).abs() < 1e-4);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
pub fn water_glycol(name: &str, glycol: Glycol, mass_fraction: f32, u_viscosity: f32) -> Result<StoredFluid, Error> {
    let fraction = f64::from(within("mass fraction of glycol", mass_fraction, 0.1, 0.6)?);
    let formulation = match glycol {
        Glycol::Ethylene => &ETHYLENE,
        Glycol::Propylene => &PROPYLENE,
    };
    let x = fraction - formulation.base_fraction;
    let lowest = horner(&formulation.freezing, x) + ABOVE_FREEZING;
    let frame = Frame {
        name,
        temperature_range: [lowest as f32, HIGHEST as f32].map(Temperature::from_kelvin),
        pressure_range: [AbsolutePressure::from_pascals(8e4), AbsolutePressure::from_pascals(2e6)],
        at_pressure: AbsolutePressure::from_pascals(101_325.0),
        viscosity_per_pascal: 0.0,
        density_per_pascal: DENSITY_PER_PASCAL,
        u_viscosity,
        u_viscosity_ratio: u_viscosity,
    };
    liquid(
        &frame,
        |t| formulation.at(&formulation.ln_viscosity, fraction, t).exponential(),
        |t| formulation.at(&formulation.density, fraction, t),
    )
}
