//! From a requirement to its recordings, read as operations.

use std::fs::File;
use std::path::Path;

use crate::characterise::SegmentOptions;
use crate::demo;
use crate::problem::{Problem, Problems, SourceText, plain_reason};
use crate::quantity::Time;
use crate::report::html::SourceFile;
use crate::requirement::{Level, Origin, Recording as Wanted, Requirement, Sourced, TakenAt, parse};
use crate::study::{Observed, observe};
use crate::trace::{Polarity, ReadOptions, Recording, Thresholds, read_bytes, read_path_through};

use super::{Failure, RequirementInput, Session, faults};

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

    /// The files that were read, with what tells them from any other.
    ///
    /// They are read a second time for it, so this is for those who want a report.
    pub(super) fn files(&self) -> Result<Vec<SourceFile>, Failure> {
        if self.demo {
            return Ok(vec![
                SourceFile::of_bytes(demo::REQUIREMENT_NAME, "requirement", demo::REQUIREMENT.as_bytes()),
                SourceFile::of_bytes(demo::RECORDING_NAME, "recording", demo::RECORDING),
            ]);
        }
        let mut files = Vec::new();
        if let Some(source) = self.requirement.source() {
            files.push(source_file(source.path(), "requirement")?);
        }
        for recording in &self.requirement.recordings {
            files.push(source_file(&recording.path.value, "recording")?);
        }
        Ok(files)
    }

    fn of(requirement: Requirement, input: &RequirementInput, session: &Session) -> Result<Self, Failure> {
        input.reading.check()?;
        let (mut observed, mut problems) = (Vec::new(), Vec::new());
        for wanted in &requirement.recordings {
            let path = &wanted.path.value;
            let gap = input.gap.or(wanted.reading.gap.map(|gap| gap.value));
            let segmenting = SegmentOptions { gap_ns: gap.map(Time::ns) };
            let read = read_options(wanted, &requirement, input.reading.over(&wanted.reading))
                .map_err(|problem| vec![problem])
                .and_then(|options| read_watched(path, &options, session))
                .and_then(|recording| {
                    let name = requirement.as_written(path);
                    observed_in(name, path, recording, &segmenting, session).map_err(|problem| vec![problem])
                });
            match read {
                Ok(one) => {
                    let closed = wanted.closed.as_ref().map(|closed| closed.value);
                    let taken_at = taken_at(wanted, &requirement, &one.name, session);
                    observed.push(Observed { closed, taken_at, ..one });
                }
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
            .map_err(|error| Failure::from_found(faults::recording(&error)))?;
        let segmenting = SegmentOptions::default();
        let name = Path::new(demo::RECORDING_NAME);
        let one = observed_in(name, name, recording, &segmenting, session)?;
        Ok(Self { requirement, observed: vec![one], demo: true })
    }
}

/// Where a recording was taken, which matters only with a network between contact and pin.
fn taken_at(
    wanted: &Wanted,
    requirement: &Requirement,
    name: &str,
    session: &Session,
) -> Option<Sourced<TakenAt>> {
    const CONTACT: Sourced<TakenAt> = Sourced::new(
        TakenAt::Contact,
        Origin::Default("the cautious case: all that [network] adds is added to what was recorded"),
    );
    if requirement.network.is_none() {
        if wanted.taken_at.is_some_and(|taken_at| taken_at.value == TakenAt::Pin) {
            session.warn(&format!(
                "{name}: taken at the pin, and no [network] says what stands in front of it, so its figures are \
                 taken for those of the contact; write [network] in the requirement file"
            ));
        }
        return None;
    }
    Some(wanted.taken_at.unwrap_or(CONTACT))
}

/// The recording at `path`; of a long one a person sees how far it has been read.
fn read_watched(path: &Path, options: &ReadOptions, session: &Session) -> Result<Recording, Vec<Problem>> {
    let bytes = |file: &File| file.metadata().map_or(0, |found| found.len());
    let read = read_path_through(path, options, |file| session.reading(bytes(&file)).wrap_read(file));
    read.map_err(|error| faults::recording(&error))
}

/// A file that was read, named by its contents.
pub(super) fn source_file(path: &Path, role: &'static str) -> Result<SourceFile, Problem> {
    SourceFile::of_path(path, role).map_err(|error| {
        let message = format!(
            "a report names each file by its contents, and this one cannot be read again: {}",
            plain_reason(&error)
        );
        Problem::new(message)
            .in_file(path)
            .help("keep the recording as an ordinary file, or leave out --report")
    })
}

fn read_options(
    wanted: &Wanted,
    requirement: &Requirement,
    reading: ReadOptions,
) -> Result<ReadOptions, Problem> {
    let closed = wanted.closed.as_ref().or(requirement.contact.closed.as_ref());
    let thresholds = wanted.thresholds.as_ref().map(|thresholds| {
        Thresholds::try_new(thresholds.value.low.volts(), thresholds.value.high.volts())
            .map_err(|error| Problem::told(error).in_file(&wanted.path.value))
    });
    Ok(ReadOptions {
        channel: wanted.channel.as_ref().map(|channel| channel.value.clone()),
        // The same default as that of the requirement: a contact to ground with a pull-up.
        polarity: Polarity::closed_is(closed.map_or(Level::Low, |closed| closed.value)),
        thresholds: thresholds.transpose()?,
        ..reading
    })
}

/// The recording at `path`, called `name` in all answers.
fn observed_in(
    name: &Path,
    path: &Path,
    recording: Recording,
    segmenting: &SegmentOptions,
    session: &Session,
) -> Result<Observed, Problem> {
    let name = name.display().to_string();
    for note in &recording.notes {
        session.warn(&format!("{name}: {note}"));
    }
    let observed = session.during("finding operations", || observe(name, recording, segmenting));
    observed.map_err(|error| Problem::told(error).in_file(path))
}
