//! The image that does nothing: what the other images are larger by is the library.
#![no_std]
#![no_main]

use core::hint::black_box;
use evenbore::Reading;
use evenbore_emulated::machine;

fn nothing(_: &Reading) -> u32 {
    0
}

#[machine::entry]
fn main() -> ! {
    machine::exit(evenbore_emulated::image(black_box(nothing)) as usize)
}
