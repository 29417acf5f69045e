//! Transducers over I2C and SPI, every error of the bus included.
#![cfg(feature = "hal")]

use embedded_hal::i2c::{ErrorKind, NoAcknowledgeSource};
use embedded_hal_mock::eh1::i2c::{Mock as I2c, Transaction as I2cTransaction};
use embedded_hal_mock::eh1::spi::{Mock as Spi, Transaction as SpiTransaction};
use evenbore::quantity::PressureDrop;
use evenbore::sensor::bus::{I2cTransducer, ReadError, SpiTransducer};
use evenbore::sensor::transducer::{ByteOrder, StatusBits, WordFormat};
use evenbore::sensor::{Fault, Transducer};

fn transducer() -> Transducer<PressureDrop> {
    let status = StatusBits { mask: 0xC000, good: 0x0000, stale: Some(0x8000) };
    let format = WordFormat::new(2, 14, ByteOrder::BigEndian).unwrap().with_status(status).unwrap();
    let at = |counts, pascals| (counts, PressureDrop::from_pascals(pascals));
    Transducer::new(format, at(1638, -250.0), at(14_745, 250.0)).unwrap()
}

const I2C_ERRORS: [ErrorKind; 7] = [
    ErrorKind::Bus,
    ErrorKind::ArbitrationLoss,
    ErrorKind::NoAcknowledge(NoAcknowledgeSource::Address),
    ErrorKind::NoAcknowledge(NoAcknowledgeSource::Data),
    ErrorKind::NoAcknowledge(NoAcknowledgeSource::Unknown),
    ErrorKind::Overrun,
    ErrorKind::Other,
];

#[test]
fn a_pressure_is_read_over_i2c_and_the_bus_stays_shared() {
    let sensors = [0x28, 0x29].map(|address| I2cTransducer::new(transducer(), address).unwrap());
    let [first, second] = sensors.map(|sensor| sensor.with_command(&[0xAA, 0x00]).unwrap());
    let mut bus = I2c::new(&[
        I2cTransaction::write(0x28, vec![0xAA, 0x00]),
        I2cTransaction::write(0x29, vec![0xAA, 0x00]),
        I2cTransaction::read(0x28, vec![0x06, 0x66]),
        I2cTransaction::read(0x29, vec![0x39, 0x99]),
    ]);
    first.start(&mut bus).unwrap();
    second.start(&mut bus).unwrap();
    assert_eq!(first.read(&mut bus).unwrap().as_pascals(), -250.0);
    assert!((second.read(&mut bus).unwrap().as_pascals() - 250.0).abs() < 1e-4);
    bus.done();
}

#[test]
fn a_transducer_without_a_command_is_not_written_to() {
    let sensor = I2cTransducer::new(transducer(), 0x28).unwrap();
    let mut bus = I2c::new(&[]);
    sensor.start(&mut bus).unwrap();
    bus.done();
}

#[test]
fn every_i2c_error_comes_back_as_it_was_and_leaves_the_sensor_silent() {
    let sensor = I2cTransducer::new(transducer(), 0x28).unwrap().with_command(&[0x10]).unwrap();
    for error in I2C_ERRORS {
        let mut bus = I2c::new(&[
            I2cTransaction::write(0x28, vec![0x10]).with_error(error),
            I2cTransaction::read(0x28, vec![0x20, 0x00]).with_error(error),
            I2cTransaction::read(0x28, vec![0x20, 0x00]),
        ]);
        assert_eq!(sensor.start(&mut bus), Err(ReadError::Bus(error)));
        let failed = sensor.read(&mut bus).unwrap_err();
        assert_eq!(failed, ReadError::Bus(error));
        assert_eq!(failed.fault(), Fault::Silent);
        assert!(failed.to_string().starts_with("bus: "));
        assert!(sensor.read(&mut bus).is_ok(), "the next read is as good as the first");
        bus.done();
    }
}

#[test]
fn faults_of_the_sensor_pass_through_the_bus() {
    let sensor = I2cTransducer::new(transducer(), 0x28).unwrap();
    let rows = [
        ([0x86, 0x66], Fault::Stale),
        ([0xC6, 0x66], Fault::Reported),
        ([0xFF, 0xFF], Fault::Reported),
        ([0x00, 0x00], Fault::SaturatedLow),
        ([0x3F, 0xFF], Fault::SaturatedHigh),
    ];
    for (bytes, fault) in rows {
        let mut bus = I2c::new(&[I2cTransaction::read(0x28, bytes.to_vec())]);
        let failed = sensor.read(&mut bus).unwrap_err();
        assert_eq!((failed, failed.fault()), (ReadError::Sensor(fault), fault));
        bus.done();
    }
}

#[test]
fn addresses_and_commands_that_cannot_be_are_refused() {
    for address in [0x00, 0x07, 0x78, 0xFF] {
        assert!(I2cTransducer::new(transducer(), address).is_err(), "{address:#x}");
    }
    for address in [0x08, 0x77] {
        assert!(I2cTransducer::new(transducer(), address).is_ok(), "{address:#x}");
    }
    assert!(I2cTransducer::new(transducer(), 0x28).unwrap().with_command(&[0; 5]).is_err());
}

#[test]
fn a_pressure_is_read_over_spi() {
    let sensor = SpiTransducer::new(transducer());
    let mut bus = Spi::new(&[
        SpiTransaction::transaction_start(),
        SpiTransaction::read_vec(vec![0x06, 0x66]),
        SpiTransaction::transaction_end(),
    ]);
    assert_eq!(sensor.read(&mut bus).unwrap().as_pascals(), -250.0);
    bus.done();
}

/// An SPI device that only fails; the mock has none that does.
struct Broken(embedded_hal::spi::ErrorKind);

impl embedded_hal::spi::ErrorType for Broken {
    type Error = embedded_hal::spi::ErrorKind;
}

impl embedded_hal::spi::SpiDevice for Broken {
    fn transaction(&mut self, _: &mut [embedded_hal::spi::Operation<'_, u8>]) -> Result<(), Self::Error> {
        Err(self.0)
    }
}

#[test]
fn every_spi_error_comes_back_as_it_was() {
    use embedded_hal::spi::ErrorKind::{ChipSelectFault, FrameFormat, ModeFault, Other, Overrun};
    for error in [Overrun, ModeFault, FrameFormat, ChipSelectFault, Other] {
        let failed = SpiTransducer::new(transducer()).read(&mut Broken(error)).unwrap_err();
        assert_eq!((failed, failed.fault()), (ReadError::Bus(error), Fault::Silent));
    }
}
