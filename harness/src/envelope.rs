//! The envelope in time: what is claimed of the contact itself, before any clock looks at it.

use debounce_core::{Envelope, PerChange, PerPosition, Period, TickClock};

use crate::quantity::{TickPeriod, Time};

/// The set of waveforms a claim is made for, in nanoseconds. The same clauses as [`Envelope`], before sampling.
///
/// A requirement states these times once; every tick period is then judged on the same physics through
/// [`in_ticks`](Self::in_ticks).
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct PhysicalEnvelope {
    /// Longest time from the first edge of a change to its last.
    pub bounce_ns: PerChange<u64>,
    /// Widest disturbance that begins in each position.
    pub glitch_ns: PerPosition<u64>,
    /// Shortest time from the end of a disturbance to the beginning of the next.
    pub quiet_ns: u64,
    /// Shortest settled time between a bounce and a disturbance that begins outside bounce; 0: disturbances
    /// know nothing of the contact.
    pub calm_ns: u64,
    /// Shortest time from the first edge of one change to the first edge of the next.
    pub dwell_ns: PerPosition<u64>,
}

/// Why an envelope in time has no counterpart at a sample clock.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum TickError {
    /// The clock cannot tell one disturbance from the next.
    #[error(
        "disturbances {} apart come faster than a tick of {} can tell apart; use a tick period of {} or less",
        exact(*.quiet_ns),
        period_text(*.period_numerator_ns, *.period_denominator),
        exact(*.longest_period_ns)
    )]
    QuietUnseen {
        /// The quiet between disturbances.
        quiet_ns: u64,
        /// Numerator of the tick period in nanoseconds.
        period_numerator_ns: u64,
        /// Denominator of the tick period in nanoseconds.
        period_denominator: u32,
        /// The longest tick period, in whole nanoseconds, at which at least one sample falls between two
        /// disturbances.
        longest_period_ns: u64,
    },
    /// No tick period helps: the sample instants wander by more than the quiet.
    #[error(
        "disturbances {} apart come closer than the sample instants wander ({} of jitter); \
         no tick period can tell them apart, reduce the jitter or state a longer quiet",
        exact(*.quiet_ns),
        exact(*.jitter_ns)
    )]
    QuietBelowJitter {
        /// The quiet between disturbances.
        quiet_ns: u64,
        /// The jitter of the clock.
        jitter_ns: u64,
    },
}

/// Every digit: these figures are for comparing and copying.
fn exact(ns: u64) -> String {
    format!("{:.20}", Time::from_ns(ns))
}

fn period_text(numerator_ns: u64, denominator: u32) -> String {
    let period = Period::try_from_ratio(numerator_ns, denominator).map(TickPeriod::from);
    period.map_or_else(|| format!("{numerator_ns}/{denominator} ns"), |period| period.to_string())
}

impl PhysicalEnvelope {
    /// A contact that neither bounces nor picks anything up, with the given shortest times in each position.
    #[must_use]
    pub const fn clean(dwell_open_ns: u64, dwell_closed_ns: u64) -> Self {
        Self {
            bounce_ns: PerChange { make: 0, break_: 0 },
            glitch_ns: PerPosition { open: 0, closed: 0 },
            quiet_ns: 0,
            calm_ns: 0,
            dwell_ns: PerPosition { open: dwell_open_ns, closed: dwell_closed_ns },
        }
    }

    /// Whether the envelope holds any disturbance at all; without one, quiet and calm say nothing.
    #[must_use]
    pub const fn has_disturbances(&self) -> bool {
        self.glitch_ns.open > 0 || self.glitch_ns.closed > 0
    }

    /// The envelope as `clock` samples it, every number rounded toward the safe side.
    ///
    /// Bounce and disturbances become the most samples they can touch; dwell, quiet and calm the fewest that
    /// see them. The clock's lost ticks are taken off there, so the result has `lost` = 0. A dwell may come
    /// out at 0: an operation that can fall between two samples, which the prover answers with a witness.
    ///
    /// A disturbance may begin an instant before a change, between two samples: all its samples then follow the
    /// change, where the old position's width or the lack of calm would forbid them. They count as bounce.
    ///
    /// # Errors
    /// When quiet comes out at 0 while there are disturbances; the error names the tick period at which it
    /// would not.
    pub const fn in_ticks(&self, clock: &TickClock) -> Result<Envelope, TickError> {
        let quiet = if self.has_disturbances() {
            match clock.samples_seen(self.quiet_ns) {
                0 => return Err(self.quiet_error(clock)),
                quiet => quiet,
            }
        } else {
            1
        };
        let (open, closed) =
            (clock.samples_touched(self.glitch_ns.open), clock.samples_touched(self.glitch_ns.closed));
        let calm = clock.samples_seen(self.calm_ns);
        let make = with_straddling(clock.samples_touched(self.bounce_ns.make), open, closed, calm);
        let break_ = with_straddling(clock.samples_touched(self.bounce_ns.break_), closed, open, calm);
        Ok(Envelope::clean(clock.samples_seen(self.dwell_ns.open), clock.samples_seen(self.dwell_ns.closed))
            .bounce(make, break_)
            .glitch(open, closed)
            .quiet(quiet)
            .calm(calm))
    }

