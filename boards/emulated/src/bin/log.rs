//! Logs a flow, a refusal and a meter's element through defmt: frames on the emulator's standard output.
#![no_std]
#![no_main]

use core::hint::black_box;
use evenbore::quantity::PressureDrop;
use evenbore::{Meter, Reading};
use evenbore_emulated::{machine, readings};

fn log(reading: &Reading) -> u32 {
    let Ok(record) = readings::record() else { return 1 };
    let Ok(meter) = record.meter() else { return 2 };
    defmt::info!("serial {=str}, {}", record.serial.as_str(), meter.arithmetic());
    show(&meter, reading);
    show(&meter, &Reading { pressure_drop: PressureDrop::from_pascals(f32::INFINITY), ..*reading });
    0
}

fn show(meter: &Meter<'_>, reading: &Reading) {
    match meter.flow(reading) {
        Ok(flow) => defmt::info!("flow {}", flow),
        Err(refusal) => defmt::warn!("no flow: {}", refusal),
    }
}

#[machine::entry]
fn main() -> ! {
    machine::exit(evenbore_emulated::image(black_box(log)) as usize)
}
