//! What lies outside the envelope in the field: [`Monitor`].

use super::belief::{Belief, Limits};
use crate::envelope::{Envelope, PerPosition};
use crate::error::ParameterError;
use crate::machine::{Change, Machine, Position};

/// Something that no waveform of the envelope explains.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum Outside {
    /// The contact changed, and took longer to come to rest than its bounce and a disturbance explain.
    BounceTooLong(Change),
    /// The line left this position and came back, and was away for longer than a disturbance may be.
    DisturbanceTooWide(Position),
    /// The line left this position again too soon after a disturbance in it.
    DisturbancesTooClose(Position),
    /// The contact left this position before it had held it for its dwell.
    DwellTooShort(Position),
    /// The line has not come to rest for 65 535 ticks; again for every further 65 535.
    NeverAtRest,
    /// The contact has stayed in this position for longer than it may.
    Stuck(Position),
}

/// Watches the samples of a line, beside the law, and reports what the envelope does not explain.
///
/// # Method
/// Derived here. For each position of the contact the monitor keeps, while the samples so far allow that position, the
/// most favourable account of it: the longest time held, the longest rest of bounce and of a disturbance, the longest
/// quiet and calm (each the maximum over all explanations of the samples). A sample that no account allows lies outside
/// the envelope. The maxima are taken one by one, so an account may be more favourable than any single explanation: the
/// monitor may miss what lies outside, but never reports what lies inside.
///
/// The line is *at rest* when it has read alike for one sample more than the longest bounce and the widest disturbance
/// together: then the contact is, or was a moment ago, where the line is. Judging begins at the first rest, and anew at
/// the rest after something outside, which is when that is named. Let `from` be where it was at rest before, `to`
/// where it is now:
///
/// | the contact could have left `from`? | `to` is   | named                                                          |
/// |-------------------------------------|-----------|----------------------------------------------------------------|
/// | yes                                 | another   | `BounceTooLong` of the change to `to`                          |
/// | no, for it had not held it long enough | another | `DwellTooShort` of `from`                                     |
/// | either                              | `from`    | `DisturbanceTooWide` where the sample that `from` could not explain came right behind a disturbed one, or none are allowed there, else `DisturbancesTooClose` |
///
/// So one stretch gives one report. For each 65 535 ticks without rest there is [`Outside::NeverAtRest`]: after something
/// outside, and at power-up where the dwell is long enough that a line inside the envelope has to rest.
///
/// *Stuck* counts the ticks in which only one position is possible; doubt stops the count, the other position clears it.
/// It is reported once, by the tick after the limit.
///
/// # Units
/// One call to [`step`](Machine::step) takes one raw sample and is one tick. Ticks may be lost, as the envelope says.
///
/// # Bounds
///
/// | Quantity                                              | Value           | Proof                                       |
/// |-------------------------------------------------------|-----------------|---------------------------------------------|
/// | reports inside the envelope, of any length, from any state of it | none | `monitor_inside_the_envelope_reports_nothing` |
/// | what lies outside, unseen                             | see below       | `monitor_outside_is_seen_as_far_as_stated`  |
/// | reports of a stuck contact                            | 1               | `monitor_stuck_contact_is_reported_once`    |
///
/// Of the shortest sample words that nothing explains, up to 18 samples from a line at rest in eight small envelopes
/// with a dwell of 40 ticks, between none and 6 % are not seen by the very sample that ends the last explanation. With a
/// dwell not much longer than bounce and disturbance more are missed, and a dwell that is too short by no more than
/// bounce and disturbance together is not seen at all.
///
/// Not promised: that the name is the cause. An operation shorter than its dwell and a wide disturbance read alike.
///
/// # State
/// At most 44 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. [`new`](Self::new) panics on an envelope that is refused, in a constant at compile time.
///
/// # Examples
/// A contact that used to bounce for two ticks, after some years:
/// ```
/// use debounce_core::{Change, Envelope, Machine, Monitor, Outside, Position::{Closed, Open}};
/// const WATCH: Monitor = Monitor::new(&Envelope::clean(20, 20).bounce(2, 2));
/// let mut state = WATCH.power_up();
/// assert!([Open; 10].iter().all(|&sample| WATCH.step(&mut state, sample).is_none()));
/// let aged = [Closed, Open, Closed, Open, Closed, Closed, Closed];
/// let reports = aged.map(|sample| WATCH.step(&mut state, sample));
/// assert_eq!(reports[6], Some(Outside::BounceTooLong(Change::Make))); // at rest again
/// assert_eq!(reports[..6], [None; 6]);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Monitor {
    limits: Limits,
    stuck_after: PerPosition<u32>,
}

