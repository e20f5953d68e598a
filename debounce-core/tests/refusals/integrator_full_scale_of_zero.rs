use debounce_core::Integrator;

pub const LAW: Integrator = Integrator::<u8>::new(0);
