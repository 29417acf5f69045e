//! Start, exit and text of the emulated machine, by semihosting: the emulator serves the requests of a breakpoint.
#![allow(unsafe_code)] // the request is an instruction

use core::arch::asm;

#[cfg(target_arch = "arm")]
pub use cortex_m_rt::entry;
#[cfg(target_arch = "riscv32")]
pub use riscv_rt::entry;

#[cfg(target_arch = "riscv32")]
use riscv as _; // brings the critical section that the start code asks for

const OPEN: usize = 0x01;
const WRITE: usize = 0x05;
const EXIT: usize = 0x20;
/// The application's own exit, the only reason that carries a code.
const APPLICATION_EXIT: usize = 0x20026;
/// Mode of `:tt` that stands for the emulator's standard output.
const STANDARD_OUTPUT: usize = 4;

/// Hands a request to the emulator and returns its answer.
fn request<const N: usize>(operation: usize, block: &[usize; N]) -> usize {
    let mut answer = operation;
    // SAFETY: each operation reads its block and the text the block points to, nothing else.
    #[cfg(target_arch = "arm")]
    unsafe {
        asm!("bkpt #0xab", inout("r0") answer, in("r1") block.as_ptr(), options(nostack));
    }
    // SAFETY: as above. The three instructions are one request only when uncompressed and on one page.
    #[cfg(target_arch = "riscv32")]
    unsafe {
        asm!(
            ".option push", ".option norvc", ".balign 16",
            "slli x0, x0, 0x1f", "ebreak", "srai x0, x0, 7",
            ".option pop",
            inout("a0") answer, in("a1") block.as_ptr(), options(nostack)
        );
    }
    answer
}

/// Writes to the emulator's standard output.
pub fn print(text: &[u8]) {
    let terminal = c":tt";
    let handle = request(OPEN, &[terminal.as_ptr() as usize, STANDARD_OUTPUT, terminal.count_bytes()]);
    request(WRITE, &[handle, text.as_ptr() as usize, text.len()]);
}

/// Ends the emulator with an exit status.
pub fn exit(status: usize) -> ! {
    loop {
        request(EXIT, &[APPLICATION_EXIT, status]);
    }
}
