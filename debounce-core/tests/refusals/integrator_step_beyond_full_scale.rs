use debounce_core::Integrator;

pub const LAW: Integrator<u16> = Integrator::<u16>::with_steps(300, 1, 301);
