//! A debouncing logic of one's own: a flaw that no bench test showed, its witness, the repair, and the proof.
//!
//! The scenario is invented: a limit switch tells whether the shutter of a greenhouse is closed. The relay beside it
//! disturbs the line now and then, for one sample. The author wanted a change to be believed after three samples of
//! the new position, and counted them. On the bench, with single disturbances, it never failed.
//!
//! What to copy: the implementation of `Law` for a logic of one's own, and the tests at the end.

use std::process::ExitCode;

use debounce_core::{Change, Envelope, Law, Machine, Position};
use harness::prove::{ProveError, prove};
use harness::report::timing::TimingDiagram;

/// The shutter: what is claimed is claimed for every waveform in here, in ticks of 2 ms.
const SHUTTER: Envelope = Envelope::clean(60, 60).bounce(2, 2).glitch(1, 1).quiet(8);

/// Samples of the new position that are needed.
const NEEDED: u8 = 3;

/// The output, and how many samples have spoken against it.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
struct Count {
    output: Position,
    contrary: u8,
}

impl Count {
    fn add(&mut self, sample: Position) -> Option<Change> {
        self.contrary += 1;
        if self.contrary < NEEDED {
            return None;
        }
        *self = Self { output: sample, contrary: 0 };
        Some(sample.reached_by())
    }
}

/// The first version. It counts the samples that speak against the output, and never forgets one.
struct Unforgetting;

impl Machine for Unforgetting {
    type Input = Position;
    type Output = Option<Change>;
    type State = Count;

    fn step(&self, state: &mut Count, sample: Position) -> Option<Change> {
        if sample == state.output { None } else { state.add(sample) }
    }
}

impl Law for Unforgetting {
    fn rest(&self, position: Position) -> Count {
        Count { output: position, contrary: 0 }
    }

    fn output(&self, state: &Count) -> Position {
        state.output
    }
}

/// The repair: a sample that agrees with the output takes one off again.
struct Forgetting;

impl Machine for Forgetting {
    type Input = Position;
    type Output = Option<Change>;
    type State = Count;

    fn step(&self, state: &mut Count, sample: Position) -> Option<Change> {
        if sample == state.output {
            state.contrary = state.contrary.saturating_sub(1);
            return None;
        }
        state.add(sample)
    }
}

impl Law for Forgetting {
    fn rest(&self, position: Position) -> Count {
        Count { output: position, contrary: 0 }
    }

    fn output(&self, state: &Count) -> Position {
        state.output
    }
}

fn main() -> ExitCode {
    match show() {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("error: {error}");
            ExitCode::from(2)
        }
    }
}

fn show() -> Result<(), ProveError> {
    println!("The shutter switch (invented), first version:");
    let first = prove(&Unforgetting, &SHUTTER)?;
    println!("{first}");
    if let Some((_, witness)) = first.refutation() {
        println!("\n{}", TimingDiagram(witness));
    }
    println!("Repaired:");
    let repaired = prove(&Forgetting, &SHUTTER)?;
    println!("{repaired}");
    if let (Some(bounds), Some(limit)) = (repaired.bounds(), SHUTTER.limit()) {
        println!(
            "The slowest make takes {} samples; no logic whatever can promise less than {}.",
            bounds.latency.make.worst, limit.make
        );
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use debounce_core::Position;
    use harness::check::{
        assert_faithful, assert_immune_to, assert_latency_at_most, assert_recovers_within, replay,
    };
    use harness::prove::prove;

    use super::{Forgetting, SHUTTER, Unforgetting};

    #[test]
    fn shutter_is_faithful() {
        assert_faithful(&Forgetting, &SHUTTER);
    }

    #[test]
    fn shutter_reports_in_time() {
        assert_latency_at_most(&Forgetting, &SHUTTER, 9, 9);
    }

    #[test]
    fn shutter_bears_disturbances_of_one_sample() {
        assert_immune_to(&Forgetting, &SHUTTER, 1, 1);
    }

    #[test]
    fn shutter_recovers_after_power_up() {
        assert_recovers_within(&Forgetting, &SHUTTER, 9);
    }

    /// The witness against the first version, as the failing assertion printed it.
    #[test]
    fn shutter_three_disturbances_far_apart_are_not_an_operation() {
        replay(&Forgetting, Position::Open, "0000000000000000000", "1000000001000000001").assert_faithful();
    }

    /// Not to copy: the example would be none if the first version were sound.
    #[test]
    fn first_version_is_refuted_by_three_disturbances() {
        let proof = prove(&Unforgetting, &SHUTTER).expect("a sound law and envelope");
        let (_, witness) = proof.refutation().expect("it never forgets");
        assert_eq!(witness.ticks.len(), 19);
        assert!(witness.ticks.iter().filter(|tick| tick.sample != tick.contact).count() == 3);
    }
}
