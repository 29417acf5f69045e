//! Temperature and line pressure change slowly, the pressure drop quickly: prepare once, then only sample.

use evenbore::fluid::catalogue::HELIUM;
use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, Temperature, VolumeFlow};
use evenbore::{Element, Meter};

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let plates = Element::parallel_plates(
        Length::from_millimetres(0.2),
        Length::from_millimetres(400.0),
        Length::from_millimetres(60.0),
    )?;
    let meter = Meter::nominal(plates, HELIUM.fluid())?;

    // Once per change of temperature or line pressure:
    let conditions =
        meter.conditions(Temperature::from_celsius(21.0), AbsolutePressure::from_kilopascals(150.0), None)?;

    // For every sample of the pressure-drop sensor. Each is made linear before averaging, since the mean of a
    // pulsating pressure drop is not the pressure drop of the mean flow.
    let samples = [812.0, 790.5, 801.7, 820.3, 788.9].map(PressureDrop::from_pascals);
    let mut sum = 0.0;
    for drop in samples {
        sum += conditions.sample(drop)?.volume.as_cubic_metres_per_second();
    }
    let mean = VolumeFlow::from_cubic_metres_per_second(sum / samples.len() as f32);
    println!("mean of {} samples: {:.4} L/min", samples.len(), mean.as_litres_per_minute());

    // The inverse: which pressure drop does a wanted flow need?
    let wanted = conditions.sample(PressureDrop::from_pascals(1000.0))?.mass;
    println!(
        "{:.4} g/min needs {:.2} Pa",
        wanted.as_grams_per_minute(),
        conditions.pressure_drop(wanted)?.as_pascals()
    );
    Ok(())
}
