//! Flow once a second from a pressure drop and a temperature on one I2C bus, logged over RTT.
//!
//! Built, never run on hardware.
#![no_std]
#![no_main]

mod instrument; // element, fluid and sensors: edit this file for your own

use defmt_rtt as _;
use embedded_hal::delay::DelayNs;
use panic_probe as _;
use stm32f4xx_hal as hal;

use hal::i2c::I2c;
use hal::prelude::*;
use hal::rcc::Config;

#[cortex_m_rt::entry]
fn main() -> ! {
    let p = hal::pac::Peripherals::take().unwrap();
    let core = cortex_m::Peripherals::take().unwrap();
    let mut rcc = p.RCC.freeze(Config::hse(25.MHz()).sysclk(84.MHz()));
    let mut delay = core.SYST.delay(&rcc.clocks);
    let port = p.GPIOB.split(&mut rcc);
    let mut bus = I2c::new(p.I2C1, (port.pb6, port.pb7), 100.kHz(), &mut rcc);

    let sensors = instrument::Sensors::new().unwrap();
    let meter = instrument::meter().unwrap();
    loop {
        match sensors.reading(&mut bus) {
            Ok(reading) => instrument::show(meter.flow(&reading)),
            Err(fault) => defmt::warn!("no reading: {}", fault),
        }
        delay.delay_ms(1000);
    }
}
