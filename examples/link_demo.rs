//! An instrument on standard input and output, so that any client that speaks SCPI can be tried on it:
//!
//! ```sh
//! printf '*IDN?\nMEAS:FLOW?;PRES:DROP?\nSYST:ERR?\n' | cargo run --example link_demo --features link
//! socat PTY,link=./tty,raw,echo=0 EXEC:target/debug/examples/link_demo
//! socat TCP-LISTEN:5025,bind=127.0.0.1,reuseaddr,fork EXEC:target/debug/examples/link_demo
//! ```
//!
//! Its element is nominal, its readings and its code (`2718`) are invented.

use evenbore::calibration::Quality;
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::link::{Arguments, Command, Device, Identification, LinkError, Lock, Numeric, Port, Reply, unit};
use evenbore::quantity::{AbsolutePressure, Length, PressureDrop, Temperature};
use evenbore::record::RECORD_LENGTH;
use evenbore::reference::ReferenceConditions;
use evenbore::{Element, Flow, Reading, Record};
use std::io::{Read, Write};
use std::time::Instant;

type Done = Result<(), LinkError>;

struct Instrument {
    record: Record,
    events: u32,
    lock: Lock,
    started: Instant,
}

const REFERENCE_TEMPERATURE: Numeric = Numeric { units: unit::TEMPERATURE, least: 200.0, most: 400.0, default: 273.15 };
const REFERENCE_PRESSURE: Numeric = Numeric { units: unit::PRESSURE, least: 1e4, most: 1e6, default: 101_325.0 };
const ZERO: Numeric = Numeric { units: unit::PRESSURE, least: -100.0, most: 100.0, default: 0.0 };

impl Instrument {
    fn new() -> Result<Self, Box<dyn std::error::Error>> {
        let element = Element::round_tubes(120, Length::from_millimetres(0.44), Length::from_millimetres(120.0))?;
        let quality = Quality::nominal(element.a(), element.b());
        let record = Record::new("EB-0042", 20_261_201, element, *NITROGEN.fluid(), quality)?;
        let lock = Lock::new("2718", 600_000)?;
        Ok(Self { record, events: 0, lock, started: Instant::now() })
    }

    fn now_ms(&self) -> u64 {
        self.started.elapsed().as_millis().try_into().unwrap_or(u64::MAX)
    }

    fn reading(&self) -> Reading {
        let wobble = (self.now_ms() % 1000) as f32 / 1000.0;
        Reading::new(
            PressureDrop::from_pascals(1234.0 + wobble),
            Temperature::from_celsius(23.4),
            AbsolutePressure::from_kilopascals(120.0),
        )
    }

    fn flow(&self) -> Result<Flow, LinkError> {
        let meter = self.record.meter().map_err(|_| LinkError::CalibrationLost)?;
        meter.flow(&self.reading()).map_err(|_| LinkError::DataQuestionable)
    }

    fn set_reference(&mut self, temperature: Temperature, pressure: AbsolutePressure) -> Done {
        self.record.reference =
            ReferenceConditions::new(temperature, pressure).map_err(|_| LinkError::DataOutOfRange)?;
        Ok(())
    }
}

impl Device for Instrument {
    fn identification(&self) -> Identification<'_> {
        let version = env!("CARGO_PKG_VERSION");
        Identification { manufacturer: "evenbore", model: "demo", serial: &self.record.serial, version }
    }
    fn reset(&mut self) {
        self.record.reference = ReferenceConditions::DIN_1343;
    }
    fn may_write(&self, port: u8) -> bool {
        self.lock.is_open(port, self.now_ms())
    }
    fn written(&mut self, command: &'static str, port: u8) {
        self.events += 1;
        eprintln!("event {}: {command} through port {port}", self.events);
    }
}

fn volume_flow(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    reply.exact(i.flow()?.volume.as_cubic_metres_per_second());
    Ok(())
}

fn mass_flow(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    reply.exact(i.flow()?.mass.as_kilograms_per_second());
    Ok(())
}

fn standard_flow(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    let standard = i.flow()?.standard.ok_or(LinkError::SettingsConflict)?;
    reply.exact(standard.as_cubic_metres_per_second());
    Ok(())
}

