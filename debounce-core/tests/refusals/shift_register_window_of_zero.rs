use debounce_core::ShiftRegister;

pub const LAW: ShiftRegister = ShiftRegister::new(0);
