use debounce_core::MajorityRegister;

pub const LAW: MajorityRegister<u32> = MajorityRegister::<u32>::new(17, 33);
