//! The emulated parts: [`Machine`].

use std::path::Path;
use std::process::Command;

use crate::install;
use crate::session::output_of;

/// A part that images are built for, and the emulator that runs it.
pub(super) struct Machine {
    pub(super) name: &'static str,
    pub(super) target: &'static str,
    program: &'static str,
    /// Debian and Ubuntu have had the program in these packages.
    packages: &'static [&'static str],
    options: &'static [&'static str],
    /// What the names of the C compiler and its tools begin with, and the package that brings them.
    pub(super) tools: &'static str,
    pub(super) tools_package: &'static str,
}

/// Every machine; the first is the one that is linted for.
pub(super) const ALL: &[Machine] = &[
    Machine {
        name: "cortex-m3",
        target: "thumbv7m-none-eabi",
        program: "qemu-system-arm",
        packages: &["qemu-system-arm"],
        options: &["-machine", "lm3s6965evb"],
        tools: "arm-none-eabi",
        tools_package: "gcc-arm-none-eabi",
    },
    Machine {
        name: "cortex-m0",
        target: "thumbv6m-none-eabi",
        program: "qemu-system-arm",
        packages: &["qemu-system-arm"],
        options: &["-machine", "microbit"],
        tools: "arm-none-eabi",
        tools_package: "gcc-arm-none-eabi",
    },
    Machine {
        name: "riscv32imc",
        target: "riscv32imc-unknown-none-elf",
        program: "qemu-system-riscv32",
        packages: &["qemu-system-misc", "qemu-system-riscv"],
        options: &["-machine", "virt", "-bios", "none"],
        tools: "riscv64-unknown-elf",
        tools_package: "gcc-riscv64-unknown-elf",
    },
];

/// What drives the emulated clock.
#[derive(Clone, Copy)]
pub(super) enum Time {
    /// The host's, so that an image runs as fast as it can.
    Free,
    /// The instructions, 1024 ns each: every run is the same, and a timer tells one instruction from two.
    Counted,
    /// The instructions, 32 ns each: every run is the same, and a millisecond is long enough for an interrupt.
    Steady,
}

/// An image that has not come to its end by then never will.
const SECONDS: &str = "300";

impl Machine {
    pub(super) fn installed(&self) -> Result<(), String> {
        let mut last = Ok(());
        for package in self.packages {
            last = install::program(self.program, package);
            if last.is_ok() {
                return Ok(());
            }
        }
        last
    }

    /// One of the tools for its code, such as `gcc` or `nm`.
    pub(super) fn tool(&self, name: &str) -> String {
        format!("{}-{name}", self.tools)
    }

    /// Runs an image to its end and gives back what it printed.
    pub(super) fn run(&self, image: &Path, time: Time) -> Result<String, String> {
        let mut command = Command::new("timeout");
        command.args([SECONDS, self.program]).args(self.options);
        command.args(["-display", "none", "-monitor", "none", "-serial", "none", "-chardev", "stdio,id=out"]);
        command.args(["-semihosting-config", "enable=on,target=native,chardev=out"]);
        match time {
            Time::Free => {}
            Time::Counted => _ = command.args(["-icount", "shift=10"]),
            Time::Steady => _ = command.args(["-icount", "shift=5"]),
        }
        output_of(command.arg("-kernel").arg(image))
    }

    /// The version of the emulator.
    pub(super) fn version(&self) -> Result<String, String> {
        super::version(self.program)
    }
}
