use debounce_core::Period;

pub const TICK: Period = Period::from_hz(0);
