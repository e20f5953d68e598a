//! RISC-V: the reset code, semihosting and the counter.

use core::arch::{asm, global_asm};

global_asm!(
    ".section .vectors, \"ax\"",
    ".global rig_reset",
    "rig_reset:",
    "la sp, _stack_top",
    // What is loaded by the emulator lies where it runs, so only the zeroes are missing.
    "la t0, _bss_start",
    "la t1, _bss_end",
    "1: bgeu t0, t1, 2f",
    "sw zero, 0(t0)",
    "addi t0, t0, 4",
    "j 1b",
    "2: call rig_main",
);

/// Calls the emulator's host.
///
/// # Safety
/// `argument` is what the operation asks for.
pub(crate) unsafe fn semihost(operation: u32, argument: *const u8) -> u32 {
    let result;
    // SAFETY: the caller's promise; the host changes memory only where the argument says. The three instructions
    // must be uncompressed and in one page.
    unsafe {
        asm!(
            ".balign 16",
            ".option push",
            ".option norvc",
            "slli zero, zero, 0x1f",
            "ebreak",
            "srai zero, zero, 7",
            ".option pop",
            inout("a0") operation => result, in("a1") argument, options(nostack)
        );
    }
    result
}

// An instruction reads the clock.
pub(crate) const CLOCK: *const u32 = core::ptr::null();

pub(crate) fn steps(before: u32, after: u32) -> u32 {
    after.wrapping_sub(before)
}

pub(crate) fn start_clock() {}

#[inline(always)]
pub(crate) fn clock() -> u32 {
    let count;
    // SAFETY: reading the counter of retired instructions changes nothing.
    unsafe { asm!("csrr {0}, minstret", out(reg) count, options(nomem, nostack)) };
    count
}

/// `2 * rounds` instructions more than for no round.
#[inline(never)]
pub(crate) fn spin(rounds: u32) {
    // SAFETY: touches only its own register.
    unsafe {
        asm!("2: addi {0}, {0}, -1", "bnez {0}, 2b", inout(reg) rounds => _, options(nomem, nostack));
    };
}
