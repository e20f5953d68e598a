use debounce_core::Integrator;

pub const LAW: Integrator = Integrator::<u8>::with_steps(4, 1, 0);
