//! Flow once a second from a pressure drop and a temperature on one I2C bus, logged over RTT.
//!
//! Built, never run on hardware.
#![no_std]
#![no_main]

mod instrument; // element, fluid and sensors: edit this file for your own

use defmt_rtt as _;
use embedded_hal::delay::DelayNs;
use panic_probe as _;
use rp2040_hal as hal;

use hal::Clock;
use hal::fugit::RateExtU32;
use hal::gpio::{FunctionI2C, Pin, PullUp};

/// First stage of the start, for the flash chip of the Pico and most others.
#[unsafe(link_section = ".boot2")]
#[used]
pub static BOOT2: [u8; 256] = rp2040_boot2::BOOT_LOADER_GENERIC_03H;

/// Frequency of the Pico's crystal.
const CRYSTAL_HZ: u32 = 12_000_000;

#[hal::entry]
fn main() -> ! {
    let mut p = hal::pac::Peripherals::take().unwrap();
    let mut watchdog = hal::Watchdog::new(p.WATCHDOG);
    let (crystal, resets) = (p.XOSC, &mut p.RESETS);
    let clocks =
        hal::clocks::init_clocks_and_plls(CRYSTAL_HZ, crystal, p.CLOCKS, p.PLL_SYS, p.PLL_USB, resets, &mut watchdog);
    let clocks = clocks.ok().unwrap();
    let mut timer = hal::Timer::new(p.TIMER, &mut p.RESETS, &clocks);
    let sio = hal::Sio::new(p.SIO);
    let pins = hal::gpio::Pins::new(p.IO_BANK0, p.PADS_BANK0, sio.gpio_bank0, &mut p.RESETS);
    let sda: Pin<_, FunctionI2C, PullUp> = pins.gpio4.reconfigure();
    let scl: Pin<_, FunctionI2C, PullUp> = pins.gpio5.reconfigure();
    let mut bus = hal::I2C::i2c0(p.I2C0, sda, scl, 100.kHz(), &mut p.RESETS, clocks.system_clock.freq());

    let sensors = instrument::Sensors::new().unwrap();
    let meter = instrument::meter().unwrap();
    loop {
        match sensors.reading(&mut bus) {
            Ok(reading) => instrument::show(meter.flow(&reading)),
            Err(fault) => defmt::warn!("no reading: {}", fault),
        }
        timer.delay_ms(1000);
    }
}
