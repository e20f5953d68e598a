use debounce_core::MajorityRegister;

pub const LAW: MajorityRegister<u16> = MajorityRegister::<u16>::new(6, 12);
