//! The critical section of one core, as the mailbox needs it: interrupts held back, and then as they were.

use core::arch::asm;

struct OneCore;

critical_section::set_impl!(OneCore);

// SAFETY: there is one core, and no interrupt comes between the two functions.
unsafe impl critical_section::Impl for OneCore {
    unsafe fn acquire() -> critical_section::RawRestoreState {
        let before: u32;
        // SAFETY: reads and sets the mask of interrupts only.
        unsafe {
            #[cfg(target_arch = "arm")]
            asm!("mrs {0}, PRIMASK", "cpsid i", out(reg) before);
            #[cfg(target_arch = "riscv32")]
            asm!("csrrci {0}, mstatus, 8", out(reg) before);
        }
        if cfg!(target_arch = "arm") { before & 1 == 0 } else { before & 8 != 0 }
    }

    unsafe fn release(were_allowed: critical_section::RawRestoreState) {
        if were_allowed {
            // SAFETY: interrupts were allowed before.
            unsafe {
                #[cfg(target_arch = "arm")]
                asm!("cpsie i");
                #[cfg(target_arch = "riscv32")]
                asm!("csrsi mstatus, 8");
            }
        }
    }
}
