//! What is measured with: the element, its fluid and two sensors. An example; put your own numbers here.

use embedded_hal::i2c::I2c;
use evenbore::error::Error;
use evenbore::flow::Flow;
use evenbore::fluid::catalogue::AIR;
use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, Temperature};
use evenbore::sensor::Fault;
use evenbore::sensor::bus::{I2cTransducer, ReadError};
use evenbore::sensor::transducer::{ByteOrder, StatusBits, Transducer, WordFormat};
use evenbore::{Element, Meter, Reading, Refusal};

/// The element's outlet is open to the room, and the room's pressure is taken as constant.
const ROOM: AbsolutePressure = AbsolutePressure::from_kilopascals(101.325);

/// The sensors on the bus.
pub struct Sensors {
    pressure_drop: I2cTransducer<PressureDrop>,
    temperature: I2cTransducer<Temperature>,
}

impl Sensors {
    /// A differential transducer of 0 to 2.5 kPa (14 bits below two of status, 10 to 90 % of the counts) and a
    /// thermometer of 1/128 K (16 bits, signed).
    pub fn new() -> Result<Self, Error> {
        let status = StatusBits { mask: 0xC000, good: 0x0000, stale: Some(0x8000) };
        let format = WordFormat::new(2, 14, ByteOrder::BigEndian)?.with_status(status)?;
        let ends = [(1638, PressureDrop::from_pascals(0.0)), (14_746, PressureDrop::from_pascals(2500.0))];
        let pressure_drop = I2cTransducer::new(Transducer::new(format, ends[0], ends[1])?, 0x28)?;
        let format = WordFormat::new(2, 16, ByteOrder::BigEndian)?.signed();
        let ends = [(-5120, Temperature::from_celsius(-40.0)), (16_000, Temperature::from_celsius(125.0))];
        let temperature = I2cTransducer::new(Transducer::new(format, ends[0], ends[1])?, 0x48)?;
        Ok(Self { pressure_drop, temperature })
    }

    /// Both sensors read.
    pub fn reading<B: I2c>(&self, bus: &mut B) -> Result<Reading, Fault> {
        let pressure_drop = self.pressure_drop.read(bus).map_err(|e: ReadError<B::Error>| e.fault())?;
        let temperature = self.temperature.read(bus).map_err(|e| e.fault())?;
        let inlet = AbsolutePressure::from_pascals(ROOM.as_pascals() + pressure_drop.as_pascals());
        Ok(Reading::new(pressure_drop, temperature, inlet))
    }
}

/// An uncalibrated element in dry air; `Record::decode` brings a calibrated one.
pub fn meter() -> Result<Meter<'static>, Error> {
    let (bore, length) = (Length::from_millimetres(0.44), Length::from_millimetres(120.0));
    Meter::nominal(Element::round_tubes(120, bore, length)?, AIR.fluid())
}

/// One line of log.
pub fn show(flow: Result<Flow, Refusal>) {
    match flow {
        Ok(flow) => {
            let (litres, percent) = (flow.volume.as_litres_per_minute(), 100.0 * flow.uncertainty.combined());
            defmt::info!("{=f32} L/min, u {=f32} %, {}", litres, percent, flow.status);
        }
        Err(refusal) => defmt::warn!("no flow: {}", refusal),
    }
}
