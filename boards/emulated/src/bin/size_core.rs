//! The image of an instrument of nominal geometry: the whole walk and one fluid.
#![no_std]
#![no_main]

use core::hint::black_box;
use evenbore::fluid::catalogue::NITROGEN;
use evenbore::{Meter, Reading};
use evenbore_emulated::{machine, readings};

fn flow(reading: &Reading) -> u32 {
    let Ok(element) = readings::tubes() else { return 1 };
    let Ok(meter) = Meter::nominal(black_box(element), black_box(NITROGEN.fluid())) else { return 2 };
    match meter.flow(reading) {
        Ok(flow) => black_box(flow).status.bits().into(),
        Err(refusal) => refusal.bits().into(),
    }
}

#[machine::entry]
fn main() -> ! {
    machine::exit(evenbore_emulated::image(black_box(flow)) as usize)
}
