//! What both images have: values that no compiler knows, a place for results, and a panic that can be found.

use core::panic::PanicInfo;
use core::ptr;

static mut SOURCE: u32 = 0;
static mut SINK: u32 = 0;

/// A value that is known at run time only.
pub(crate) fn any() -> u32 {
    // SAFETY: one thread, and the pointer is valid.
    unsafe { ptr::read_volatile(&raw const SOURCE) }
}

/// As [`any`], narrower.
pub(crate) fn any_u16() -> u16 {
    // Cut off on purpose.
    any() as u16
}

/// As [`any`], narrower still.
pub(crate) fn any_u8() -> u8 {
    // Cut off on purpose.
    any() as u8
}

/// Uses a value, so that it must be worked out.
pub(crate) fn keep<T>(value: &T) {
    // SAFETY: one thread, and the pointers are valid.
    unsafe { ptr::write_volatile(&raw mut SINK, ptr::from_ref(value).addr() as u32) };
    // The compiler must believe that the value is looked at through its address.
    core::hint::black_box(value);
}

/// Only where something can panic is this linked.
#[panic_handler]
fn panic(_: &PanicInfo<'_>) -> ! {
    keep(&"this image can panic");
    loop {}
}
