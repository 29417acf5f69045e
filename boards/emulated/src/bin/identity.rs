//! Prints a digest for each section of the seeded readings: the same on every machine and on the desktop.
#![no_std]
#![no_main]

use evenbore_emulated::line::Line;
use evenbore_emulated::{machine, readings};

#[machine::entry]
fn main() -> ! {
    let digest = readings::run(|section| {
        Line::new(section.element)
            .text(" ")
            .text(section.fluid)
            .number(section.refused)
            .bits(section.last_flow.into(), 8)
            .bits(section.digest, 16)
            .print();
    });
    match digest {
        Ok(digest) => Line::new("all").bits(digest, 16).print(),
        Err(_) => machine::exit(1),
    }
    machine::exit(0)
}