/// Every part of a reading and the flow's standard uncertainty, of the same moment.
fn everything(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    let (reading, flow) = (i.reading(), i.flow()?);
    reply.exact(reading.pressure_drop.as_pascals());
    reply.exact(reading.temperature.as_kelvin());
    reply.exact(reading.line_pressure.as_pascals());
    reply.exact(flow.volume.as_cubic_metres_per_second());
    reply.number(flow.uncertainty.combined());
    reply.integer(i32::from(flow.status.bits()));
    Ok(())
}

fn pressure_drop(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    reply.exact(i.reading().pressure_drop.as_pascals());
    Ok(())
}

fn temperature(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    reply.exact(i.reading().temperature.as_kelvin());
    Ok(())
}

fn set_reference_temperature(i: &mut Instrument, arguments: &mut Arguments<'_>) -> Done {
    let kelvin = arguments.number(&REFERENCE_TEMPERATURE)?;
    i.set_reference(Temperature::from_kelvin(kelvin), i.record.reference.pressure())
}

fn reference_temperature(i: &mut Instrument, arguments: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    let setting = i.record.reference.temperature().as_kelvin();
    reply.number(arguments.limit(&REFERENCE_TEMPERATURE)?.unwrap_or(setting));
    Ok(())
}

fn set_reference_pressure(i: &mut Instrument, arguments: &mut Arguments<'_>) -> Done {
    let pascals = arguments.number(&REFERENCE_PRESSURE)?;
    i.set_reference(i.record.reference.temperature(), AbsolutePressure::from_pascals(pascals))
}

fn reference_pressure(i: &mut Instrument, arguments: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    let setting = i.record.reference.pressure().as_pascals();
    reply.number(arguments.limit(&REFERENCE_PRESSURE)?.unwrap_or(setting));
    Ok(())
}

fn secure(i: &mut Instrument, arguments: &mut Arguments<'_>) -> Done {
    let now = i.now_ms();
    if arguments.boolean()? {
        i.lock.shut();
        return Ok(());
    }
    i.lock.open(&arguments.string::<16>()?, arguments.port(), now)
}

fn set_zero(i: &mut Instrument, arguments: &mut Arguments<'_>) -> Done {
    i.record.trims.pressure_drop_zero_pa = arguments.number(&ZERO)?;
    Ok(())
}

fn zero(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    reply.exact(i.record.trims.pressure_drop_zero_pa);
    Ok(())
}

fn set_record(i: &mut Instrument, arguments: &mut Arguments<'_>) -> Done {
    let record = Record::decode(arguments.block()?).map_err(|_| LinkError::DataCorrupt)?;
    if record.serial != i.record.serial {
        return Err(LinkError::SettingsConflict);
    }
    i.record = record;
    Ok(())
}

fn record(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    let mut bytes = [0; RECORD_LENGTH];
    i.record.encode(&mut bytes);
    reply.block(&bytes);
    Ok(())
}

fn events(i: &mut Instrument, _: &mut Arguments<'_>, reply: &mut Reply<'_>) -> Done {
    reply.integer(i32::try_from(i.events).unwrap_or(i32::MAX));
    Ok(())
}

const TABLE: &[Command<Instrument>] = &[
    Command::new("MEASure:FLOW[:VOLume]").query(0, volume_flow),
    Command::new("MEASure:FLOW:MASS").query(0, mass_flow),
    Command::new("MEASure:FLOW:STANdard").query(0, standard_flow),
    Command::new("MEASure:ALL").query(0, everything),
    Command::new("MEASure:PRESsure:DROP").query(0, pressure_drop),
    Command::new("MEASure:TEMPerature").query(0, temperature),
    Command::new("[SENSe:]REFerence:TEMPerature").set(1, set_reference_temperature).query(1, reference_temperature),
    Command::new("[SENSe:]REFerence:PRESsure").set(1, set_reference_pressure).query(1, reference_pressure),
    Command::new("CALibration:SECure:STATe").set(2, secure),
    Command::new("CALibration:ZERO").set(1, set_zero).query(0, zero).protected(),
    Command::new("CALibration:RECord").set(1, set_record).query(0, record).protected(),
    Command::new("CALibration:COUNt").query(0, events),
];

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let mut instrument = Instrument::new()?;
    let mut port = Port::<_, 1200, 1200>::new(TABLE, 0);
    let mut out = std::io::stdout().lock();
    for byte in std::io::stdin().lock().bytes() {
        let answer = port.receive(byte?, &mut instrument);
        if !answer.is_empty() {
            out.write_all(answer)?;
            out.flush()?;
        }
    }
    Ok(())
}
