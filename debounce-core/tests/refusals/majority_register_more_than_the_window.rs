use debounce_core::MajorityRegister;

pub const LAW: MajorityRegister = MajorityRegister::<u8>::new(6, 5);
