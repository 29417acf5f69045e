//! A compensated flow in ten lines: nominal geometry, one reading.
//!
//! On a microcontroller the same lines stand in the main loop, with the sensors' values instead of constants.

use evenbore::fluid::catalogue::AIR;
use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, RelativeHumidity, Temperature};
use evenbore::{Element, Meter, Reading};

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?
        .with_expansion(16e-6, Temperature::from_celsius(20.0))?;
    let meter = Meter::nominal(element, AIR.fluid())?;

    let reading = Reading::new(
        PressureDrop::from_pascals(1234.5),
        Temperature::from_celsius(27.3),
        AbsolutePressure::from_kilopascals(103.2),
    )
    .with_relative_humidity(RelativeHumidity::from_percent(45.0));

    let flow = meter.flow(&reading)?;
    println!("volume flow    {:.4} L/min at line conditions", flow.volume.as_litres_per_minute());
    println!("mass flow      {:.4} g/min", flow.mass.as_grams_per_minute());
    if let Some(standard) = flow.standard {
        println!("standard flow  {:.4} L/min at 0 C and 101.325 kPa, dry", standard.as_litres_per_minute());
    }
    println!("uncertainty    {:.2} % (standard)", 100.0 * flow.uncertainty.combined());
    println!("Reynolds       {:.0}", flow.reynolds);
    println!("status         {}", flow.status);
    Ok(())
}
