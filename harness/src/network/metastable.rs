//! How often a synchroniser passes on a level that is neither.
//!
//! A flip-flop that samples a changing line may take long to decide. The mean time between failures is
//! `e^(tr / tau) / (T0 f a)`: `tr` is the time it is given, `tau` and `T0` are its own, `f` is the clock rate and `a`
//! the rate of edges on the line (Wakerly, Digital Design; the same formula in application notes on metastability).

/// A synchroniser and what it is given.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Synchroniser {
    /// Time between the sample and the use of it, less set-up time and wiring, in seconds.
    pub settling: f64,
    /// The flip-flop's own time constant, in seconds.
    pub tau: f64,
    /// The flip-flop's window, in seconds.
    pub window: f64,
    /// Samples a second.
    pub clock: f64,
    /// Edges of the line a second.
    pub edges: f64,
}

impl Synchroniser {
    /// Mean time between failures, in seconds; infinite where it is too long for a number.
    #[must_use]
    pub fn mean_time_between_failures(&self) -> f64 {
        // In logarithms, so that neither factor overflows on its own.
        (self.settling / self.tau - (self.window * self.clock * self.edges).ln()).exp()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(synchroniser: Synchroniser, seconds: f64, digits: f64) {
        let found = synchroniser.mean_time_between_failures();
        assert!((found / seconds - 1.0).abs() < digits, "{found} {seconds}");
    }

    /// "Metastability and synchronisation", blog.mbedded.ninja: 20.1 days.
    #[test]
    fn mean_time_of_a_fast_flip_flop_is_that_of_the_worked_example() {
        let fast = Synchroniser { settling: 2.3e-9, tau: 0.31e-9, window: 9.6e-18, clock: 100e6, edges: 1e6 };
        check(fast, 20.109 * 86_400.0, 1e-3);
    }

    /// TTL flip-flop with T0 = 0.4 s and tau = 1.5 ns (University of Washington, CSE 467 slides); Wakerly, Digital
    /// Design (from memory): 3.63e11 s at 10 MHz with 80 ns, 3.15 s at 16 MHz with 42.5 ns.
    #[test]
    fn mean_time_of_a_ttl_flip_flop_is_that_of_the_textbook() {
        let ttl = Synchroniser { settling: 80e-9, tau: 1.5e-9, window: 0.4, clock: 10e6, edges: 100e3 };
        check(ttl, 3.63e11, 2e-3);
        check(Synchroniser { settling: 42.5e-9, clock: 16e6, ..ttl }, 3.15, 4e-3);
    }
}
