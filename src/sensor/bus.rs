//! Transducers over I2C and SPI (`embedded-hal`): blocking, the bus lent for one call, no waiting.
//!
//! For firmware authors: a transducer that must be told to measure is told by [`I2cTransducer::start`]; when to read is
//! the caller's affair, because only the caller knows what else the time is good for.

use super::fault::Fault;
use super::transducer::{MOST_BYTES, RawWord, Transducer, WordFormat};
use crate::error::{Error, within};
use crate::quantity::Quantity;
use core::fmt;
use embedded_hal::i2c::I2c;
use embedded_hal::spi::SpiDevice;
use heapless::Vec;

/// Most bytes of a command.
pub const MOST_COMMAND_BYTES: usize = 4;

/// Why a read gave no quantity: the bus failed, or the sensor has a fault.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum ReadError<E> {
    /// The bus's own error.
    Bus(E),
    /// The sensor's fault.
    Sensor(Fault),
}

impl<E> ReadError<E> {
    /// What the error says of the sensor; a failed bus leaves it [`Fault::Silent`].
    pub const fn fault(&self) -> Fault {
        match self {
            Self::Bus(_) => Fault::Silent,
            Self::Sensor(fault) => *fault,
        }
    }
}

impl<E> From<Fault> for ReadError<E> {
    fn from(fault: Fault) -> Self {
        Self::Sensor(fault)
    }
}

impl<E: fmt::Debug> fmt::Display for ReadError<E> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Bus(error) => write!(f, "bus: {error:?}"),
            Self::Sensor(fault) => write!(f, "sensor: {fault}"),
        }
    }
}

impl<E: fmt::Debug> core::error::Error for ReadError<E> {}

/// A transducer at an address of an I2C bus.
///
/// ```
/// use embedded_hal::i2c::I2c;
/// use evenbore::quantity::PressureDrop;
/// use evenbore::sensor::bus::{I2cTransducer, ReadError};
///
/// fn pressure_drop<B: I2c>(
///     bus: &mut B,
///     sensor: &I2cTransducer<PressureDrop>,
/// ) -> Result<PressureDrop, ReadError<B::Error>> {
///     sensor.read(bus)
/// }
/// ```
#[derive(Debug, Clone, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct I2cTransducer<Q> {
    transducer: Transducer<Q>,
    address: u8,
    command: Vec<u8, MOST_COMMAND_BYTES>,
}

impl<Q: Quantity> I2cTransducer<Q> {
    /// A transducer at a 7-bit `address`.
    ///
    /// # Errors
    /// Names an address outside 0x08..0x77, the ones that are not reserved.
    pub fn new(transducer: Transducer<Q>, address: u8) -> Result<Self, Error> {
        within("I2C address", f32::from(address), f32::from(0x08_u8), f32::from(0x77_u8))?;
        Ok(Self { transducer, address, command: Vec::new() })
    }

    /// The same transducer with the command that makes it measure.
    ///
    /// # Errors
    /// Names a command of more than four bytes.
    pub fn with_command(self, command: &[u8]) -> Result<Self, Error> {
        let long = |_| Error::TooMany { field: "command", most: MOST_COMMAND_BYTES };
        Ok(Self { command: Vec::from_slice(command).map_err(long)?, ..self })
    }

    /// Tells the transducer to measure; nothing is sent when it needs no command.
    ///
    /// # Errors
    /// The bus's error.
    pub fn start<B: I2c>(&self, bus: &mut B) -> Result<(), ReadError<B::Error>> {
        if self.command.is_empty() {
            return Ok(());
        }
        bus.write(self.address, &self.command).map_err(ReadError::Bus)
    }

    /// Fetches a word.
    ///
    /// # Errors
    /// The bus's error.
    pub fn raw<B: I2c>(&self, bus: &mut B) -> Result<RawWord, ReadError<B::Error>> {
        fetch(self.transducer.format(), |bytes| bus.read(self.address, bytes))
    }

    /// Fetches a word and says what quantity it stands for.
    ///
    /// # Errors
    /// The bus's error or the sensor's fault.
    pub fn read<B: I2c>(&self, bus: &mut B) -> Result<Q, ReadError<B::Error>> {
        Ok(self.transducer.read(self.raw(bus)?)?)
    }
}

/// A transducer on an SPI bus, selected by the line that the device owns.
#[derive(Debug, Clone, PartialEq)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct SpiTransducer<Q> {
    transducer: Transducer<Q>,
}

impl<Q: Quantity> SpiTransducer<Q> {
    /// A transducer that sends its word whenever it is selected.
    pub const fn new(transducer: Transducer<Q>) -> Self {
        Self { transducer }
    }

    /// Fetches a word.
    ///
    /// # Errors
    /// The bus's error.
    pub fn raw<B: SpiDevice>(&self, bus: &mut B) -> Result<RawWord, ReadError<B::Error>> {
        fetch(self.transducer.format(), |bytes| bus.read(bytes))
    }

    /// Fetches a word and says what quantity it stands for.
    ///
    /// # Errors
    /// The bus's error or the sensor's fault.
    pub fn read<B: SpiDevice>(&self, bus: &mut B) -> Result<Q, ReadError<B::Error>> {
        Ok(self.transducer.read(self.raw(bus)?)?)
    }
}

/// Reads the bytes of one word.
fn fetch<E>(format: &WordFormat, read: impl FnOnce(&mut [u8]) -> Result<(), E>) -> Result<RawWord, ReadError<E>> {
    let mut room = [0; MOST_BYTES];
    let bytes = room.get_mut(..format.length()).unwrap_or_default();
    read(bytes).map_err(ReadError::Bus)?;
    Ok(format.word(bytes).ok_or(Fault::Invalid)?)
}
