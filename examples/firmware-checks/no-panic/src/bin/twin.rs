//! The image that the check must catch: an index that nobody has looked at.
#![no_std]
#![no_main]

#[path = "../image.rs"]
mod image;

use image::{any, any_u8, any_u16, keep};

#[unsafe(no_mangle)]
extern "C" fn rig_main() -> ! {
    let held = [any_u8(); 4];
    keep(&any_u16());
    keep(&held[any() as usize]);
    rig::exit(0)
}
