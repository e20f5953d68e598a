//! What the line picks up that the contact did not do.

use super::dice::{Between, Dice};

/// One kind of disturbance: a few pulses in a row.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Disturbances {
    /// How many pulses, at least 1.
    pub pulses: Between,
    /// Length of a pulse in nanoseconds, at least 1.
    pub pulse_ns: Between,
    /// Rest between two pulses in nanoseconds, at least 1.
    pub rest_ns: Between,
}

impl Disturbances {
    /// The edges of one disturbance that begins at `at_ns`; an even number, two per pulse.
    pub fn edges(&self, at_ns: u64, dice: &mut Dice) -> Vec<u64> {
        let mut edges = Vec::new();
        let mut now = at_ns;
        for pulse in 0..dice.draw(self.pulses).max(1) {
            if pulse > 0 {
                now += dice.draw(self.rest_ns).max(1);
            }
            edges.push(now);
            now += dice.draw(self.pulse_ns).max(1);
            edges.push(now);
        }
        edges
    }

    /// The longest that one can last, in nanoseconds.
    #[must_use]
    pub fn widest_ns(&self) -> u64 {
        let longest = |range: Between| range.1.max(range.0).max(1);
        let pulses = longest(self.pulses);
        pulses * longest(self.pulse_ns) + (pulses - 1) * longest(self.rest_ns)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn disturbance_edges_come_in_pairs_and_stay_within_the_widest() {
        let kind = Disturbances { pulses: Between(1, 4), pulse_ns: Between(5, 9), rest_ns: Between(20, 30) };
        assert_eq!(kind.widest_ns(), 4 * 9 + 3 * 30);
        for stream in 0..200 {
            let edges = kind.edges(100, &mut Dice::new(4, stream));
            assert!(edges.len().is_multiple_of(2) && edges[0] == 100);
            assert!(edges.is_sorted_by(|a, b| a < b));
            assert!(edges[edges.len() - 1] - 100 <= kind.widest_ns());
        }
    }
}
