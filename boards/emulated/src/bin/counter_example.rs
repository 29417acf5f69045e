//! Must not link: the index may lie outside the table, and the panic this leads to is found.
#![no_std]
#![no_main]

use core::hint::black_box;
use evenbore_emulated::machine;

#[machine::entry]
fn main() -> ! {
    let table = black_box([0, 0, 0, 0]);
    let index = black_box(7);
    machine::exit(table[index])
}
