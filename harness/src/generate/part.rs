//! One contact as it is worked: its bounce, its contact resistance, how fast it is moved, how worn it is.

use debounce_core::{Change, PerChange};

use super::contact::{Bounce, ContactModel, SecondBurst, flight_times};
use super::dice::{Between, Dice};

/// Contact resistance that comes and goes while the surfaces settle: the line stands between its levels.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Chatter {
    /// How often a change shows it, in thousandths.
    pub permille: u32,
    /// How long it goes on after the last closing, in nanoseconds.
    pub lasts_ns: Between,
    /// How long each resistance stays, in nanoseconds, at least 1.
    pub step_ns: Between,
    /// The share of the supply that is left on the line, in thousandths, at most 999.
    pub apart_permille: Between,
}

/// How fast the contact is moved.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Actuation {
    /// Slowly, as by someone who hesitates or by a cam.
    Slow,
    /// As usual.
    #[default]
    Usual,
    /// Fast, as by a blow.
    Fast,
}

/// What the speed of actuation does to a contact, in thousandths of what is usual.
///
/// A first flight is `2 m v0 / F`, so it goes with the speed of impact v0; resistance chatters for longer the
/// slower the force comes up. A snap mechanism sets v0 by itself: 1000 for both.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct SpeedEffect {
    /// On the first flights when slow; chatter lasts longer by its inverse.
    pub slow_permille: u64,
    /// On the first flights when fast; chatter lasts shorter by its inverse.
    pub fast_permille: u64,
}

/// What wear does: flights and chatter grow in proportion to the operations done.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Wear {
    /// Rated operations.
    pub life: u64,
    /// Flights and chatter at the end of that life, in thousandths of those when new.
    pub worn_permille: u64,
}

/// One contact, ready to be worked.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Contact {
    /// How it bounces when new and worked as usual.
    pub model: ContactModel,
    /// Its contact resistance after each change.
    pub chatter: PerChange<Option<Chatter>>,
    /// What the speed of actuation does.
    pub speed: SpeedEffect,
    /// What wear does.
    pub wear: Wear,
}

/// Where the surfaces are from an instant on.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Touch {
    /// The instant.
    pub at_ns: u64,
    /// Share of the supply that is left on the line, in thousandths: 0 touches well, 1000 is apart.
    pub apart_permille: u16,
}

fn scaled(range: Between, permille: u64) -> Between {
    let scale = |ns: u64| u64::try_from(u128::from(ns) * u128::from(permille) / 1000).unwrap_or(u64::MAX);
    Between(scale(range.0), scale(range.1))
}

impl From<ContactModel> for Contact {
    /// A contact of clean resistance that neither speed nor wear changes.
    fn from(model: ContactModel) -> Self {
        Self {
            model,
            chatter: PerChange { make: None, break_: None },
            speed: SpeedEffect { slow_permille: 1000, fast_permille: 1000 },
            wear: Wear { life: 1, worn_permille: 1000 },
        }
    }
}

impl Contact {
    /// The factor of wear after `done` operations, in thousandths.
    #[must_use]
    pub fn wear_permille(&self, done: u64) -> u64 {
        let Wear { life, worn_permille } = self.wear;
        let gone = u128::from(done.min(life)) * u128::from(worn_permille.saturating_sub(1000));
        1000 + u64::try_from(gone / u128::from(life.max(1))).unwrap_or(u64::MAX - 1000)
    }

    fn speed_permille(&self, actuation: Actuation) -> u64 {
        match actuation {
            Actuation::Slow => self.speed.slow_permille,
            Actuation::Usual => 1000,
            Actuation::Fast => self.speed.fast_permille,
        }
    }

    /// The bounce after `change`, as moved and as worn.
    fn bounce(&self, change: Change, actuation: Actuation, done: u64) -> Bounce {
        let bounce = self.model.bounce.at(change);
        let flights = self.speed_permille(actuation) * self.wear_permille(done) / 1000;
        let second = bounce
            .second
            .map(|second| SecondBurst { first_flight_ns: scaled(second.first_flight_ns, flights), ..second });
        Bounce { first_flight_ns: scaled(bounce.first_flight_ns, flights), second, ..bounce }
    }

    /// What the surfaces do from `at_ns` on after `done` operations; the last of it is where they stay.
    pub fn touches(
        &self,
        change: Change,
        at_ns: u64,
        actuation: Actuation,
        done: u64,
        dice: &mut Dice,
    ) -> Vec<Touch> {
        let bounce = self.bounce(change, actuation, done);
        let model = ContactModel { bounce: PerChange { make: bounce, break_: bounce } };
        let mut is_closed = change == Change::Break;
        let mut touches: Vec<Touch> = model
            .edges(change, at_ns, dice)
            .into_iter()
            .map(|at_ns| {
                is_closed = !is_closed;
                Touch { at_ns, apart_permille: if is_closed { 0 } else { 1000 } }
            })
            .collect();
        let chatter = *self.chatter.of(change);
        if let Some(chatter) = chatter.filter(|chatter| dice.chance(chatter.permille)) {
            match change {
                Change::Make => self.settle(&chatter, actuation, done, &mut touches, dice),
                Change::Break => re_closures(&chatter, &mut touches, dice),
            }
        }
        touches
    }

