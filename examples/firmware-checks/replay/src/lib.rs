//! The same samples through every machine of `debounce-core`, and a digest of all that they do.
//!
//! This code runs twice: on a workstation, and as firmware in an emulator. What the two print must be equal, line for
//! line; so a law in the field does what was proved and measured on the workstation.
#![no_std]

mod digest;
mod inputs;
mod machines;
mod recording;
mod witnesses;

use core::fmt;

/// Runs everything, giving one line a machine and input, and last the number of samples.
pub fn all(say: &mut dyn FnMut(fmt::Arguments<'_>)) {
    let samples = machines::all(say);
    say(format_args!("samples {samples}"));
}
