//! evenbore on emulated machines; the target triple chooses the machine (`.cargo/config.toml`).
//!
//! The programs are in `src/bin`: `identity` (the default), `cost`, and the images whose size is compared.
#![no_std]

pub mod machine; // start, exit, text out

#[cfg(feature = "log")]
pub mod logger; // defmt's frames

pub mod line; // text without core::fmt

pub mod counter; // instructions and stack

pub mod readings; // the seeded readings, shared with the desktop

pub mod baseline; // what a maker writes by hand

pub mod bench; // the work whose cost is counted

use core::hint::black_box;
use evenbore::Reading;
use evenbore::quantity::{AbsolutePressure, PressureDrop, Temperature};

/// Links only if no panic can be reached: the function it calls does not exist.
#[panic_handler]
#[allow(unsafe_code)] // calling a function that nobody defines is the proof
fn panic(_: &core::panic::PanicInfo<'_>) -> ! {
    unsafe extern "C" {
        fn a_panic_is_reachable() -> !;
    }
    // SAFETY: never called, since a program with this call does not link.
    unsafe { a_panic_is_reachable() }
}

/// Calls what an image is made for, on a reading the compiler does not know.
#[inline(never)]
pub fn image(work: fn(&Reading) -> u32) -> u32 {
    work(black_box(&Reading::new(
        PressureDrop::from_pascals(1500.0),
        Temperature::from_kelvin(296.55),
        AbsolutePressure::from_pascals(1.2e5),
    )))
}