    /// Resistance after the last closing of a make.
    fn settle(
        &self,
        chatter: &Chatter,
        actuation: Actuation,
        done: u64,
        touches: &mut Vec<Touch>,
        dice: &mut Dice,
    ) {
        let lasts = self.chatter_ns(chatter, actuation, done);
        let closed = touches.last().map_or(0, |touch| touch.at_ns);
        let until = closed.saturating_add(dice.draw(lasts));
        // The surfaces strike well before they slide or lift.
        let mut now = closed;
        loop {
            now = now.saturating_add(dice.draw(chatter.step_ns).max(1));
            if now >= until {
                break;
            }
            let apart = dice.draw(chatter.apart_permille).min(999);
            // Below 1000, so it fits.
            touches.push(Touch { at_ns: now, apart_permille: apart as u16 });
        }
        if until > closed {
            touches.push(Touch { at_ns: until, apart_permille: 0 });
        }
    }

    fn chatter_ns(&self, chatter: &Chatter, actuation: Actuation, done: u64) -> Between {
        let speed = self.speed_permille(actuation).max(1);
        scaled(chatter.lasts_ns, self.wear_permille(done) * 1000 / speed)
    }

    /// No bounce after `change` lasts longer than this, in nanoseconds from the first touch to the last.
    ///
    /// Two bursts at most, every flight as long and every touch as long as may be drawn.
    #[must_use]
    pub fn longest_ns(&self, change: Change, actuation: Actuation, done: u64) -> u64 {
        let bounce = self.bounce(change, actuation, done);
        let most = |range: Between| range.1.max(range.0);
        let burst = |first: u64| {
            let flights = flight_times(first, most(bounce.restitution_permille), bounce.shortest_flight_ns);
            flights.map(|flight| flight + most(bounce.touch_ns).max(1)).sum::<u64>()
        };
        let second =
            bounce.second.map_or(0, |second| most(second.after_ns) + burst(most(second.first_flight_ns)));
        let settling = match (change, self.chatter.of(change)) {
            (Change::Make, Some(chatter)) => most(self.chatter_ns(chatter, actuation, done)),
            _ => 0,
        };
        burst(most(bounce.first_flight_ns)) + second + settling
    }
}

/// At a break the surfaces touch again with little force, so each touch may be a poor one.
fn re_closures(chatter: &Chatter, touches: &mut [Touch], dice: &mut Dice) {
    for touch in touches.iter_mut().filter(|touch| touch.apart_permille == 0) {
        // Below 1000, so it fits.
        touch.apart_permille = dice.draw(chatter.apart_permille).min(999) as u16;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const US: u64 = 1_000;

    fn contact() -> Contact {
        let bounce = Bounce {
            first_flight_ns: Between(900 * US, 1_100 * US),
            restitution_permille: Between(400, 500),
            touch_ns: Between(10 * US, 20 * US),
            shortest_flight_ns: 10 * US,
            second: None,
        };
        let chatter = Chatter {
            permille: 1000,
            lasts_ns: Between(100 * US, 200 * US),
            step_ns: Between(5 * US, 10 * US),
            apart_permille: Between(100, 900),
        };
        Contact {
            model: ContactModel { bounce: PerChange { make: bounce, break_: bounce } },
            chatter: PerChange { make: Some(chatter), break_: Some(chatter) },
            speed: SpeedEffect { slow_permille: 500, fast_permille: 2000 },
            wear: Wear { life: 1000, worn_permille: 3000 },
        }
    }

    fn first_flight(actuation: Actuation, done: u64) -> u64 {
        let mean = |stream| {
            let touches = contact().touches(Change::Make, 0, actuation, done, &mut Dice::new(1, stream));
            touches[2].at_ns - touches[1].at_ns
        };
        (0..50).map(mean).sum::<u64>() / 50
    }

    #[test]
    fn contact_moved_fast_or_worn_flies_longer_in_proportion() {
        let usual = first_flight(Actuation::Usual, 0);
        assert!((990 * US..1_010 * US).contains(&usual), "{usual}");
        for (actuation, done, permille) in [
            (Actuation::Slow, 0, 500),
            (Actuation::Fast, 0, 2000),
            (Actuation::Usual, 500, 2000),
            (Actuation::Usual, 1000, 3000),
            (Actuation::Usual, 5000, 3000),
        ] {
            let found = first_flight(actuation, done);
            assert!(found.abs_diff(usual * permille / 1000) <= 2, "{actuation:?} {done}: {found}");
        }
    }

    #[test]
    fn contact_touches_rise_end_where_they_should_and_stay_within_the_longest() {
        let contact = contact();
        for (change, last) in [(Change::Make, 0), (Change::Break, 1000)] {
            let mut worst = 0;
            for stream in 0..300 {
                let touches = contact.touches(change, 5, Actuation::Slow, 700, &mut Dice::new(2, stream));
                assert!(touches.is_sorted_by_key(|touch| touch.at_ns));
                assert_eq!(touches[0], Touch { at_ns: 5, apart_permille: touches[0].apart_permille });
                let end = touches.last().unwrap();
                assert_eq!(end.apart_permille, last);
                worst = worst.max(end.at_ns - 5);
                assert!(touches.iter().any(|touch| (1..1000).contains(&touch.apart_permille)));
            }
            let longest = contact.longest_ns(change, Actuation::Slow, 700);
            assert!(worst <= longest && worst * 10 > longest * 7, "{worst} of {longest}");
        }
    }
}
