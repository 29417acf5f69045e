//! defmt's frames on the emulator's standard output. One thread, no interrupts, so nothing is locked.
#![allow(unsafe_code)] // the trait asks for it, and the encoder is a static

use crate::machine;
use core::cell::UnsafeCell;
use defmt::{Encoder, Logger};

#[defmt::global_logger]
struct StandardOutput;

struct Shared(UnsafeCell<Encoder>);

// SAFETY: there is one thread and no interrupt.
unsafe impl Sync for Shared {}

static ENCODER: Shared = Shared(UnsafeCell::new(Encoder::new()));

/// Lends the encoder.
fn encode(work: impl FnOnce(&mut Encoder)) {
    // SAFETY: one thread, and no work lends the encoder again.
    work(unsafe { &mut *ENCODER.0.get() });
}

// SAFETY: without interrupts nothing comes between `acquire` and `release`.
unsafe impl Logger for StandardOutput {
    fn acquire() {
        encode(|encoder| encoder.start_frame(machine::print));
    }
    unsafe fn flush() {}
    unsafe fn release() {
        encode(|encoder| encoder.end_frame(machine::print));
    }
    unsafe fn write(bytes: &[u8]) {
        encode(|encoder| encoder.write(bytes, machine::print));
    }
}
