use debounce_core::{Period, TickClock};

pub const CLOCK: TickClock = TickClock::new(Period::from_ms(1)).tolerance_ppm(1_000_000);
