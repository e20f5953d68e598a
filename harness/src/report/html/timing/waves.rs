//! The numbers of a recording for the script, as JSON.

use debounce_core::Position;
use serde_json::{Value, json};

use super::draw::Lanes;
use super::{LogicRun, Shown};
use crate::report::words;

/// A recording, or as much of it as there is room for.
pub(super) struct Waves<'a> {
    shown: &'a Shown<'a>,
    /// The end of what is written down, in nanoseconds of the recording.
    until_ns: u64,
}

impl<'a> Waves<'a> {
    /// As much of a recording as `most` numbers tell.
    pub(super) fn of(shown: &'a Shown<'a>, most: usize) -> Self {
        let trace = &shown.one.recording.trace;
        let edges = trace.edges();
        let numbers = edges.len() + shown.runs.iter().map(LogicRun::numbers).sum::<usize>();
        if numbers <= most {
            return Self { shown, until_ns: trace.end_ns() };
        }
        // The runs have about as many numbers to an edge everywhere, so a part of the edges takes that part of all.
        let part = edges.len() as u128 * most as u128 / numbers as u128;
        let until_ns = edges.get(usize::try_from(part).unwrap_or(0)).copied().unwrap_or(trace.end_ns());
        Self { shown, until_ns }
    }

    /// What could not be written down.
    pub(super) fn note(&self) -> Option<String> {
        let trace = &self.shown.one.recording.trace;
        (self.until_ns < trace.end_ns()).then(|| {
            format!(
                "Zooming covers the first {} of {}; the rest of {} would make this file too large. The diagrams \
                 themselves are complete.",
                words::about(self.until_ns - trace.start_ns()),
                words::about(trace.end_ns() - trace.start_ns()),
                self.shown.one.name
            )
        })
    }

    /// The JSON, safe inside a `script` element. Instants are nanoseconds from the start of the recording.
    pub(super) fn json(&self) -> String {
        let one = self.shown.one;
        let trace = &one.recording.trace;
        let start = trace.start_ns();
        let inside = |at: &&u64| **at <= self.until_ns;
        let edges: Vec<u64> = trace.edges().iter().take_while(inside).map(|at| at - start).collect();
        let bursts = |kind: u8, first: u64, last: u64| {
            (first <= self.until_ns).then(|| json!([first - start, last.min(self.until_ns) - start, kind]))
        };
        let operations =
            one.segmentation.operations.iter().filter_map(|o| bursts(0, o.burst.first_ns, o.burst.last_ns));
        let disturbances =
            one.segmentation.disturbances.iter().filter_map(|d| bursts(1, d.burst.first_ns, d.burst.last_ns));
        let truth: Vec<Value> = one
            .truth
            .iter()
            .filter(|truth| truth.at_ns <= self.until_ns)
            .map(|truth| json!([truth.at_ns - start, words::change(truth.change)]))
            .collect();
        let value = json!({
            "start": start,
            "length": self.until_ns - start,
            "closed": trace.initial() == Position::Closed,
            "edges": differences(edges),
            "bursts": operations.chain(disturbances).collect::<Vec<_>>(),
            "changes": truth,
            "runs": self.shown.runs.iter().map(|run| self.run(run)).collect::<Vec<_>>(),
            "lanes": Lanes::of(self.shown).json(),
        });
        // The one thing that could end the element early.
        value.to_string().replace('<', "\\u003c")
    }

    fn run(&self, run: &LogicRun) -> Value {
        let after = (self.until_ns - self.shown.one.recording.trace.start_ns()) as f64;
        let last = run.first_tick(after);
        let inside = |at: &u64| *at <= last;
        let sampled = run.sampled.iter().copied().take_while(inside).collect();
        let output = run.output.iter().copied().take_while(inside).collect();
        let states: Vec<(u64, u32)> = run.states.iter().copied().take_while(|(at, _)| inside(at)).collect();
        let per_ns = run.period.units_per_ns() as f64;
        json!({
            "period": run.period.units() as f64 / per_ns,
            "phase": run.phase as f64 / per_ns,
            "sampled": differences(sampled),
            "output": differences(output),
            "state_ticks": differences(states.iter().map(|&(at, _)| at).collect()),
            "states": states.iter().map(|&(_, state)| state).collect::<Vec<_>>(),
            "first": run.first,
            "names": run.names,
            "closed": run.closed.iter().map(|&closed| u8::from(closed)).collect::<Vec<_>>(),
            "reports": run.reports.iter().filter(|(_, tick)| inside(tick)).collect::<Vec<_>>(),
        })
    }
}

/// Rising numbers as their differences, which are shorter.
fn differences(rising: Vec<u64>) -> Vec<u64> {
    let mut before = 0;
    rising.into_iter().map(|at| at - core::mem::replace(&mut before, at)).collect()
}