    const fn quiet_error(&self, clock: &TickClock) -> TickError {
        // floor((q - J) / (T (1 + tolerance))) >= lost + 1, solved for T in whole nanoseconds.
        let usable = self.quiet_ns.saturating_sub(clock.jitter()) as u128 * 1_000_000;
        let divisor = (clock.lost_ticks() as u128 + 1) * (1_000_000 + clock.ppm() as u128);
        // At most the quiet itself, so it fits.
        let longest_period_ns = (usable / divisor) as u64;
        if longest_period_ns == 0 {
            return TickError::QuietBelowJitter { quiet_ns: self.quiet_ns, jitter_ns: clock.jitter() };
        }
        TickError::QuietUnseen {
            quiet_ns: self.quiet_ns,
            period_numerator_ns: clock.period().numerator_ns(),
            period_denominator: clock.period().denominator(),
            longest_period_ns,
        }
    }
}

/// The bounce after a change, where a disturbance of `straddling` samples may begin just before the change and be seen
/// only after it. Without calm, a disturbance of the new position explains up to its own width.
const fn with_straddling(bounce: u32, straddling: u32, of_new_position: u32, calm: u32) -> u32 {
    let is_explained = calm == 0 && straddling <= of_new_position;
    if is_explained || straddling <= bounce { bounce } else { straddling }
}

#[cfg(test)]
mod tests {
    use super::*;

    const MS: u64 = 1_000_000;

    fn button() -> PhysicalEnvelope {
        PhysicalEnvelope {
            bounce_ns: PerChange { make: 5 * MS, break_: 3 * MS + 1 },
            glitch_ns: PerPosition { open: MS / 2, closed: 0 },
            quiet_ns: 10 * MS,
            calm_ns: 4 * MS - 1,
            dwell_ns: PerPosition { open: 60 * MS, closed: 40 * MS - 1 },
        }
    }

    #[test]
    fn physical_envelope_at_1_ms_rounds_every_clause_to_the_safe_side() {
        let ticks = button().in_ticks(&TickClock::new(Period::from_ms(1))).unwrap();
        assert_eq!(ticks, Envelope::clean(60, 39).bounce(5, 4).glitch(1, 0).quiet(10).calm(3));
    }

    #[test]
    fn physical_envelope_disturbance_unseen_before_a_change_counts_as_bounce() {
        let clock = TickClock::new(Period::from_ms(1));
        let ticks = |open, closed, calm_ns| {
            let glitch_ns = PerPosition { open: open * MS, closed: closed * MS };
            let bounce_ns = PerChange { make: 2 * MS, break_: 2 * MS };
            let physical = PhysicalEnvelope { glitch_ns, bounce_ns, calm_ns, ..button() };
            physical.in_ticks(&clock).unwrap().bounce
        };
        assert_eq!(ticks(2, 1, 0), PerChange { make: 2, break_: 2 });
        assert_eq!(ticks(3, 1, 0), PerChange { make: 3, break_: 2 });
        assert_eq!(ticks(1, 3, 0), PerChange { make: 2, break_: 3 });
        assert_eq!(ticks(3, 3, 0), PerChange { make: 2, break_: 2 });
        assert_eq!(ticks(3, 3, MS - 1), PerChange { make: 2, break_: 2 });
        assert_eq!(ticks(3, 3, MS), PerChange { make: 3, break_: 3 });
    }

    #[test]
    fn physical_envelope_with_lost_ticks_takes_them_off_once() {
        let ticks = button().in_ticks(&TickClock::new(Period::from_ms(1)).lost(2)).unwrap();
        assert_eq!(ticks, Envelope::clean(58, 37).bounce(5, 4).glitch(1, 0).quiet(8).calm(1));
        assert_eq!(ticks.delivered(), ticks);
    }

    #[track_caller]
    fn check_named_period(envelope: PhysicalEnvelope, clock: impl Fn(Period) -> TickClock, expected_ns: u64) {
        let too_slow = clock(Period::from_ns(expected_ns + 1));
        match envelope.in_ticks(&too_slow) {
            Err(TickError::QuietUnseen { longest_period_ns, .. }) => {
                assert_eq!(longest_period_ns, expected_ns)
            }
            other => panic!("expected an unseen quiet, found {other:?}"),
        }
        assert_eq!(envelope.in_ticks(&clock(Period::from_ns(expected_ns))).unwrap().quiet, 1);
    }

    #[test]
    fn physical_envelope_quiet_unseen_names_the_period_that_works() {
        check_named_period(button(), TickClock::new, 10 * MS);
        check_named_period(button(), |period| TickClock::new(period).lost(1), 5 * MS);
        check_named_period(button(), |period| TickClock::new(period).jitter_ns(MS), 9 * MS);
        check_named_period(button(), |period| TickClock::new(period).tolerance_ppm(250_000), 8 * MS);
    }

    #[test]
    fn physical_envelope_quiet_within_jitter_says_that_no_period_works() {
        let clock = TickClock::new(Period::from_ms(1)).jitter_ns(10 * MS);
        let error = button().in_ticks(&clock).unwrap_err();
        assert_eq!(error, TickError::QuietBelowJitter { quiet_ns: 10 * MS, jitter_ns: 10 * MS });
    }

    #[test]
    fn physical_envelope_at_30_hz_prints_the_exact_period() {
        let error = button().in_ticks(&TickClock::new(Period::from_hz(30))).unwrap_err();
        assert_eq!(
            error.to_string(),
            "disturbances 10 ms apart come faster than a tick of 30 Hz can tell apart; \
             use a tick period of 10 ms or less"
        );
    }

    #[test]
    fn physical_envelope_without_disturbances_needs_no_quiet() {
        let clean = PhysicalEnvelope::clean(60 * MS, 40 * MS);
        let ticks = clean.in_ticks(&TickClock::new(Period::from_ms(10))).unwrap();
        assert_eq!(ticks, Envelope::clean(6, 4));
    }
}
