//! Start-up, output and an instruction counter for images that run in QEMU, on Arm and on RISC-V.
//!
//! An image defines `fn main()` by [`image!`]; it prints over semihosting and ends the emulator.
#![no_std]

#[cfg(target_arch = "arm")]
mod arm;
#[cfg(target_arch = "arm")]
use arm as machine;
#[cfg(target_arch = "riscv32")]
mod riscv;
#[cfg(target_arch = "riscv32")]
use riscv as machine;

mod counter;

use core::fmt::{self, Write};

pub use counter::Counter;

/// Prints a line over semihosting.
#[macro_export]
macro_rules! say {
    ($($text:tt)*) => { $crate::write_line(::core::format_args!($($text)*)) };
}

/// Makes `$main` the program of this image, with a panic handler that prints and ends with exit code 1.
#[macro_export]
macro_rules! image {
    ($main:path) => {
        #[unsafe(no_mangle)]
        extern "C" fn rig_main() -> ! {
            $main();
            $crate::exit(0)
        }

        #[panic_handler]
        fn panic(info: &::core::panic::PanicInfo<'_>) -> ! {
            $crate::say!("{info}");
            $crate::exit(1)
        }
    };
}

/// Ends the emulator with an exit code.
pub fn exit(code: u32) -> ! {
    // The reason of a normal end, "application exit", and the code.
    let block = [0x20026, code];
    loop {
        // SAFETY: SYS_EXIT_EXTENDED reads the two words and does not come back.
        unsafe { machine::semihost(0x20, block.as_ptr().cast()) };
    }
}

/// Prints `text` and a line end over semihosting.
pub fn write_line(text: fmt::Arguments<'_>) {
    let mut out = Out { held: [0; 64], length: 0 };
    // `Out` never fails.
    let _ = out.write_fmt(text);
    let _ = out.write_str("\n");
    out.flush();
}

/// Gathers bytes, because every call into the emulator is slow.
struct Out {
    // One more than is ever filled, for the zero at the end.
    held: [u8; 64],
    length: usize,
}

impl Out {
    fn flush(&mut self) {
        self.held[self.length] = 0;
        self.length = 0;
        // SAFETY: SYS_WRITE0 reads up to the zero just written.
        unsafe { machine::semihost(0x04, self.held.as_ptr()) };
    }
}

impl Write for Out {
    fn write_str(&mut self, text: &str) -> fmt::Result {
        for byte in text.bytes() {
            self.held[self.length] = byte;
            self.length += 1;
            if self.length == self.held.len() - 1 {
                self.flush();
            }
        }
        Ok(())
    }
}
