//! Counts the instructions of a tick for every law, and for plain C of the same method beside it.
//!
//! One line for every contender and way to use it:
//! `method language use: state S bytes; KIND total T worst W; ...` with totals over [`TICKS`] ticks.
#![no_std]
#![no_main]

mod contenders;
mod input;
mod machines;
mod measure;
mod section;

use rig::{Counter, say};

use input::TICKS;

rig::image!(main);

fn main() {
    let counter = Counter::new();
    say!("ticks {TICKS}");
    contenders::all(&counter);
    machines::all(&counter);
}
