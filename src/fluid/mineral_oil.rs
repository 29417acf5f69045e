//! Mineral oil from two kinematic viscosities, by ASTM D341.
//!
//! `log10 log10(nu + 0.7) = A - B log10 T`, nu in mm2/s, T in kelvin (Walther 1931; ASTM D341 for nu >= 2 mm2/s);
//! density `rho = rho_r/(1 + beta (T - T_r))`.

use super::builder::{Frame, liquid};
use super::stored::StoredFluid;
use crate::error::{Error, within};
use crate::math::{exp10, log10};
use crate::quantity::{AbsolutePressure, Density, KinematicViscosity, Temperature};

/// Kinematic viscosities between which the two-constant form of the standard holds, mm2/s.
const VISCOSITY_RANGE: [f64; 2] = [2.0, 2e4];
/// Range of the table before those limits cut it, K.
const TEMPERATURE_RANGE: [f64; 2] = [253.15, 393.15];
/// Viscosity-pressure coefficient of mineral oils, 1/Pa (Barus; 1.5e-8 to 2.5e-8, from memory).
const VISCOSITY_PER_PASCAL: f32 = 2.0e-8;
/// Isothermal compressibility of mineral oils, 1/Pa (from memory).
const DENSITY_PER_PASCAL: f32 = 6.5e-10;

/// Relative standard uncertainty that grows over 50 K away from 25 C, or from the calibration: the line of the standard
/// follows an oil's viscosity to about 1 % (from memory).
const U_AWAY: f32 = 0.01;

/// What a data sheet says of an oil.
#[derive(Debug, Clone, Copy)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct OilData<'a> {
    /// Name, 1 to 24 printable ASCII characters.
    pub name: &'a str,
    /// Two temperatures and the kinematic viscosity at each.
    pub viscosities: [(Temperature, KinematicViscosity); 2],
    /// A temperature and the density at it.
    pub density: (Temperature, Density),
    /// Relative volume expansion, 1/K.
    pub expansion_per_kelvin: f32,
    /// Relative standard uncertainty of viscosity.
    pub u_viscosity: f32,
}

/// The two constants of the viscosity line.
#[derive(Debug, Clone, Copy)]
struct Walther {
    a: f64,
    b: f64,
}

impl Walther {
    fn through(points: [(f64, f64); 2]) -> Self {
        let [(t1, w1), (t2, w2)] = points.map(|(t, nu)| (log10(t), log10(log10(nu + 0.7))));
        let b = (w1 - w2) / (t2 - t1);
        Self { a: w1 + b * t1, b }
    }

    /// mm2/s at kelvin.
    fn kinematic(&self, t: f64) -> f64 {
        exp10(exp10(self.a - self.b * log10(t))) - 0.7
    }

    /// Kelvin at mm2/s.
    fn temperature(&self, nu: f64) -> f64 {
        exp10((self.a - log10(log10(nu + 0.7))) / self.b)
    }
}

/// The stored table of an oil, from -20 C to 120 C as far as its viscosity stays between 2 and 20 000 mm2/s.
///
/// # Errors
/// Names a temperature outside 230..450 K, a viscosity outside 2..20 000 mm2/s, two temperatures less than 10 K apart,
/// a viscosity that does not fall with temperature, a density outside 500..1500 kg/m3 or an expansion outside 0..0.002.
///
/// ```
/// use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
/// use evenbore::quantity::{AbsolutePressure, Density, KinematicViscosity, Temperature};
/// let at = |celsius, nu| {
///     (Temperature::from_celsius(celsius), KinematicViscosity::from_square_millimetres_per_second(nu))
/// };
/// let oil = mineral_oil(&OilData {
///     name: "workshop-oil",
///     viscosities: [at(40.0, 32.0), at(100.0, 5.4)],
///     density: (Temperature::from_celsius(15.0), Density::from_kilograms_per_cubic_metre(870.0)),
///     expansion_per_kelvin: 7.3e-4,
///     u_viscosity: 0.005,
/// })?;
/// let mu = oil.viscosity(Temperature::from_celsius(40.0), AbsolutePressure::from_pascals(101_325.0)).unwrap();
/// assert!((mu.as_millipascal_seconds() - 32.0 * 0.8544).abs() < 0.01);
/// # Ok::<(), evenbore::error::Error>(())
/// ```
pub fn mineral_oil(data: &OilData<'_>) -> Result<StoredFluid, Error> {
    let [(t1, nu1), (t2, nu2)] = data.viscosities.map(|(t, nu)| (t.as_kelvin(), nu.as_square_millimetres_per_second()));
    for (t, nu) in [(t1, nu1), (t2, nu2)] {
        within("oil temperature (K)", t, 230.0, 450.0)?;
        within("oil kinematic viscosity (mm2/s)", nu, VISCOSITY_RANGE[0] as f32, VISCOSITY_RANGE[1] as f32)?;
    }
    within("distance of the two oil temperatures (K)", (t2 - t1).abs(), 10.0, 220.0)?;
    within("fall of oil viscosity with temperature (mm2/s/K)", (nu1 - nu2) / (t2 - t1), 1e-4, 1e6)?;
    let (t_density, density) = (f64::from(data.density.0.as_kelvin()), data.density.1.as_kilograms_per_cubic_metre());
    let density = f64::from(within("oil density (kg/m3)", density, 500.0, 1500.0)?);
    let beta = f64::from(within("oil expansion (1/K)", data.expansion_per_kelvin, 0.0, 2e-3)?);
    let line = Walther::through([(f64::from(t1), f64::from(nu1)), (f64::from(t2), f64::from(nu2))]);
    let rho = |t: f64| density / (1.0 + beta * (t - t_density));
    let frame = Frame {
        name: data.name,
        temperature_range: oil_range(&line),
        pressure_range: [AbsolutePressure::from_pascals(1e3), AbsolutePressure::from_pascals(1e6)],
        at_pressure: AbsolutePressure::from_pascals(101_325.0),
        viscosity_per_pascal: VISCOSITY_PER_PASCAL,
        density_per_pascal: DENSITY_PER_PASCAL,
        u_viscosity: data.u_viscosity,
        u_viscosity_ratio: data.u_viscosity + U_AWAY,
    };
    liquid(&frame, |t| line.kinematic(t) * 1e-6 * rho(t), rho)
}

fn oil_range(line: &Walther) -> [Temperature; 2] {
    let [thin, thick] = VISCOSITY_RANGE.map(|nu| line.temperature(nu));
    let [low, high] = TEMPERATURE_RANGE;
    let (low, high) = (if thick > low { thick } else { low }, if thin < high { thin } else { high });
    [Temperature::from_kelvin(low as f32), Temperature::from_kelvin(high as f32)]
}
