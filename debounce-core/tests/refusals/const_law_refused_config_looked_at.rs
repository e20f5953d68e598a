use debounce_core::{Config, ShiftRegister};

pub struct Door;

impl Config for Door {
    type Law = ShiftRegister;
    const LAW: ShiftRegister = ShiftRegister::new(0);
}

const _: () = {
    let _ = Door::LAW;
};
