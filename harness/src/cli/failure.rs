//! How a command ends: with an answer and its exit code, or with what was wrong.

use std::io;
use std::process::ExitCode;

use super::lines::{columns, wrap};
use crate::problem::{Problem, Problems, plain_reason};

/// What a command found out.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Outcome {
    /// What was asked holds; exit code 0.
    Holds,
    /// It does not hold; exit code 1.
    DoesNotHold,
}

impl Outcome {
    /// The exit code: 0 or 1.
    #[must_use]
    pub const fn code(self) -> u8 {
        match self {
            Self::Holds => 0,
            Self::DoesNotHold => 1,
        }
    }

    /// How it stands in the JSON output.
    #[must_use]
    pub const fn word(self) -> &'static str {
        match self {
            Self::Holds => "holds",
            Self::DoesNotHold => "does-not-hold",
        }
    }
}

/// Bad input, bad usage, or an output that cannot be written; exit code 2.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Failure {
    problems: Problems,
}

impl Failure {
    /// The exit code of every failure.
    pub const CODE: u8 = 2;

    /// Everything that was found wrong.
    pub(super) fn from_found(problems: Vec<Problem>) -> Self {
        Problems::from_found(problems).map_or_else(|| Problem::new("something is wrong").into(), Self::from)
    }

    /// Both, the problems of `self` first.
    pub(super) fn and(self, other: Self) -> Self {
        Self::from_found(self.problems.iter().chain(other.problems.iter()).cloned().collect())
    }

    /// What was wrong.
    #[must_use]
    pub fn problems(&self) -> &Problems {
        &self.problems
    }

    /// The problems as they are shown to a person.
    #[must_use]
    pub fn rendered(&self) -> String {
        let shown: Vec<String> = self.problems.iter().map(|problem| wrapped(&problem.rendered())).collect();
        shown.join("\n\n") + "\n"
    }

    /// Standard output that cannot be written, for example because the disk is full.
    pub(super) fn of_stdout(error: &io::Error) -> Self {
        Problem::new(format!("standard output cannot be written: {}", plain_reason(error)))
            .help("make room where the output goes, or send it elsewhere")
            .into()
    }
}

/// The same with its lines of help wrapped, unless they hold a command line. An excerpt of a source keeps its lines.
fn wrapped(rendered: &str) -> String {
    let (columns, word) = (columns(), "help: ");
    let lines = rendered.split('\n').map(|line| {
        let plain = anstream::adapter::strip_str(line).to_string();
        match plain.starts_with(word) && !plain.contains("harness ") {
            true => wrap(line, word.len(), columns),
            false => line.to_owned(),
        }
    });
    lines.collect::<Vec<_>>().join("\n")
}

impl From<Problems> for Failure {
    fn from(problems: Problems) -> Self {
        Self { problems }
    }
}

impl From<Problem> for Failure {
    fn from(problem: Problem) -> Self {
        Self { problems: problem.into() }
    }
}

impl From<Failure> for ExitCode {
    fn from(_: Failure) -> Self {
        Self::from(Failure::CODE)
    }
}
