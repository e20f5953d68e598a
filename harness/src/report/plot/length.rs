//! Units of time along an axis.

/// The unit in which the times of one axis are shown.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct TimeUnit {
    name: &'static str,
    ns: u64,
}

impl TimeUnit {
    /// The largest unit of which `longest_ns` is at least one and a half, else nanoseconds.
    #[must_use]
    pub fn of(longest_ns: f64) -> Self {
        let units = [("s", 1_000_000_000), ("ms", 1_000_000), ("us", 1_000)];
        let found = units.into_iter().find(|&(_, ns)| longest_ns.abs() >= 1.5 * ns as f64);
        let (name, ns) = found.unwrap_or(("ns", 1));
        Self { name, ns }
    }

    /// How it is written.
    #[must_use]
    pub const fn name(self) -> &'static str {
        self.name
    }

    /// A tick of an axis whose ticks are `step_ns` apart, without the unit.
    #[must_use]
    pub fn tick(self, at_ns: f64, step_ns: f64) -> String {
        let step = step_ns / self.ns as f64;
        // As many decimals as tell one tick from the next.
        let decimals = (-(step * 1.000_001).log10().floor()).clamp(0.0, 9.0) as usize;
        let text = format!("{:.decimals$}", at_ns / self.ns as f64);
        if text.trim_start_matches('-').chars().all(|letter| letter == '0' || letter == '.') {
            return text.trim_start_matches('-').to_owned();
        }
        text
    }

    /// A value by itself, with up to three decimals.
    #[must_use]
    pub fn value(self, at_ns: f64) -> String {
        let text = format!("{:.3}", at_ns / self.ns as f64);
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn time_unit_fits_the_longest_time() {
        let unit = |ns: f64| TimeUnit::of(ns).name();
        assert_eq!([900.0, 1_600.0, 1.4e6, 2e6, 1.5e9].map(unit), ["ns", "us", "us", "ms", "s"]);
    }

    #[test]
    fn time_ticks_have_just_the_decimals_they_need() {
        let ms = TimeUnit::of(1e7);
        assert_eq!(ms.tick(5e6, 5e6), "5");
        assert_eq!(ms.tick(500_000.0, 500_000.0), "0.5");
        assert_eq!(ms.tick(-0.0, 200_000.0), "0.0");
        assert_eq!(ms.value(250_000.0), "0.25");
    }
}
