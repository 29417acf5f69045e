//! The catalogue's fluids against printed values and against the formulations they were made from.
//!
//! A scaled table is compared with a formulation's printed value times the entry's scale. Recommended values known only
//! from memory are not tested: only those that were seen pass or fail.

use evenbore::double::Properties;
use evenbore::fluid::catalogue::{ALL, CatalogueEntry, find};
use evenbore::quantity::{AbsolutePressure, Temperature};

const NAMES: [&str; 14] = [
    "nitrogen",
    "air",
    "argon",
    "helium",
    "oxygen",
    "hydrogen",
    "carbon-dioxide",
    "methane",
    "propane",
    "sulfur-hexafluoride",
    "neon",
    "krypton",
    "xenon",
    "water",
];

fn entry(name: &str) -> &'static CatalogueEntry {
    find(name).unwrap_or_else(|| panic!("{name} is missing from the catalogue"))
}

fn ppm(got: f64, expected: f64) -> f64 {
    (got / expected - 1.0) * 1e6
}

/// Asserts |got/expected - 1| <= `limit_ppm`.
fn close(what: &str, got: f64, expected: f64, limit_ppm: f64) {
    let error = ppm(got, expected);
    assert!(error.abs() <= limit_ppm, "{what}: {got:e} against {expected:e} is off by {error:.2} ppm");
}

