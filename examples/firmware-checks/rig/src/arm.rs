//! Cortex-M: the vector table, the reset code, semihosting and the counter.

use core::arch::{asm, global_asm};

global_asm!(
    ".section .vectors, \"a\"",
    ".word _stack_top",
    ".word rig_reset",
    // Every fault ends in the same place.
    ".rept 14",
    ".word rig_fault",
    ".endr",
    ".section .text.rig_reset, \"ax\"",
    ".global rig_reset",
    ".type rig_reset, %function",
    ".thumb_func",
    "rig_reset:",
    "ldr r0, =_data_start",
    "ldr r1, =_data_end",
    "ldr r2, =_data_load",
    "1: cmp r0, r1",
    "bhs 2f",
    "ldr r3, [r2]",
    "str r3, [r0]",
    "adds r0, #4",
    "adds r2, #4",
    "b 1b",
    "2: ldr r0, =_bss_start",
    "ldr r1, =_bss_end",
    "movs r2, #0",
    "3: cmp r0, r1",
    "bhs 4f",
    "str r2, [r0]",
    "adds r0, #4",
    "b 3b",
    "4: bl rig_main",
    ".section .text.rig_fault, \"ax\"",
    ".type rig_fault, %function",
    ".thumb_func",
    "rig_fault:",
    "ldr r1, =rig_fault_block",
    "movs r0, #0x20",
    "bkpt #0xab",
    "b rig_fault",
    ".section .rodata.rig_fault_block, \"a\"",
    ".balign 4",
    "rig_fault_block: .word 0x20026, 3",
);

/// Calls the emulator's host.
///
/// # Safety
/// `argument` is what the operation asks for.
pub(crate) unsafe fn semihost(operation: u32, argument: *const u8) -> u32 {
    let result;
    // SAFETY: the caller's promise; the host changes memory only where the argument says.
    unsafe { asm!("bkpt #0xab", inout("r0") operation => result, in("r1") argument, options(nostack)) };
    result
}

const CONTROL: *mut u32 = 0xe000_e010 as *mut u32;
const RELOAD: *mut u32 = 0xe000_e014 as *mut u32;
const CURRENT: *mut u32 = 0xe000_e018 as *mut u32;

pub(crate) const CLOCK: *const u32 = CURRENT;

/// SysTick counts down in 24 bits.
const WRAP: u32 = 0x00ff_ffff;

pub(crate) fn steps(before: u32, after: u32) -> u32 {
    before.wrapping_sub(after) & WRAP
}

pub(crate) fn start_clock() {
    // SAFETY: the registers of SysTick, which nothing else uses; on, at the processor clock, without interrupt.
    unsafe {
        RELOAD.write_volatile(WRAP);
        CURRENT.write_volatile(0);
        CONTROL.write_volatile(0b101);
    }
}

#[inline(always)]
pub(crate) fn clock() -> u32 {
    // SAFETY: reading SysTick changes nothing.
    unsafe { CURRENT.read_volatile() }
}

/// `2 * rounds` instructions more than for no round.
#[inline(never)]
pub(crate) fn spin(rounds: u32) {
    // SAFETY: touches only its own register and the flags.
    unsafe { asm!("2: subs {0}, #1", "bne 2b", inout(reg) rounds => _, options(nomem, nostack)) };
}
