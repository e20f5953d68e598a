//! A logic at work on a recording, at one phase of the tick.

use debounce_core::{Law, Position, TickClock};

use crate::machine::MachineTable;
use crate::replay::judge;
use crate::sample::{ExactPeriod, SampleClock};
use crate::study::Observed;
use crate::trace::Trace;
use crate::truth::TruthChange;

/// What a logic does with a recording: what it reads, in which state it is, what it says.
///
/// Ticks are counted from 0 at the start of the recording. Only changes are kept.
#[derive(Clone, PartialEq, Debug)]
pub(in crate::report::html) struct LogicRun {
    /// The tick period.
    pub(super) period: ExactPeriod,
    /// When tick 0 comes, in units of the period.
    pub(super) phase: u64,
    /// Ticks at which a sample reads something else than the one before; the first is read against the start.
    pub(super) sampled: Vec<u64>,
    /// Ticks after which the state is another, and that state.
    pub(super) states: Vec<(u64, u32)>,
    /// Ticks after which the output is another.
    pub(super) output: Vec<u64>,
    /// Changes of the contact and the ticks that report them.
    pub(super) reports: Vec<(usize, u64)>,
    /// The names of the states.
    pub(super) names: Vec<String>,
    /// The state at the start.
    pub(super) first: u32,
    /// For each state whether the output is closed in it.
    pub(super) closed: Vec<bool>,
}

impl LogicRun {
    /// Follows `machine` along the line of the pin with the first tick `phase` units after its start.
    pub(in crate::report::html) fn of(
        machine: &MachineTable,
        clock: &TickClock,
        phase: u64,
        trace: &Trace,
        truth: &[TruthChange],
    ) -> Self {
        let clock = SampleClock::new(*clock).phase_units(phase);
        let train = clock.train(trace);
        let pass = judge(machine, &train, trace.initial(), truth);
        let mut run = Self {
            period: clock.period(),
            phase,
            sampled: Vec::new(),
            states: Vec::new(),
            output: Vec::new(),
            reports: pass.reported.iter().map(|report| (report.change, report.tick)).collect(),
            names: (0..machine.len()).map(|state| machine.name(state)).collect(),
            first: machine.rest(trace.initial()),
            closed: (0..machine.len()).map(|state| machine.output_of(state).is_closed()).collect(),
        };
        let (mut state, mut read) = (run.first, trace.initial());
        for stretch in train.stretches() {
            if stretch.position != read {
                read = stretch.position;
                run.sampled.push(stretch.first_tick);
            }
            run.follow(machine, &mut state, stretch.position, stretch.first_tick, stretch.ticks);
        }
        run
    }

    /// Samples that all read the same.
    fn follow(&mut self, machine: &MachineTable, state: &mut u32, read: Position, first: u64, ticks: u64) {
        for tick in 0..ticks {
            let before = *state;
            *state = machine.next(before as usize, read) as u32;
            // A step that leaves the state as it is leaves it for the rest of the samples that read the same.
            if *state == before {
                break;
            }
            self.states.push((first + tick, *state));
            if self.closed[before as usize] != self.closed[*state as usize] {
                self.output.push(first + tick);
            }
        }
    }

    /// How many numbers it takes to write it down.
    pub(super) fn numbers(&self) -> usize {
        self.sampled.len() + 2 * self.states.len() + self.output.len() + 2 * self.reports.len()
    }

    /// The instant of a tick, in nanoseconds after the start of the recording.
    pub(super) fn tick_ns(&self, tick: u64) -> f64 {
        let units = u128::from(self.phase) + u128::from(tick) * u128::from(self.period.units());
        units as f64 / self.period.units_per_ns() as f64
    }

    /// The first tick at or after an instant after the start of the recording.
    pub(super) fn first_tick(&self, after_start_ns: f64) -> u64 {
        let units = after_start_ns * self.period.units_per_ns() as f64 - self.phase as f64;
        (units / self.period.units() as f64).ceil().max(0.0) as u64
    }

    /// What a sample reads.
    pub(super) fn reads(&self, tick: u64, initial: Position) -> Position {
        let changes = self.sampled.partition_point(|&at| at <= tick);
        if changes.is_multiple_of(2) { initial } else { initial.opposite() }
    }

    /// The time from a change of the contact to its report, rounded up.
    pub(in crate::report::html) fn delay_of(&self, one: &Observed, at_ns: u64) -> Option<u64> {
        let change = one.truth.iter().position(|truth| truth.at_ns == at_ns)?;
        let &(_, tick) = self.reports.iter().find(|&&(reported, _)| reported == change)?;
        let after_start = self.tick_ns(tick);
        let start = (at_ns - one.recording.trace.start_ns()) as f64;
        Some((after_start - start).ceil().max(0.0) as u64)
    }
}