/// What a [`Monitor`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct MonitorState {
    belief: Belief,
    line: Option<Position>,
    // Samples alike up to now, as far as rest; the ticks of a stretch outside.
    alike: u16,
    unrest: u16,
    at_rest: Option<Position>,
    strike: Strike,
    stretch: Stretch,
    sure: Option<Position>,
    stayed: u32,
}

/// How the last position at rest became impossible.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Strike {
    Wide,
    Close,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Stretch {
    /// The line was not at rest since power-up.
    Waiting,
    /// Everything so far is explained.
    Inside,
    /// Not explained; the contact could have left its position at rest.
    OutsideChanged,
    /// Not explained; the contact could not have left its position at rest.
    OutsideHeld,
}

const _: () = assert!(size_of::<MonitorState>() <= 44);

impl MonitorState {
    /// Whether the line is outside the envelope and has not come to rest since.
    #[must_use]
    pub const fn is_outside(&self) -> bool {
        matches!(self.stretch, Stretch::OutsideChanged | Stretch::OutsideHeld)
    }
}

impl Monitor {
    /// A monitor for `envelope`, without a limit for a stuck contact.
    ///
    /// # Panics
    /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(envelope: &Envelope) -> Self {
        match Self::try_new(envelope) {
            Ok(monitor) => monitor,
            Err(_) => panic!("a monitor takes dwells of 1 to 65535 ticks and everything else up to 65535"),
        }
    }

    /// [`new`](Self::new) for values known at run time; links no panic.
    ///
    /// # Errors
    /// Where no sample of a dwell is certain to be delivered, or any number is above 65 535: which one.
    pub const fn try_new(envelope: &Envelope) -> Result<Self, ParameterError> {
        match Limits::of(envelope) {
            Ok(limits) => Ok(Self { limits, stuck_after: PerPosition { open: u32::MAX, closed: u32::MAX } }),
            Err(error) => Err(error),
        }
    }

    /// Sets the longest time that the contact may stay open and closed, in ticks; `u32::MAX` is no limit.
    #[must_use]
    pub const fn stuck_after(mut self, open: u32, closed: u32) -> Self {
        self.stuck_after = PerPosition { open, closed };
        self
    }

    /// The samples alike in a row after which the line is at rest.
    #[must_use]
    pub const fn rest(&self) -> u16 {
        self.limits.rest()
    }

    /// The state at power-up: nothing is known.
    #[must_use]
    pub const fn power_up(&self) -> MonitorState {
        MonitorState {
            belief: Belief::NONE,
            line: None,
            alike: 0,
            unrest: 0,
            at_rest: None,
            strike: Strike::Wide,
            stretch: Stretch::Waiting,
            sure: None,
            stayed: 0,
        }
    }

    /// Takes the sample into the belief, and notes it when that ends all explanations.
    fn judge(&self, state: &mut MonitorState, sample: Position) {
        let before = state.belief;
        state.belief = self.limits.step(&before, sample);
        if let Some(from) = state.at_rest
            && before.allows(from)
            && !state.belief.allows(from)
        {
            let wide = !self.limits.disturbs(from) || before.is_right_behind_a_disturbance(from);
            state.strike = if wide { Strike::Wide } else { Strike::Close };
        }
        if state.belief.is_empty() {
            let held = state.at_rest.is_some_and(|from| before.allows(from));
            state.stretch = if held { Stretch::OutsideHeld } else { Stretch::OutsideChanged };
        }
    }

    /// The name of the stretch that has come to rest at `to`.
    fn name(state: &MonitorState, to: Position) -> Outside {
        match state.at_rest {
            Some(from) if from == to => match state.strike {
                Strike::Wide => Outside::DisturbanceTooWide(from),
                Strike::Close => Outside::DisturbancesTooClose(from),
            },
            Some(from) if state.stretch == Stretch::OutsideHeld => Outside::DwellTooShort(from),
            _ => Outside::BounceTooLong(to.reached_by()),
        }
    }

    /// Counts how long the contact can only have been where it is; the report by the tick after the limit.
    fn stuck(&self, state: &mut MonitorState) -> Option<Outside> {
        let sure = state.belief.only()?;
        if state.sure.replace(sure) != Some(sure) {
            state.stayed = 0;
        }
        let limit = self.stuck_after.at(sure);
        // Without a limit nothing is counted, and past it no more, so that the state comes to rest.
        if limit == u32::MAX || state.stayed > limit {
            return None;
        }
        state.stayed = state.stayed.saturating_add(1);
        (state.stayed > limit).then_some(Outside::Stuck(sure))
    }
}

