//! Every public type of `debounce-core`, with values known at run time only. The image must hold no panic.
#![no_std]
#![no_main]

#[path = "../image.rs"]
mod image;
#[path = "../laws.rs"]
mod laws;
#[path = "../meaning.rs"]
mod meaning;
#[path = "../wiring.rs"]
mod wiring;

use debounce_core::{Change, Machine, Position};
use image::{any, keep};

#[unsafe(no_mangle)]
extern "C" fn rig_main() -> ! {
    laws::all();
    meaning::all();
    wiring::all();
    rig::exit(0)
}

/// A position known at run time only.
fn position() -> Position {
    Position::closed_if(any() & 1 == 1)
}

/// A change known at run time only.
fn change() -> Change {
    position().reached_by()
}

/// Steps a machine over inputs known at run time only.
#[inline(never)]
fn drive<M: Machine>(machine: &M, mut state: M::State, mut input: impl FnMut() -> M::Input) {
    for _ in 0..any() {
        keep(&machine.step(&mut state, input()));
    }
    keep(&state);
}
