//! The image of a calibrated instrument: the record read, the whole walk, the fluid in the record.
#![no_std]
#![no_main]

use core::hint::black_box;
use evenbore::record::RECORD_LENGTH;
use evenbore::{Reading, Record};
use evenbore_emulated::machine;

/// Stands for the page of flash that holds the record.
static RECORD: [u8; RECORD_LENGTH] = [0; RECORD_LENGTH];

fn flow(reading: &Reading) -> u32 {
    let Ok(record) = Record::decode(black_box(&RECORD)) else { return 1 };
    let Ok(meter) = record.meter() else { return 2 };
    match meter.flow(reading) {
        Ok(flow) => black_box(flow).status.bits().into(),
        Err(refusal) => refusal.bits().into(),
    }
}

#[machine::entry]
fn main() -> ! {
    machine::exit(evenbore_emulated::image(black_box(flow)) as usize)
}