impl Machine for Monitor {
    type Input = Position;
    type Output = Option<Outside>;
    type State = MonitorState;

    fn step(&self, state: &mut MonitorState, sample: Position) -> Option<Outside> {
        let rest = self.limits.rest();
        let same = state.line.replace(sample) == Some(sample);
        state.alike = if same { state.alike.saturating_add(1).min(rest) } else { 1 };
        let rests = state.alike >= rest;
        if state.stretch == Stretch::Inside {
            self.judge(state, sample);
        }
        let mut report = None;
        if state.stretch != Stretch::Inside {
            if rests {
                if state.is_outside() {
                    report = Some(Self::name(state, sample));
                }
                (state.stretch, state.unrest) = (Stretch::Inside, 0);
                state.belief = self.limits.at_rest(sample);
            } else if state.is_outside() || self.limits.always_rests() {
                state.unrest = state.unrest.saturating_add(1);
                if state.unrest == u16::MAX {
                    state.unrest = 0;
                    report = Some(Outside::NeverAtRest);
                }
            }
        }
        if rests {
            state.at_rest = Some(sample);
        }
        // One report a tick: where there is one, the count of a stuck contact waits.
        report.or_else(|| self.stuck(state))
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::string::ToString;
    use std::vec::Vec;

    use super::*;
    use Position::{Closed, Open};

    const BOUNCING: Envelope = Envelope::clean(40, 40).bounce(3, 2);
    const DISTURBED: Envelope = Envelope::clean(40, 40).bounce(3, 2).glitch(2, 1).quiet(8);

    /// What is reported on stretches of so many samples, the first one open.
    #[track_caller]
    fn check(envelope: &Envelope, stretches: &[usize], expected: &[Outside]) {
        let monitor = Monitor::new(envelope);
        let mut state = monitor.power_up();
        let mut position = Closed;
        let mut reports = Vec::new();
        for &stretch in stretches {
            position = !position;
            reports.extend((0..stretch).filter_map(|_| monitor.step(&mut state, position)));
        }
        assert_eq!(reports, expected, "{stretches:?}");
    }

    #[test]
    fn monitor_bounce_is_told_from_one_sample_longer() {
        let make = [Outside::BounceTooLong(Change::Make)];
        check(&BOUNCING, &[50, 1, 2, 50], &[]);
        check(&BOUNCING, &[50, 1, 1, 50], &[]);
        check(&BOUNCING, &[50, 2, 1, 50], &[]);
        check(&BOUNCING, &[50, 1, 3, 50], &make);
        check(&BOUNCING, &[50, 1, 1, 1, 1, 50], &make);
        check(&BOUNCING, &[50, 1, 1, 1, 1, 1, 1, 50], &make);
        let break_ = [Outside::BounceTooLong(Change::Break)];
        check(&BOUNCING, &[50, 50, 1, 1, 50], &[]);
        check(&BOUNCING, &[50, 50, 1, 2, 50], &break_);
    }

    #[test]
    fn monitor_disturbance_is_told_from_one_sample_wider() {
        check(&DISTURBED, &[50, 1, 50], &[]);
        check(&DISTURBED, &[50, 2, 50], &[]);
        check(&DISTURBED, &[50, 3, 50], &[Outside::DisturbanceTooWide(Open)]);
        check(&DISTURBED, &[50, 50, 1, 50], &[]);
        check(&DISTURBED, &[50, 50, 2, 50], &[Outside::DisturbanceTooWide(Closed)]);
        // None at all are allowed here.
        check(&BOUNCING, &[50, 1, 50], &[Outside::DisturbanceTooWide(Open)]);
    }

    #[test]
    fn monitor_quiet_is_told_from_one_sample_less() {
        check(&DISTURBED, &[50, 1, 8, 1, 50], &[]);
        check(&DISTURBED, &[50, 2, 8, 2, 50], &[]);
        check(&DISTURBED, &[50, 2, 7, 1, 50], &[Outside::DisturbancesTooClose(Open)]);
        check(&DISTURBED, &[50, 50, 1, 8, 1, 50], &[]);
        check(&DISTURBED, &[50, 50, 1, 7, 1, 50], &[Outside::DisturbancesTooClose(Closed)]);
    }

    #[test]
    fn monitor_dwell_is_seen_short_by_more_than_bounce_and_disturbance() {
        check(&BOUNCING, &[50, 40, 50], &[]);
        check(&BOUNCING, &[50, 37, 50], &[]);
        check(&BOUNCING, &[50, 36, 50], &[Outside::DwellTooShort(Closed)]);
        check(&BOUNCING, &[50, 50, 36, 50], &[Outside::DwellTooShort(Open)]);
    }

    #[test]
    fn monitor_one_stretch_outside_is_one_report() {
        check(&BOUNCING, &[50, 3, 3, 3, 3, 3, 3, 50], &[Outside::BounceTooLong(Change::Make)]);
        let twice = [Outside::DisturbanceTooWide(Open); 2];
        check(&BOUNCING, &[50, 1, 50, 1, 50], &twice);
    }

    #[test]
    fn monitor_line_without_rest_is_reported_again_and_again() {
        let monitor = Monitor::new(&BOUNCING);
        for power_up in [true, false] {
            let mut state = monitor.power_up();
            if !power_up {
                assert!((0..50).all(|_| monitor.step(&mut state, Open).is_none()));
            }
            let chatter = (0..3 * 65_535_u32).map(|tick| Position::closed_if(tick & 1 == 0));
            let reports: Vec<_> = chatter.filter_map(|sample| monitor.step(&mut state, sample)).collect();
            let expected = if power_up { 3 } else { 2 };
            assert_eq!(reports, std::vec![Outside::NeverAtRest; expected]);
        }
        // A contact that may change at every tick need not rest.
        let fast = Monitor::new(&Envelope::clean(1, 1).bounce(3, 3));
        let mut state = fast.power_up();
        assert!(
            (0..200_000_u32).all(|tick| fast.step(&mut state, Position::closed_if(tick & 1 == 0)).is_none())
        );
    }

    #[test]
    fn monitor_stuck_contact_is_reported_once() {
        let stuck = |monitor: Monitor, ticks: u32| {
            let mut state = monitor.power_up();
            // A disturbance does not free it, a change does.
            let line = |tick: u32| Position::closed_if(tick % 100 != 99);
            let reports: Vec<_> =
                (0..ticks).filter_map(|tick| Some((tick, monitor.step(&mut state, line(tick))?))).collect();
            for _ in 0..50 {
                assert_eq!(monitor.step(&mut state, Open), None);
            }
            let again = (0..ticks).filter_map(|_| monitor.step(&mut state, Closed)).count();
            (reports, again)
        };
        let monitor = Monitor::new(&DISTURBED);
        assert_eq!(stuck(monitor, 3_000), (std::vec![], 0));
        assert_eq!(stuck(monitor.stuck_after(u32::MAX, 5_000), 3_000), (std::vec![], 0));
        let (reports, again) = stuck(monitor.stuck_after(u32::MAX, 1_000), 3_000);
        assert!(matches!(reports[..], [(1_000..1_100, Outside::Stuck(Closed))]), "{reports:?}");
        assert_eq!(again, 1);
        // To the tick, on a clean line: sure from the first rest on.
        let exact = Monitor::new(&BOUNCING).stuck_after(10, u32::MAX);
        let mut state = exact.power_up();
        let first = (1..100).find(|_| exact.step(&mut state, Open).is_some());
        assert_eq!(first, Some(u32::from(exact.rest()) + 10));
        let before = state;
        assert_eq!(exact.step(&mut state, Open), None);
        assert_eq!(state, before);
    }

    #[test]
    fn monitor_envelope_out_of_range_is_refused() {
        let accepts = |envelope: Envelope| Monitor::try_new(&envelope).is_ok();
        assert!(accepts(Envelope::clean(65_535, 65_535).bounce(65_535, 65_535).glitch(65_535, 65_535)));
        assert!(!accepts(Envelope::clean(65_536, 1)) && !accepts(Envelope::clean(1, 65_536)));
        assert!(!accepts(Envelope::clean(0, 1)) && !accepts(Envelope::clean(2, 2).lost(2)));
        assert!(!accepts(Envelope::clean(1, 1).bounce(65_536, 0)));
        assert!(!accepts(Envelope::clean(1, 1).glitch(0, 65_536)));
        assert!(!accepts(Envelope::clean(1, 1).quiet(65_536)));
        assert!(!accepts(Envelope::clean(1, 1).calm(65_536)));
        let refused = |envelope: Envelope| Monitor::try_new(&envelope).map_err(|error| error.to_string());
        let zero = "no sample of a dwell while closed is certain to be delivered; use more than are lost";
        assert_eq!(refused(Envelope::clean(9, 2).lost(2)), Err(zero.to_string()));
        let wide =
            "a disturbance while closed of 65536 ticks does not fit the count; the most it holds is 65535";
        assert_eq!(refused(Envelope::clean(1, 1).glitch(0, 65_536)), Err(wide.to_string()));
    }
}
