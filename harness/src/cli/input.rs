//! From a requirement to its recordings, read as operations.

use std::path::Path;

use crate::characterise::SegmentOptions;
use crate::demo;
use crate::problem::{Problem, Problems, SourceText};
use crate::quantity::Time;
use crate::requirement::{Level, Recording as Wanted, Requirement, parse};
use crate::study::{Observed, observe};
use crate::trace::{Polarity, ReadError, ReadOptions, Recording, Thresholds, read_bytes, read_path};

use super::{Failure, RequirementInput, Session};

/// A requirement and its recordings.
pub(super) struct Input {
    pub(super) requirement: Requirement,
    pub(super) observed: Vec<Observed>,
    /// Whether this is the built-in demonstration.
    pub(super) demo: bool,
}

impl Input {
    /// What was asked for; the built-in demonstration where nothing was.
    pub(super) fn or_demo(input: &RequirementInput, session: &Session) -> Result<Self, Failure> {
        if input.is_empty() { Self::demo(session) } else { Self::with_recordings(input, session) }
    }

    /// What was asked for, with at least one recording.
    pub(super) fn with_recordings(input: &RequirementInput, session: &Session) -> Result<Self, Failure> {
        Self::of(input.load_with_recordings()?, input, session)
    }

    /// What was asked for, with recordings or without.
    pub(super) fn with_or_without_recordings(
        input: &RequirementInput,
        session: &Session,
    ) -> Result<Self, Failure> {
        Self::of(input.load()?, input, session)
    }

    fn of(requirement: Requirement, input: &RequirementInput, session: &Session) -> Result<Self, Failure> {
        let segmenting = SegmentOptions { gap_ns: input.gap.map(Time::ns) };
        let resolution_ns = input.resolution.map(Time::ns);
        let (mut observed, mut problems) = (Vec::new(), Vec::new());
        for wanted in &requirement.recordings {
            let path = &wanted.path.value;
            let read = read_options(wanted, &requirement, resolution_ns)
                .map_err(|problem| vec![problem])
                .and_then(|options| read_path(path, &options).map_err(|error| recording_problems(&error)))
                .and_then(|recording| {
                    observed_in(path, recording, &segmenting, session).map_err(|problem| vec![problem])
                });
            match read {
                Ok(one) => observed.push(one),
                Err(found) => problems.extend(found),
            }
        }
        match Problems::from_found(problems) {
            Some(problems) => Err(problems.into()),
            None => Ok(Self { requirement, observed, demo: false }),
        }
    }

    fn demo(session: &Session) -> Result<Self, Failure> {
        let requirement = parse(SourceText::new(demo::REQUIREMENT_NAME, demo::REQUIREMENT))?;
        let options = ReadOptions { resolution_ns: Some(demo::RESOLUTION_NS), ..ReadOptions::default() };
        let recording = read_bytes(demo::RECORDING_NAME, demo::RECORDING, &options)
            .map_err(|error| failure(recording_problems(&error)))?;
        let segmenting = SegmentOptions::default();
        let one = observed_in(Path::new(demo::RECORDING_NAME), recording, &segmenting, session)?;
        Ok(Self { requirement, observed: vec![one], demo: true })
    }
}

fn read_options(
    wanted: &Wanted,
    requirement: &Requirement,
    resolution_ns: Option<u64>,
) -> Result<ReadOptions, Problem> {
    let closed = wanted.closed.as_ref().or(requirement.contact.closed.as_ref());
    let polarity = match closed.map(|closed| closed.value) {
        Some(Level::High) => Polarity::ClosedIsHigh,
        Some(Level::Low) | None => Polarity::ClosedIsLow,
    };
    let thresholds = wanted.thresholds.as_ref().map(|thresholds| {
        Thresholds::try_new(thresholds.value.low.volts(), thresholds.value.high.volts())
            .map_err(|error| Problem::new(error.to_string()).in_file(&wanted.path.value))
    });
    Ok(ReadOptions {
        channel: wanted.channel.as_ref().map(|channel| channel.value.clone()),
        polarity,
        thresholds: thresholds.transpose()?,
        resolution_ns,
        ..ReadOptions::default()
    })
}

fn observed_in(
    path: &Path,
    recording: Recording,
    segmenting: &SegmentOptions,
    session: &Session,
) -> Result<Observed, Problem> {
    let name = path.display().to_string();
    for note in &recording.notes {
        session.warn(&format!("{name}: {note}"));
    }
    observe(name, recording, segmenting).map_err(|error| Problem::new(error.to_string()).in_file(path))
}

/// Every fault of a recording, with its place.
fn recording_problems(error: &ReadError) -> Vec<Problem> {
    let mut problems: Vec<Problem> = error
        .faults()
        .iter()
        .map(|fault| {
            let problem = Problem::new(fault.message());
            match (fault.line(), fault.column()) {
                // A text of more lines than fit a usize cannot be in memory, but it can be streamed.
                (Some(line), Some(column)) => problem.at(
                    error.source_name(),
                    usize::try_from(line).unwrap_or(usize::MAX),
                    usize::try_from(column).unwrap_or(usize::MAX),
                ),
                _ => problem.in_file(error.source_name()),
            }
        })
        .collect();
    if let (Some(help), Some(last)) = (error.help(), problems.pop()) {
        problems.push(last.help(help));
    }
    problems
}

fn failure(problems: Vec<Problem>) -> Failure {
    match Problems::from_found(problems) {
        Some(problems) => problems.into(),
        None => Problem::new("the recording could not be read").into(),
    }
}
