//! A machine that is no law, explored against a contract written as a small machine: a changeover contact.
//!
//! A latch over the two throws of a changeover contact that breaks before it makes follows at the first touch of the
//! other throw, whatever the bounce (D. Gingrich, Phys 395 lecture notes, University of Alberta). The reader of one
//! throw alone does not.

use debounce_core::{Change, Machine, Position};
use harness::prove::observe::{ObserveError, Observed, Observer, Start, World, observe};

/// Which throw the contact touches in a sample: the open one, the closed one, or neither.
type Touch = Option<Position>;

/// The way of the moving contact; positions name throws.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
enum Way {
    /// Lies on a throw.
    On(Position),
    /// Leaves a throw, and may touch it again and again.
    Leaving(Position),
    /// Touches nothing; it comes from this throw.
    Between(Position),
    /// Has touched a throw, and may bounce on it.
    Arriving(Position),
}

/// A changeover contact that breaks before it makes; a bounce may last for ever.
struct BreakBeforeMake;

impl World for BreakBeforeMake {
    type Input = Touch;
    type State = Way;

    fn each(&self, way: &Way, each: &mut dyn FnMut(Touch, Way)) {
        match *way {
            Way::On(throw) => {
                each(Some(throw), Way::On(throw));
                each(None, Way::Leaving(throw));
            }
            Way::Leaving(throw) => {
                each(Some(throw), Way::Leaving(throw));
                each(None, Way::Leaving(throw));
                each(None, Way::Between(throw));
            }
            Way::Between(throw) => {
                each(None, Way::Between(throw));
                each(Some(!throw), Way::Arriving(!throw));
            }
            Way::Arriving(throw) => {
                each(Some(throw), Way::Arriving(throw));
                each(None, Way::Arriving(throw));
                each(Some(throw), Way::On(throw));
            }
        }
    }
}

/// Remembers the throw touched last.
struct Latch;

impl Machine for Latch {
    type Input = Touch;
    type Output = Option<Change>;
    type State = Position;

    fn step(&self, state: &mut Position, touch: Touch) -> Option<Change> {
        let now = touch.unwrap_or(*state);
        (core::mem::replace(state, now) != now).then(|| now.reached_by())
    }
}

/// Looks at the closed throw alone.
struct OneThrow;

impl Machine for OneThrow {
    type Input = Touch;
    type Output = Option<Change>;
    type State = Position;

    fn step(&self, state: &mut Position, touch: Touch) -> Option<Change> {
        let now = Position::closed_if(touch == Some(Position::Closed));
        (core::mem::replace(state, now) != now).then(|| now.reached_by())
    }
}

/// The contract: an edge at the first touch of the other throw, in that very sample, and no other edge.
struct FirstTouch;

impl Observer<BreakBeforeMake, Option<Change>> for FirstTouch {
    /// The throw that counts.
    type State = Position;

    fn watch(&self, state: &mut Position, way: &Way, output: &Option<Change>) -> Result<(), &'static str> {
        let throw = match *way {
            Way::On(throw) | Way::Leaving(throw) | Way::Between(throw) | Way::Arriving(throw) => throw,
        };
        let wanted = (core::mem::replace(state, throw) != throw).then(|| throw.reached_by());
        match (*output, wanted) {
            (said, wanted) if said == wanted => Ok(()),
            (None, Some(_)) => Err("a touch of the other throw is not reported"),
            _ => Err("an edge is reported that no touch stands behind"),
        }
    }
}

fn starts() -> [Start<Way, Position, Position>; 2] {
    Position::BOTH.map(|throw| Start { world: Way::On(throw), machine: throw, observer: throw })
}

#[test]
fn changeover_latch_follows_the_first_touch_whatever_the_bounce() {
    let found = observe(&BreakBeforeMake, &Latch, &FirstTouch, &starts(), 1000);
    // Four ways for each throw; latch and observer always know which.
    assert_eq!(found, Ok(Observed::Holds { states: 8, transitions: 20 }));
}

#[test]
fn changeover_read_at_one_throw_is_refuted_in_one_sample() {
    let found = observe(&BreakBeforeMake, &OneThrow, &FirstTouch, &starts(), 1000);
    let objection = "an edge is reported that no touch stands behind";
    assert_eq!(found, Ok(Observed::Broken { objection, inputs: vec![None] }));
}

#[test]
fn exploration_with_an_observer_that_needs_more_states_is_unfinished() {
    let explore = |most| observe(&BreakBeforeMake, &Latch, &FirstTouch, &starts(), most);
    assert!(explore(8).is_ok());
    assert_eq!(explore(7), Err(ObserveError::TooLarge { most: 7 }));
}

/// Counts its own calls, so that it is no function of its arguments.
struct Fickle(std::cell::Cell<bool>);

impl Machine for Fickle {
    type Input = Touch;
    type Output = Option<Change>;
    type State = Position;

    fn step(&self, _: &mut Position, _: Touch) -> Option<Change> {
        self.0.replace(!self.0.get()).then_some(Change::Make)
    }
}

#[test]
fn machine_that_is_no_function_of_its_arguments_is_reported() {
    let fickle = Fickle(std::cell::Cell::new(false));
    let found = observe(&BreakBeforeMake, &fickle, &FirstTouch, &starts(), 1000);
    assert_eq!(found, Err(ObserveError::NotAFunction));
}
