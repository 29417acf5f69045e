//! A calibration goes into an instrument's memory as bytes and comes back as a meter.

use evenbore::calibration::{Cause, CommonPart, Quality};
use evenbore::fluid::catalogue::{HELIUM, NITROGEN};
use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, Temperature};
use evenbore::record::RECORD_LENGTH;
use evenbore::{Element, Reading, Record};

fn main() -> Result<(), Box<dyn std::error::Error>> {
    // What a calibration found: A, B, how sure they are, and what its points shared.
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?
        .with_coefficients(1.05e12, 3.4e9)?;
    let mut quality = Quality::nominal(element.a(), element.b());
    quality.u_a = 3e-4;
    quality.x_max_m = 7.0;
    quality.common.clear();
    let reference = CommonPart { cause: Cause::ReferenceFlow, effect_a: -1.5e-3, effect_b_m: -9.7e-6 };
    quality.common.push(reference).map_err(|_| "no room")?;
    let record = Record::new("EB-0042", 20_261_201, element, *NITROGEN.fluid(), quality)?;

    // Into memory and back; a changed bit anywhere is an error.
    let mut memory = [0_u8; RECORD_LENGTH];
    record.encode(&mut memory);
    let restored = Record::decode(&memory)?;
    memory[500] ^= 1;
    println!("one bit changed: {}", Record::decode(&memory).unwrap_err());

    // The calibrated meter, on the fluid of its calibration and on another.
    let reading = Reading::new(
        PressureDrop::from_pascals(600.0),
        Temperature::from_celsius(31.0),
        AbsolutePressure::from_kilopascals(140.0),
    );
    let meter = restored.meter()?;
    for meter in [meter.clone(), meter.with_fluid(HELIUM.fluid())?] {
        let flow = meter.flow(&reading)?;
        let u = 100.0 * flow.uncertainty.combined();
        println!("{}: {:.4} L/min, u {u:.2} %", meter.fluid().name(), flow.volume.as_litres_per_minute());
    }
    Ok(())
}