/// Rows of a formulation file: temperature in K, pressure in Pa, viscosity in Pa s, density in kg/m3.
fn formulation(name: &str) -> Vec<[f64; 4]> {
    let file = name.replace('-', "_");
    let path = format!("{}/tests/published/formulation/{file}.csv", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(&path).unwrap_or_else(|error| panic!("{path}: {error}"));
    let rows: Vec<[f64; 4]> = text
        .lines()
        .filter(|line| !line.starts_with('#') && !line.starts_with("T_K"))
        .map(|line| {
            let mut row = [f64::NAN; 4];
            for (cell, text) in row.iter_mut().zip(line.split(',')) {
                *cell = text.parse().unwrap_or_else(|_| panic!("{path}: {line}"));
            }
            row
        })
        .collect();
    assert_eq!(rows.len(), 120, "{path}");
    rows
}

#[test]
fn catalogue_holds_exactly_these_fluids() {
    assert_eq!(ALL.len(), NAMES.len());
    for name in NAMES {
        entry(name);
    }
    assert!(find("unobtainium").is_none());
}

#[test]
fn tables_equal_their_formulations_within_the_stated_residual() {
    for name in NAMES {
        let entry = entry(name);
        let stated = [f64::from(entry.residual_viscosity_ppm()), f64::from(entry.residual_density_ppm())];
        assert!(stated.iter().all(|&limit| limit > 0.0 && limit <= 20.0), "{name} states {stated:?} ppm");
        for [temperature, pressure, viscosity, density] in formulation(name) {
            let properties = Properties::at(entry.fluid(), temperature);
            let at = format!("{name} at {temperature} K, {pressure} Pa");
            close(&format!("viscosity of {at}"), properties.viscosity(pressure), viscosity, stated[0]);
            close(&format!("density of {at}"), properties.density(pressure), density, stated[1]);
        }
    }
}

#[test]
fn single_precision_adds_at_most_one_ppm() {
    for name in NAMES {
        let entry = entry(name);
        for [temperature, pressure, viscosity, density] in formulation(name) {
            let (t, p) =
                (Temperature::from_kelvin(temperature as f32), AbsolutePressure::from_pascals(pressure as f32));
            // The temperature rounded to single precision is the one both are asked at.
            let given = Properties::at(entry.fluid(), f64::from(temperature as f32));
            let at = format!("{name} at {temperature} K, {pressure} Pa");
            let single = entry.fluid().viscosity(t, p).unwrap_or_else(|_| panic!("refused {at}"));
            let single = f64::from(single.as_pascal_seconds());
            close(&format!("single viscosity of {at}"), single, given.viscosity(pressure), 1.0);
            close(&format!("single viscosity of {at}"), single, viscosity, 21.0);
            let single = entry.fluid().density(t, p).unwrap_or_else(|_| panic!("refused {at}"));
            let single = f64::from(single.as_kilograms_per_cubic_metre());
            close(&format!("single density of {at}"), single, given.density(pressure), 1.0);
            close(&format!("single density of {at}"), single, density, 21.0);
        }
    }
}

#[test]
fn tables_refuse_states_outside_their_box() {
    for name in NAMES {
        let fluid = entry(name).fluid();
        let [cold, hot] = fluid.temperature_range().map(|t| t.as_kelvin());
        let [low, high] = fluid.pressure_range().map(|p| p.as_pascals());
        let kelvin = Temperature::from_kelvin;
        let pascals = AbsolutePressure::from_pascals;
        let (t, p) = (0.5 * (cold + hot), 0.5 * (low + high));
        assert!(fluid.viscosity(kelvin(t), pascals(p)).is_ok(), "{name}");
        for (t, p) in [(cold - 1.0, p), (hot + 1.0, p), (t, 0.9 * low), (t, 1.1 * high), (f32::NAN, p), (t, f32::NAN)] {
            assert!(fluid.viscosity(kelvin(t), pascals(p)).is_err(), "{name} viscosity at {t} K, {p} Pa");
            assert!(fluid.density(kelvin(t), pascals(p)).is_err(), "{name} density at {t} K, {p} Pa");
        }
        // Every fluid serves at least 0.1 to 60 C and 90 to 300 kPa; the gases 0 C and 80 kPa as well.
        assert!(cold <= 273.25 && hot >= 333.15 && low <= 9e4 && high >= 3e5, "{name}");
    }
}

/// Printed dilute-gas viscosities: fluid, K, uPa s, tolerance in ppm (printed digits plus the table's residual), source.
/// Sulfur hexafluoride has 50 ppm because its formulation, as programmed, is itself 40 ppm below the printed values.
const DILUTE: &[(&str, f64, f64, f64, &str)] = &[
    ("nitrogen", 300.0, 17.8771, 5.0, "Lemmon & Jacobsen, Int. J. Thermophys. 25 (2004) 21, Table V"),
    ("argon", 300.0, 22.7241, 5.0, "Lemmon & Jacobsen 2004, Table V"),
    ("oxygen", 300.0, 20.6307, 5.0, "Lemmon & Jacobsen 2004, Table V"),
    ("air", 300.0, 18.5230, 5.0, "Lemmon & Jacobsen 2004, Table V"),
    ("sulfur-hexafluoride", 300.0, 15.2887, 50.0, "Quinones-Cisneros et al., JPCRD 41 (2012) 023102"),
    ("krypton", 298.15, 25.3062, 11.0, "Polychroniadou et al., Int. J. Thermophys. 43 (2022) 6"),
    ("krypton", 400.0, 32.79555842, 11.0, "Polychroniadou et al. 2022"),
    ("xenon", 300.0, 23.1561, 7.0, "Velliadou et al., Int. J. Thermophys. 42 (2021) 74, Section 4"),
];

#[test]
fn dilute_gas_viscosities_as_printed() {
    for &(name, temperature, printed, limit, source) in DILUTE {
        let entry = entry(name);
        let got = Properties::at(entry.fluid(), temperature).viscosity(0.0) / f64::from(entry.scale());
        close(&format!("{name}, {source}"), got * 1e6, printed, limit);
    }
}

/// Recommended dilute viscosities at 298.15 K in uPa s of Berg & Moldover, J. Phys. Chem. Ref. Data 41 (2012) 043104: the
/// three seen ones.
const RECOMMENDED: &[(&str, f64)] = &[("nitrogen", 17.7494), ("krypton", 25.3062), ("xenon", 23.0183)];

#[test]
fn recommended_viscosities_at_25_c_are_met() {
    for &(name, printed) in RECOMMENDED {
        let got = Properties::at(entry(name).fluid(), 298.15).viscosity(0.0);
        close(name, got * 1e6, printed, 12.0);
    }
}

/// The pressure at which the table has `density`, by bisection between `low` and `high`.
fn pressure_at(properties: &Properties, density: f64, mut low: f64, mut high: f64) -> f64 {
    for _ in 0..80 {
        let middle = 0.5 * (low + high);
        if properties.density(middle) < density { low = middle } else { high = middle }
    }
    0.5 * (low + high)
}

#[test]
fn viscosities_at_printed_densities() {
    // IAPWS R12-08 (2008), Table 4: 298.15 K, 998 kg/m3, 889.735100 uPa s.
    let water = Properties::at(entry("water").fluid(), 298.15);
    let pressure = pressure_at(&water, 998.0, 9e4, 2.5e6);
    assert!((9.1e4..2.4e6).contains(&pressure), "998 kg/m3 at {pressure} Pa");
    close("water", water.viscosity(pressure) * 1e6, 889.735100, 2.0);
    // Quinones-Cisneros et al., JPCRD 41 (2012) 023102: 300 K, 5.92 kg/m3, 15.3043 uPa s.
    let entry = entry("sulfur-hexafluoride");
    let gas = Properties::at(entry.fluid(), 300.0);
    let got = gas.viscosity(pressure_at(&gas, 5.92, 1e3, 3e5)) / f64::from(entry.scale());
    close("sulfur hexafluoride", got * 1e6, 15.3043, 50.0);
}

#[test]
fn helium_viscosity_as_printed() {
    // Arp, McCarty, Friend, NIST TN 1334 (1998): 400 K, 0.18 MPa, 24.29 uPa s, printed to four digits.
    let entry = entry("helium");
    let got = Properties::at(entry.fluid(), 400.0).viscosity(1.8e5) / f64::from(entry.scale());
    close("helium", got * 1e6, 24.29, 210.0);
}

/// Dry air after CIPM-2007 (Picard et al., Metrologia 45 (2008) 149), 400 umol/mol CO2: C, Pa, kg/m3, computed from the
/// published equation.
const DRY_AIR: &[(f64, f64, f64)] = &[
    (15.0, 80000.0, 0.96751372),
    (15.0, 101325.0, 1.22552134),
    (15.0, 105000.0, 1.26998899),
    (18.0, 80000.0, 0.95752104),
    (18.0, 101325.0, 1.21285600),
    (18.0, 105000.0, 1.25686268),
    (20.0, 80000.0, 0.95097343),
    (20.0, 101325.0, 1.20455734),
    (20.0, 105000.0, 1.24826201),
    (23.0, 101325.0, 1.19232079),
    (25.0, 101325.0, 1.18430073),
    (27.0, 80000.0, 0.92874721),
    (27.0, 105000.0, 1.21906791),
];

#[test]
fn dry_air_density_agrees_with_cipm_2007() {
    // 30 ppm: two independent equations of state for the same molar mass; CIPM-2007's own uncertainty is 22 ppm (from
    // memory).
    for &(celsius, pressure, density) in DRY_AIR {
        let got = Properties::at(entry("air").fluid(), celsius + 273.15).density(pressure);
        close(&format!("dry air at {celsius} C, {pressure} Pa"), got, density, 30.0);
    }
}

#[test]
fn air_has_the_printed_second_virial_coefficient() {
    // IAPWS virial guideline: B(300 K) of air = -7.76210977e-6 m3/mol. Z - 1 = b p + c p^2, so two pressures give b = B/RT.
    let (r, molar_mass, temperature) = (8.314_462_618_153_24, 0.028_965_46, 300.0);
    let air = Properties::at(entry("air").fluid(), temperature);
    let slope = |p: f64| (p * molar_mass / (r * temperature * air.density(p)) - 1.0) / p;
    let b = (2.0 * slope(1e5) - slope(2e5)) * r * temperature;
    close("B(300 K) of air", b, -7.76210977e-6, 3000.0);
}
