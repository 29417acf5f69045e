//! Sensors: what they deliver is a raw type, what it means a quantity, and between them stands a fault or none.
//!
//! Nothing here waits and nothing owns a bus: a raw word comes from [`transducer::WordFormat::word`] over bytes the
//! firmware has read, or from `bus` (feature `hal`).

pub mod fault; // why a sensor gives no value

pub mod levels; // signal levels: measured, saturated, broken wire

pub mod transfer; // the straight line from signal to quantity

pub mod transducer; // words from a bus

pub mod ratiometric; // a share of the supply

pub mod resistance; // a share of the supply to ohms

pub mod pt100; // ohms to temperature, IEC 60751

pub mod thermistor; // ohms to temperature, Steinhart and Hart

#[cfg(feature = "hal")]
pub mod bus; // a word over I2C or SPI

pub use fault::Fault;
pub use pt100::Pt100;
pub use ratiometric::Ratiometric;
pub use thermistor::Thermistor;
pub use transducer::Transducer;
