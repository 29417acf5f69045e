//! Tables built on the device's side of the walk, against the formulas they were built from.

mod common;

use common::{Errors, elements, number, rows, sweep, tolerance};
use evenbore::double::{Conditions, Properties};
use evenbore::fluid::catalogue::AIR;
use evenbore::fluid::mineral_oil::{OilData, mineral_oil};
use evenbore::fluid::water_glycol::{Glycol, U_VISCOSITY, water_glycol};
use evenbore::quantity::{Density, KinematicViscosity, Temperature};

/// mm2/s at `t` K of the oil through two points, by log-log lines: `log10 log10(nu + 0.7) = A - B log10 T`.
fn walther([(t1, nu1), (t2, nu2)]: [(f64, f64); 2], t: f64) -> f64 {
    let w = |nu: f64| (nu + 0.7).log10().log10();
    let share = (t.log10() - t1.log10()) / (t2.log10() - t1.log10());
    10_f64.powf(10_f64.powf(w(nu1) + share * (w(nu2) - w(nu1)))) - 0.7
}

#[test]
fn oil_tables_follow_walthers_line() {
    let (mut viscosity, mut density) = (Errors::default(), Errors::default());
    for (nu40, nu100) in [(10.0, 2.6), (32.0, 5.4), (100.0, 11.2), (460.0, 30.5)] {
        let points = [(40.0_f32 + 273.15, nu40), (100.0_f32 + 273.15, nu100)];
        let at = |(t, nu)| (Temperature::from_kelvin(t), KinematicViscosity::from_square_millimetres_per_second(nu));
        let oil = mineral_oil(&OilData {
            name: "oil",
            viscosities: points.map(at),
            density: (Temperature::from_celsius(15.0), Density::from_kilograms_per_cubic_metre(870.0)),
            expansion_per_kelvin: 7.3e-4,
            u_viscosity: 0.005,
        })
        .unwrap();
        let exact = points.map(|(t, nu): (f32, f32)| (f64::from(t), f64::from(nu)));
        let [low, high] = oil.temperature_range().map(|t| f64::from(t.as_kelvin()));
        assert!(high - low > 60.0, "VG {nu40}: {low} to {high} K");
        for t in sweep(low, high, 1601) {
            let properties = Properties::at(&oil, t);
            let rho = 870.0 / (1.0 + f64::from(7.3e-4_f32) * (t - f64::from(15.0_f32 + 273.15)));
            let mu = walther(exact, t) * 1e-6 * rho;
            viscosity.add(properties.viscosity(101_325.0) / mu - 1.0, || format!("VG {nu40}, {t} K"));
            density.add(properties.density(101_325.0) / rho - 1.0, || format!("VG {nu40}, {t} K"));
        }
    }
    viscosity.judge("viscosity of oils", tolerance::OIL_TABLE);
    density.judge("density of oils", tolerance::OIL_TABLE);
}

/// Mass fraction, K, kg/m3, Pa s; Melinder, Properties of Secondary Working Fluids, IIR 2010, evaluated by a property
/// library.
const ETHYLENE: [(f32, f64, f64, f64); 4] = [
    (0.3, 273.15, 1044.971809812, 4.297589068e-3),
    (0.3, 313.15, 1028.800159591, 1.285552697e-3),
    (0.4, 293.15, 1051.860721609, 2.819131453e-3),
    (0.6, 353.15, 1036.007967487, 1.228852167e-3),
];
/// The same for propylene glycol.
const PROPYLENE: [(f32, f64, f64, f64); 3] = [
    (0.3, 273.15, 1031.559786497, 7.117109235e-3),
    (0.4, 293.15, 1032.272659893, 4.383781481e-3),
    (0.6, 353.15, 996.743789823, 1.400810788e-3),
];

#[test]
fn glycol_tables_follow_their_polynomials() {
    let (mut viscosity, mut density) = (Errors::default(), Errors::default());
    for (glycol, checks) in [(Glycol::Ethylene, &ETHYLENE[..]), (Glycol::Propylene, &PROPYLENE[..])] {
        for &(fraction, t, rho, mu) in checks {
            let mixture = water_glycol("mixture", glycol, fraction, U_VISCOSITY).unwrap();
            let properties = Properties::at(&mixture, t);
            let place = || format!("{glycol:?} {fraction}, {t} K");
            viscosity.add(properties.viscosity(101_325.0) / mu - 1.0, place);
            density.add(properties.density(101_325.0) / rho - 1.0, place);
        }
    }
    assert_eq!(viscosity.count, 7);
    viscosity.judge("viscosity of glycols", tolerance::GLYCOL_TABLE);
    density.judge("density of glycols", tolerance::GLYCOL_TABLE);
}

#[test]
fn moist_air_follows_its_sources() {
    let (_, element) = elements()[0];
    let mut density = Errors::default();
    let mut viscosity = [Errors::default(), Errors::default()];
    for row in rows("moist_air.csv") {
        let (celsius, humidity, p) = (number(&row, 0), number(&row, 1), number(&row, 2));
        let air = Conditions::new(&element, AIR.fluid(), celsius + 273.15, p, Some(humidity)).unwrap();
        density.add(air.line_density() / number(&row, 5) - 1.0, || format!("{row:?}"));
        let band = usize::from(celsius > 40.0);
        viscosity[band].add(air.viscosity(p) / number(&row, 4) - 1.0, || format!("{row:?}"));
    }
    assert_eq!(density.count, 42);
    density.judge("density of moist air", tolerance::MOIST_DENSITY);
    viscosity[0].judge("viscosity of moist air to 40 C", tolerance::MOIST_VISCOSITY[0]);
    viscosity[1].judge("viscosity of moist air to 60 C", tolerance::MOIST_VISCOSITY[1]);
}
