//! Reference conditions and factors of units against published tables.

mod common;

use common::{number, rows, tolerance};
use evenbore::fluid::catalogue::{HELIUM, NITROGEN};
use evenbore::quantity::{
    AbsolutePressure, KinematicViscosity, Length, PressureDrop, Temperature, Viscosity, VolumeFlow,
};
use evenbore::reading::Reading;
use evenbore::reference::ReferenceConditions;
use evenbore::{Element, Meter};

fn element() -> Element {
    Element::round_tubes(100, Length::from_millimetres(0.5), Length::from_millimetres(100.0)).unwrap()
}

/// Density that a meter's standard flow implies at reference conditions, kg/m3.
fn standard_density(gas: &'static evenbore::fluid::CatalogueEntry, reference: ReferenceConditions) -> f64 {
    let meter = Meter::nominal(element(), gas.fluid()).unwrap().with_reference(reference);
    let reading = Reading::new(
        PressureDrop::from_pascals(200.0),
        Temperature::from_celsius(20.0),
        AbsolutePressure::from_kilopascals(110.0),
    );
    let flow = meter.flow(&reading).unwrap();
    let standard = flow.standard.unwrap();
    f64::from(flow.mass.as_kilograms_per_second()) / f64::from(standard.as_cubic_metres_per_second())
}

#[test]
fn standard_flows_stand_in_the_published_ratios() {
    let table = rows("reference/reference_conditions.csv");
    assert_eq!(table.len(), 15);
    for (gas, limit) in [(&HELIUM, tolerance::IDEAL_RATIO[0]), (&NITROGEN, tolerance::IDEAL_RATIO[1])] {
        let normal = standard_density(gas, ReferenceConditions::DIN_1343);
        let mut worst: f64 = 0.0;
        for row in &table {
            let kelvin = Temperature::from_kelvin(number(row, 1) as f32);
            let pascals = AbsolutePressure::from_pascals(number(row, 2) as f32);
            let reference = ReferenceConditions::new(kelvin, pascals).unwrap();
            // A flow there times the factor is the flow at normal conditions, so densities stand in the factor's ratio.
            let error = (standard_density(gas, reference) / normal / number(row, 5) - 1.0).abs();
            assert!(error <= limit, "{} of {row:?}: {error:e}", gas.fluid().name());
            worst = worst.max(error);
        }
        println!("reference conditions, {}: worst {worst:.2e}", gas.fluid().name());
    }
}

#[test]
fn molar_volumes_as_published_within_the_gas_being_real() {
    for row in rows("reference/reference_conditions.csv") {
        let kelvin = Temperature::from_kelvin(number(&row, 1) as f32);
        let reference = ReferenceConditions::new(kelvin, AbsolutePressure::from_pascals(number(&row, 2) as f32));
        let volume = f64::from(HELIUM.fluid().molar_mass()) / standard_density(&HELIUM, reference.unwrap());
        let z = volume / number(&row, 4); // helium: 1 + B/V, B = 11.8 cm3/mol near room temperature
        assert!((z - 1.0 - 11.8e-6 / number(&row, 4)).abs() < 2e-5, "{row:?}: Z = {z}");
    }
}

#[test]
fn named_conditions_are_those_published() {
    let named = [
        ("DIN 1343 / physical normal", ReferenceConditions::DIN_1343),
        ("ISO 13443 natural gas standard", ReferenceConditions::ISO_13443),
        ("GOST 2939 / Russia 20 C", ReferenceConditions::GOST_2939),
        ("ISO 1217 dry", ReferenceConditions::ISO_1217),
        ("SATP", ReferenceConditions::IUPAC_AMBIENT),
    ];
    let table = rows("reference/reference_conditions.csv");
    for (name, conditions) in named {
        let row = table.iter().find(|row| row[0] == name).unwrap_or_else(|| panic!("{name}"));
        assert_eq!(conditions.temperature().as_kelvin(), number(row, 1) as f32, "{name}");
        assert_eq!(conditions.pressure().as_pascals(), number(row, 2) as f32, "{name}");
    }
}

#[test]
fn factors_of_units_as_published() {
    let mmh2o = "mmH2O conventional (1 g/cm3)";
    let there_and_back = [
        ("centipoise", Viscosity::from_millipascal_seconds(1.0).as_pascal_seconds(), {
            1.0 / Viscosity::from_pascal_seconds(1.0).as_millipascal_seconds()
        }),
        ("centistokes", KinematicViscosity::from_square_millimetres_per_second(1.0).as_square_metres_per_second(), {
            1.0 / KinematicViscosity::from_square_metres_per_second(1.0).as_square_millimetres_per_second()
        }),
        ("psi", AbsolutePressure::from_psi(1.0).as_pascals(), 1.0 / AbsolutePressure::from_pascals(1.0).as_psi()),
        ("psi", PressureDrop::from_psi(1.0).as_pascals(), 1.0 / PressureDrop::from_pascals(1.0).as_psi()),
        ("bar", AbsolutePressure::from_bars(1.0).as_pascals(), 1.0 / AbsolutePressure::from_pascals(1.0).as_bars()),
        (mmh2o, PressureDrop::from_millimetres_of_water(1.0).as_pascals(), {
            1.0 / PressureDrop::from_pascals(1.0).as_millimetres_of_water()
        }),
        ("inH2O conventional", PressureDrop::from_inches_of_water(1.0).as_pascals(), {
            1.0 / PressureDrop::from_pascals(1.0).as_inches_of_water()
        }),
        ("L/min", VolumeFlow::from_litres_per_minute(1.0).as_cubic_metres_per_second(), {
            1.0 / VolumeFlow::from_cubic_metres_per_second(1.0).as_litres_per_minute()
        }),
        (
            "degF interval",
            Temperature::from_fahrenheit(1.0).as_kelvin() - Temperature::from_fahrenheit(0.0).as_kelvin(),
            { 1.0 / (Temperature::from_kelvin(1.0).as_fahrenheit() - Temperature::from_kelvin(0.0).as_fahrenheit()) },
        ),
    ];
    let table = rows("reference/unit_factors.csv");
    for (unit, from, back) in there_and_back {
        let row = table.iter().find(|row| row[0] == unit).unwrap_or_else(|| panic!("{unit}"));
        // A kelvin is the difference of two numbers near 256, which leaves it 1.5e-5.
        let limit = if unit.starts_with("deg") { 3e-5 } else { tolerance::UNIT_FACTOR };
        for got in [from, back] {
            assert!((f64::from(got) / number(row, 2) - 1.0).abs() <= limit, "{unit}: {got} against {row:?}");
        }
    }
}
