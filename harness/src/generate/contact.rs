//! Bounce as impact with restitution.

use debounce_core::{Change, PerChange};

use super::dice::{Between, Dice};

/// How a contact bounces at make and at break, each on its own.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct ContactModel {
    /// The bounce after a make and after a break.
    pub bounce: PerChange<Bounce>,
}

/// One kind of bounce.
///
/// # Method
/// Under a constant closing force F a contact of mass m that strikes at v0 and leaves at e times that speed
/// flies for `t_k = 2 m v0 e^k / F`: the flights form a geometric series with the coefficient of restitution e
/// as its ratio, `t1 / (1 - e)` in all (Newton's restitution; D. Styer, M. Besson, JOMA 7 (2007)). The first
/// flight is nearly constant from operation to operation (J. McBride, IEEE Trans. CHMT 12 (1989) 82-90), so
/// its range should be narrow. Between flights the surfaces touch for a while, which the model draws apart.
/// At a break the same series stands for re-closures: the roles of the positions are exchanged (a
/// simplification made here). Published recordings often show a gap and then a second burst: see
/// [`SecondBurst`].
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Bounce {
    /// The first flight, in nanoseconds.
    pub first_flight_ns: Between,
    /// The coefficient of restitution in thousandths, at most 900.
    pub restitution_permille: Between,
    /// How long the surfaces touch between two flights, in nanoseconds, at least 1.
    pub touch_ns: Between,
    /// Flights shorter than this leave no trace on the line, in nanoseconds, at least 1.
    pub shortest_flight_ns: u64,
    /// A second burst of the same bounce.
    pub second: Option<SecondBurst>,
}

/// A second burst, when the actuator follows up or the spring comes back.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct SecondBurst {
    /// How often it happens, in thousandths.
    pub permille: u32,
    /// The rest between the two bursts, in nanoseconds, at least 1.
    pub after_ns: Between,
    /// Its first flight, in nanoseconds.
    pub first_flight_ns: Between,
}

/// The flights of one burst, in nanoseconds: `first`, then each `restitution_permille` thousandths of the one
/// before, as long as they last at least `shortest`. Each is rounded down.
pub fn flight_times(first: u64, restitution_permille: u64, shortest: u64) -> impl Iterator<Item = u64> {
    // 900 at most keeps the series short; a `shortest` of 0 would never end it.
    let ratio = u128::from(restitution_permille.min(900));
    std::iter::successors(Some(first), move |&flight| Some((u128::from(flight) * ratio / 1000) as u64))
        .take_while(move |&flight| flight >= shortest.max(1))
}

impl ContactModel {
    /// The edges of one change at `at_ns`, the first of them at that instant; an odd number.
    pub fn edges(&self, change: Change, at_ns: u64, dice: &mut Dice) -> Vec<u64> {
        let bounce = self.bounce.at(change);
        let restitution = dice.draw(bounce.restitution_permille);
        let first = dice.draw(bounce.first_flight_ns);
        let mut edges = vec![at_ns];
        let mut now = at_ns;
        let mut burst = |first: u64, rest: Option<u64>, dice: &mut Dice| {
            let mut pause = rest;
            for flight in flight_times(first, restitution, bounce.shortest_flight_ns) {
                now += pause.take().unwrap_or_else(|| dice.draw(bounce.touch_ns)).max(1);
                edges.push(now);
                now += flight;
                edges.push(now);
            }
        };
        burst(first, None, dice);
        if let Some(second) = bounce.second
            && dice.chance(second.permille)
        {
            let rest = dice.draw(second.after_ns);
            let first = dice.draw(second.first_flight_ns);
            burst(first, Some(rest), dice);
        }
        edges
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check_series(first: u64, permille: u64, total_ns: u64, flights: usize) {
        let series: Vec<u64> = flight_times(first, permille, 10_000).collect();
        assert_eq!(series.len(), flights);
        // All flights down to a nanosecond: short of the infinite sum by less than 1/(1-e) per rounded flight.
        let whole: u64 = flight_times(first, permille, 1).sum();
        assert!(whole <= total_ns && total_ns - whole < 200, "sum {whole}, expected {total_ns}");
    }

    /// Totals `t1 / (1 - e)` and numbers of flights of at least 10 us, computed from the model that Styer and
    /// Besson (JOMA 7, 2007) give.
    #[test]
    fn contact_flights_add_up_to_the_geometric_sum() {
        check_series(1_000_000, 500, 2_000_000, 7);
        check_series(1_000_000, 700, 3_333_333, 13);
        check_series(2_000_000, 300, 2_857_143, 5);
    }

    #[test]
    fn contact_flights_shorter_than_the_least_leave_no_edge() {
        assert_eq!(flight_times(100, 500, 25).collect::<Vec<_>>(), [100, 50, 25]);
        assert_eq!(flight_times(100, 500, 26).collect::<Vec<_>>(), [100, 50]);
        assert_eq!(flight_times(100, 500, 101).count(), 0);
        assert!(flight_times(u64::MAX, 5000, 0).count() < 500);
    }

    #[test]
    fn contact_edges_begin_at_the_change_and_are_odd_in_number() {
        let bounce = Bounce {
            first_flight_ns: Between(900, 1100),
            restitution_permille: Between(300, 600),
            touch_ns: Between(20, 60),
            shortest_flight_ns: 50,
            second: Some(SecondBurst {
                permille: 500,
                after_ns: Between(2000, 3000),
                first_flight_ns: Between(200, 400),
            }),
        };
        let contact = ContactModel { bounce: PerChange { make: bounce, break_: bounce } };
        for stream in 0..200 {
            let edges = contact.edges(Change::Make, 7, &mut Dice::new(3, stream));
            assert_eq!(edges[0], 7);
            assert!(!edges.len().is_multiple_of(2));
            assert!(edges.is_sorted_by(|a, b| a < b), "{edges:?}");
        }
    }
}
