//! Faults of input files as problems, with the options that would help spelled as the command spells them.

use std::path::Path;

use crate::machine::TableFileError;
use crate::problem::Problem;
use crate::trace::{Lack, MAX_FAULTS, ReadError};

/// A fault at its place, both from 1.
fn placed(path: &str, place: Option<(usize, usize)>, message: &str) -> Problem {
    let problem = Problem::told(message);
    match place {
        Some((line, column)) => problem.at(path, line, column),
        None => problem.in_file(path),
    }
}

/// Every fault of a recording; what helps stands with the first of them, which often causes the others.
pub(super) fn recording(error: &ReadError) -> Vec<Problem> {
    // A text of more lines than fit a usize cannot be in memory, but it can be streamed.
    let whole = |number: u64| usize::try_from(number).unwrap_or(usize::MAX);
    let path = error.source_name();
    let mut problems: Vec<Problem> = error
        .faults()
        .iter()
        .map(|fault| placed(path, fault.line().map(whole).zip(fault.column().map(whole)), fault.message()))
        .collect();
    if problems.is_empty() {
        problems.push(Problem::new("cannot be read").in_file(path));
    }
    let is_helpless =
        error.help().is_none() && error.lacks().is_none() && problems.iter().all(|p| p.helps().is_empty());
    let mut first = problems.remove(0);
    if is_helpless {
        first = first.help("correct the file, or export the recording again");
    }
    // What the options could be stands in for what the reader says of them in general.
    match error.lacks() {
        Some(Lack::Thresholds { proposed: Some(_) }) => {}
        _ => first = error.help().into_iter().fold(first, Problem::help),
    }
    first = error.lacks().into_iter().map(option_for).fold(first, Problem::help);
    problems.insert(0, first);
    if error.has_more() {
        problems.push(last_of_many(path, &problems));
    }
    problems
}

/// Stands behind the list: at the last place in it, so that sorting leaves it there.
fn last_of_many(path: &str, listed: &[Problem]) -> Problem {
    let message = format!("more bad lines follow; the first {MAX_FAULTS} are listed");
    let (line, column) = listed.iter().filter_map(Problem::line_column).max().unwrap_or((1, 1));
    Problem::told(message).at(path, line, column)
}

/// How to tell the reader what it lacks.
fn option_for(lack: &Lack) -> String {
    match lack {
        Lack::Channel { such_as } => {
            let name = such_as.as_deref().unwrap_or("NAME");
            format!(
                "give --channel \"{name}\", or channel = \"{name}\" under [[recording]] in the requirement file"
            )
        }
        Lack::Thresholds { proposed } => {
            let (low, high) = proposed.map_or((0.8, 2.0), |pair| (pair.falling_v(), pair.rising_v()));
            let why = if proposed.is_some() { " (30 % and 70 % of that range)" } else { "" };
            format!(
                "give --threshold-low \"{low} V\" --threshold-high \"{high} V\"{why}, or thresholds = {{ low = \
                 \"{low} V\", high = \"{high} V\" }} under [[recording]] in the requirement file"
            )
        }
        Lack::TimeUnit => "give --time-unit us, or s, ms, ns, ps or fs; --sample-period \"10 us\" where a CSV counts samples; or \
             time_unit or sample_period under [[recording]] in the requirement file"
            .to_owned(),
        Lack::TimeColumn => "give --time-column, or time_column under [[recording]], by name or number".to_owned(),
        _ => "give --delimiter, or delimiter under [[recording]], as comma, semicolon, tab or space".to_owned(),
    }
}

/// Every fault of a next-state table.
pub(super) fn table(error: &TableFileError) -> Vec<Problem> {
    let all = error.faults();
    let mut problems: Vec<Problem> = all
        .iter()
        .take(MAX_FAULTS)
        .map(|fault| {
            let problem = placed(error.path(), fault.line().zip(fault.column()), fault.message());
            fault.help().into_iter().fold(problem, Problem::help)
        })
        .collect();
    if all.len() > MAX_FAULTS {
        problems.push(last_of_many(error.path(), &problems));
    }
    problems
}

/// A file that cannot be opened, with a name that was perhaps meant.
pub(super) fn unreadable(what: &str, path: &Path, error: &std::io::Error) -> Problem {
    let help = match error.kind() {
        std::io::ErrorKind::NotFound => "check the path; a relative one begins at the current folder",
        std::io::ErrorKind::IsADirectory => "name a file in this folder",
        _ => "make the file readable",
    };
    Problem::new(format!("the {what} cannot be read: {}", crate::problem::plain_reason(error)))
        .in_file(path)
        .help(help)
}
