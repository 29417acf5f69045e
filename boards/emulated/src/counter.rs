//! Exact counts: instructions by the machine's clock, which the emulator advances with each instruction, and stack by
//! painting it.
#![allow(unsafe_code)] // clock registers, stack pointer

use core::arch::asm;
use core::hint::black_box;
use core::mem::MaybeUninit;

/// What one call cost.
#[derive(Clone, Copy, Default)]
pub struct Cost {
    /// Instructions with the call's own and its return.
    pub instructions: u32,
    /// Bytes of stack.
    pub stack: u32,
}

/// A clock and what it makes of instructions.
pub struct Counter {
    /// Ticks of [`LOOP`] instructions.
    ticks: u32,
}

/// Instructions of the loop that calibrates the clock.
const LOOP: u32 = 20_000;

/// Bytes painted below the stack pointer.
const PAINTED: usize = 8192;
const PAINT: u32 = 0xa5c3_96e1;

impl Counter {
    /// Starts the clock and calibrates it.
    pub fn new() -> Self {
        start();
        Self { ticks: ticks_of_loop(1 + LOOP / 2).wrapping_sub(ticks_of_loop(1)) }
    }

    /// Calls `work` and counts; its result is returned, so it stands in the caller's frame. A call of
    /// [`nothing`] is subtracted, its own instructions counted again.
    pub fn cost<I, T>(&self, work: fn(&I) -> MaybeUninit<T>, input: &I) -> Cost {
        let empty = call(black_box(nothing::<I, T> as fn(&I) -> MaybeUninit<T>), input);
        let whole = call(black_box(work), input);
        let instructions = self.instructions(whole.instructions.wrapping_sub(empty.instructions));
        Cost { instructions: instructions + NOTHING, stack: whole.stack }
    }

    fn instructions(&self, ticks: u32) -> u32 {
        let (ticks, per_loop) = (u64::from(ticks), u64::from(self.ticks));
        (ticks * u64::from(LOOP) + per_loop / 2).checked_div(per_loop).unwrap_or(0) as u32
    }
}

impl Default for Counter {
    fn default() -> Self {
        Self::new()
    }
}

/// Instructions of [`nothing`]: a return, and on Arm a frame pointer set before it.
const NOTHING: u32 = if cfg!(target_arch = "arm") { 3 } else { 1 };

fn nothing<I, T>(_: &I) -> MaybeUninit<T> {
    MaybeUninit::uninit()
}

/// Ticks and stack of one call.
#[inline(never)]
fn call<I, T>(work: fn(&I) -> MaybeUninit<T>, input: &I) -> Cost {
    let top = stack_pointer();
    paint(top);
    let before = now();
    let result = work(input);
    let after = now();
    black_box(&result);
    Cost { instructions: after.wrapping_sub(before) & MASK, stack: used(top) }
}

#[inline(always)]
fn paint(top: usize) {
    let mut at = top - PAINTED;
    while at < top {
        // SAFETY: below the stack pointer nothing lives, no interrupt is enabled, and the machine's RAM reaches there.
        unsafe { (at as *mut u32).write_volatile(PAINT) };
        at += 4;
    }
}

#[inline(always)]
fn used(top: usize) -> u32 {
    let mut at = top - PAINTED;
    // SAFETY: reads what `paint` wrote.
    while at < top && unsafe { (at as *const u32).read_volatile() } == PAINT {
        at += 4;
    }
    (top - at) as u32
}

#[inline(always)]
fn stack_pointer() -> usize {
    let top: usize;
    // SAFETY: reads a register.
    #[cfg(target_arch = "arm")]
    unsafe {
        asm!("mov {}, sp", out(reg) top, options(nomem, nostack));
    }
    // SAFETY: reads a register.
    #[cfg(target_arch = "riscv32")]
    unsafe {
        asm!("mv {}, sp", out(reg) top, options(nomem, nostack));
    }
    top
}

/// Ticks of a loop of `rounds` rounds of two instructions.
#[inline(never)]
fn ticks_of_loop(rounds: u32) -> u32 {
    let before = now();
    // SAFETY: counts a register down.
    #[cfg(target_arch = "arm")]
    unsafe {
        asm!("2: subs {0}, {0}, #1", "bne 2b", inout(reg) rounds => _, options(nomem, nostack));
    }
    // SAFETY: counts a register down.
    #[cfg(target_arch = "riscv32")]
    unsafe {
        asm!("2: addi {0}, {0}, -1", "bnez {0}, 2b", inout(reg) rounds => _, options(nomem, nostack));
    }
    now().wrapping_sub(before) & MASK
}

#[cfg(target_arch = "arm")]
mod clock {
    //! SysTick, a 24-bit counter that runs down at the core's clock.

    const CONTROL: *mut u32 = 0xe000_e010 as *mut u32;
    const RELOAD: *mut u32 = 0xe000_e014 as *mut u32;
    const VALUE: *mut u32 = 0xe000_e018 as *mut u32;

    /// Bits of the clock.
    pub const MASK: u32 = 0x00ff_ffff;

    /// Starts the clock.
    pub fn start() {
        // SAFETY: the registers exist on every machine here, and nothing else uses them.
        unsafe {
            RELOAD.write_volatile(MASK);
            VALUE.write_volatile(0);
            CONTROL.write_volatile(5); // enabled, from the core's clock, no interrupt
        }
    }

    /// Ticks so far.
    #[inline(always)]
    pub fn now() -> u32 {
        // SAFETY: reads a register.
        !unsafe { VALUE.read_volatile() }
    }
}

#[cfg(target_arch = "riscv32")]
mod clock {
    //! The counter of retired instructions.

    /// Bits of the clock.
    pub const MASK: u32 = u32::MAX;

    /// The counter always runs.
    pub fn start() {}

    /// Instructions so far.
    #[inline(always)]
    pub fn now() -> u32 {
        let count: u32;
        // SAFETY: reads a counter.
        unsafe { core::arch::asm!("csrr {}, minstret", out(reg) count, options(nostack)) };
        count
    }
}

use clock::{MASK, now, start};
