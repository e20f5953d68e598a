//! Turns readings in order of time into a trace.

use debounce_core::Position;

use super::{Note, Trace, Unknown};

/// What one reading says about the line.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Reading {
    /// The line is here.
    Known(Position),
    /// Neither 0 nor 1: the policy decides.
    Unknown,
    /// Between two thresholds: as before, by definition of the hysteresis.
    Between,
}

/// The policy refuses unknown values, and one came.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Refused;

/// A trace being built. Readings come with times that never fall.
///
/// Of several readings in one nanosecond the last counts: a position that both began and ended there leaves
/// no edge, and the edges lost that way are counted. (Rounding down moves an edge by less than 1 ns, which
/// the resolution of the trace, at least 1 ns, tells the sampling clock.)
#[derive(Debug)]
pub(super) struct TraceBuilder {
    policy: Unknown,
    start_ns: u64,
    initial: Option<Position>,
    current: Position,
    edges: Vec<u64>,
    merged: u64,
    stretches: u64,
    first_unknown_ns: u64,
    last_was_unknown: bool,
    known_from_ns: u64,
}

impl TraceBuilder {
    pub(super) fn new(policy: Unknown) -> Self {
        Self {
            policy,
            start_ns: 0,
            initial: None,
            current: Position::Open,
            edges: Vec::new(),
            merged: 0,
            stretches: 0,
            first_unknown_ns: 0,
            last_was_unknown: false,
            known_from_ns: 0,
        }
    }

    /// Sets the first instant; before the first reading.
    pub(super) fn start(&mut self, start_ns: u64) {
        self.start_ns = start_ns;
    }

    #[inline]
    pub(super) fn record(&mut self, at_ns: u64, reading: Reading) -> Result<(), Refused> {
        let position = match reading {
            Reading::Known(position) => {
                self.last_was_unknown = false;
                position
            }
            Reading::Between => return Ok(()),
            Reading::Unknown => {
                if !self.last_was_unknown {
                    self.last_was_unknown = true;
                    if self.stretches == 0 {
                        self.first_unknown_ns = at_ns;
                    }
                    self.stretches += 1;
                }
                match self.policy {
                    Unknown::Hold => return Ok(()),
                    Unknown::Open => Position::Open,
                    Unknown::Closed => Position::Closed,
                    Unknown::Refuse => return Err(Refused),
                }
            }
        };
        if self.initial.is_none() {
            self.initial = Some(position);
            self.current = position;
            self.known_from_ns = at_ns;
        } else if position != self.current {
            self.turn_over(at_ns, position);
        }
        Ok(())
    }

    fn turn_over(&mut self, at_ns: u64, position: Position) {
        self.current = position;
        if at_ns <= self.start_ns {
            // A trace has no edge at its own start: what was there first lasted no time at all.
            self.initial = Some(position);
            self.merged += 1;
        } else if self.edges.last() == Some(&at_ns) {
            self.edges.pop();
            self.merged += 2;
        } else {
            self.edges.push(at_ns);
        }
    }

    /// The trace and the notes, or none when there was no known reading at all.
    pub(super) fn finish(self, end_ns: u64, resolution_ns: u64) -> Option<(Trace, Vec<Note>)> {
        let initial = self.initial?;
        let mut notes = Vec::new();
        if self.merged > 0 {
            notes.push(Note::MergedEdges { edges: self.merged });
        }
        if self.stretches > 0 {
            notes.push(Note::UnknownValues {
                stretches: self.stretches,
                first_ns: self.first_unknown_ns,
                policy: self.policy,
            });
        }
        if self.known_from_ns > self.start_ns {
            notes.push(Note::StartAssumed { until_ns: self.known_from_ns, position: initial });
        }
        let end_ns = end_ns.max(self.start_ns).max(self.edges.last().copied().unwrap_or(0));
        // Edges rise strictly and lie behind the start by construction, so this cannot fail.
        let trace = Trace::new(initial, self.start_ns, end_ns, self.edges, resolution_ns).ok()?;
        Some((trace, notes))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use Position::{Closed, Open};
    use Reading::{Between, Known};

    #[track_caller]
    fn check(policy: Unknown, readings: &[(u64, Reading)], initial: Position, edges: &[u64], notes: &[Note]) {
        let mut builder = TraceBuilder::new(policy);
        builder.start(readings[0].0);
        for &(at_ns, reading) in readings {
            builder.record(at_ns, reading).expect("not refused");
        }
        let (trace, got) = builder.finish(100, 1).expect("some known reading");
        assert_eq!((trace.initial(), trace.edges(), got.as_slice()), (initial, edges, notes));
    }

    #[test]
    fn builder_equal_readings_leave_no_edge() {
        check(Unknown::Hold, &[(0, Known(Open)), (5, Known(Open)), (9, Known(Closed))], Open, &[9], &[]);
    }

    #[test]
    fn builder_pulse_inside_one_nanosecond_vanishes_and_is_counted() {
        let merged = [Note::MergedEdges { edges: 2 }];
        check(Unknown::Hold, &[(0, Known(Open)), (5, Known(Closed)), (5, Known(Open))], Open, &[], &merged);
        let three = [(0, Known(Open)), (5, Known(Closed)), (5, Known(Open)), (5, Known(Closed))];
        check(Unknown::Hold, &three, Open, &[5], &merged);
    }

    #[test]
    fn builder_edge_at_the_start_replaces_the_initial_position() {
        let merged = [Note::MergedEdges { edges: 1 }];
        check(Unknown::Hold, &[(3, Known(Open)), (3, Known(Closed))], Closed, &[], &merged);
    }

    #[test]
    fn builder_unknown_values_follow_the_policy() {
        let readings = [(0, Known(Open)), (4, Reading::Unknown), (5, Reading::Unknown), (8, Known(Open))];
        let note = |policy| [Note::UnknownValues { stretches: 1, first_ns: 4, policy }];
        check(Unknown::Hold, &readings, Open, &[], &note(Unknown::Hold));
        check(Unknown::Open, &readings, Open, &[], &note(Unknown::Open));
        check(Unknown::Closed, &readings, Open, &[4, 8], &note(Unknown::Closed));
        let mut refusing = TraceBuilder::new(Unknown::Refuse);
        assert_eq!(refusing.record(4, Reading::Unknown), Err(Refused));
    }

    #[test]
    fn builder_start_without_value_takes_the_first_one() {
        let note = [Note::StartAssumed { until_ns: 7, position: Closed }];
        check(Unknown::Hold, &[(2, Between), (7, Known(Closed)), (9, Known(Open))], Closed, &[9], &note);
    }

    #[test]
    fn builder_without_any_known_reading_gives_nothing() {
        let mut builder = TraceBuilder::new(Unknown::Hold);
        builder.record(0, Reading::Unknown).expect("held");
        assert!(builder.finish(9, 1).is_none());
    }
}
