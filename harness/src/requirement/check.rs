//! Requirements that contradict themselves, so that no logic whatever could meet them.

use std::sync::Arc;

use debounce_core::{Change, Position};

use super::{Figures, Origin, Requirement, Sourced, TickChoice};
use crate::problem::{Problem, SourceText};
use crate::quantity::{Share, Time};

/// Everything about `requirement` that contradicts itself, as far as the values are given.
pub(super) fn check(requirement: &Requirement) -> Vec<Problem> {
    let source = requirement.source();
    let mut problems = figures(&requirement.required, source);
    let mut share = |name: &str, share: &Option<Sourced<Share>>, example: &str| {
        if let Some(share) = share
            && !(1..1_000_000).contains(&share.value.ppm())
        {
            let message = format!("a {name} of {} cannot be reached", share.value);
            let help = format!("write a share above 0 % and below 100 %, such as \"{example}\"");
            problems.push(point(Problem::new(message), source, &share.origin, "").help(help));
        }
    };
    share("confidence", &requirement.confidence, "95 %");
    share("coverage", &requirement.coverage, "99 %");
    if let Some(tolerance) = &requirement.clock.tolerance
        && tolerance.value.ppm() >= 1_000_000
    {
        let message = format!("a clock tolerance of {} lets the period shrink to nothing", tolerance.value);
        let problem = point(Problem::new(message), source, &tolerance.origin, "");
        problems.push(problem.help("write a tolerance below 100 %, such as \"2 %\""));
    }
    problems.extend(ticks(requirement, source));
    problems
}

fn ticks(requirement: &Requirement, source: Option<&Arc<SourceText>>) -> Option<Problem> {
    let (ticks, fastest) = (requirement.clock.ticks.as_ref()?, requirement.budget.fastest_tick.as_ref()?);
    let slowest = match &ticks.value {
        TickChoice::OneOf(periods) => *periods.iter().max()?,
        TickChoice::Range(_, to) => *to,
    };
    (slowest < fastest.value).then(|| {
        let message = format!(
            "every tick period is shorter than the fastest tick, {}, that can be served",
            fastest.value
        );
        let problem =
            point(Problem::new(message), source, &ticks.origin, "the longest of these is too short");
        point(problem, source, &fastest.origin, "the fastest that can be served")
            .help(format!("allow a tick period of {} or longer", fastest.value))
    })
}

/// Everything about the times that contradicts itself. A figure that is not known is not judged.
pub(super) fn figures(
    figures: &Figures<Option<Sourced<Time>>>,
    source: Option<&Arc<SourceText>>,
) -> Vec<Problem> {
    let mut problems = Vec::new();
    let mut clash = |message: String, [a, b]: [(&Sourced<Time>, &str); 2], help: String| {
        // A culprit that nobody wrote cannot be pointed at, so its origin is told in words.
        let mut problem = Problem::new(message);
        for (value, label) in [a, b] {
            problem = point(problem, source, &value.origin, label);
        }
        for (value, label) in [a, b] {
            if value.origin.span().is_none() {
                problem = problem.help(format!("{label} ({}) is from {}", value.value, from(&value.origin)));
            }
        }
        problems.push(problem.help(help));
    };
    for change in [Change::Make, Change::Break] {
        let reached = change.to();
        let (Some(bounce), Some(shortest)) = (figures.bounce.at(change), figures.shortest.at(reached)) else {
            continue;
        };
        if shortest.value <= bounce.value {
            let (position, edge) = (position_word(reached), change_word(change));
            clash(
                format!(
                    "the shortest {position} time of {} is not longer than the bounce of {} after a {edge}",
                    shortest.value, bounce.value
                ),
                [(&shortest, "the shortest operation"), (&bounce, "the bounce")],
                format!(
                    "an operation that only bounces cannot be told from noise; ask for a shortest {position} time above {}",
                    bounce.value
                ),
            );
        }
    }
    for position in Position::BOTH {
        // While open, what looks like a short closed time is a disturbance; and the other way round.
        let (Some(width), Some(shortest)) =
            (figures.disturbance.at(position), figures.shortest.at(!position))
        else {
            continue;
        };
        if width.value > Time::ZERO && shortest.value <= width.value {
            let (now, other) = (position_word(position), position_word(!position));
            clash(
                format!(
                    "the shortest {other} time of {} is not longer than a disturbance of {} while {now}",
                    shortest.value, width.value
                ),
                [(&shortest, "the shortest operation"), (&width, "the disturbance")],
                format!(
                    "the two look the same on the line; ask for a shortest {other} time above {}",
                    width.value
                ),
            );
        }
    }
    let narrower = match (figures.disturbance.open, figures.disturbance.closed) {
        (Some(open), Some(closed)) => Some(if open.value <= closed.value { open } else { closed }),
        _ => None,
    };
    if let (Some(quiet), Some(width)) = (figures.quiet, narrower)
        && width.value > Time::ZERO
        && quiet.value <= width.value
    {
        clash(
            format!(
                "the quiet of {} is not longer than the disturbances of {} around it",
                quiet.value, width.value
            ),
            [(&quiet, "the quiet"), (&width, "the disturbance")],
            format!(
                "no logic can tell such disturbances from the contact; write a quiet above {}",
                width.value
            ),
        );
    }
    let mut never_zero = |name: &str, value: Option<Sourced<Time>>, help: &str| {
        if let Some(value) = value.filter(|value| value.value == Time::ZERO) {
            let problem =
                point(Problem::new(format!("{name} of 0 cannot be met")), source, &value.origin, "");
            problems.push(problem.help(help));
        }
    };
    let latency = "write the longest delay you can accept, such as \"20 ms\"";
    never_zero("a make latency", figures.latency.make, latency);
    if figures.latency.break_ != figures.latency.make {
        never_zero("a break latency", figures.latency.break_, latency);
    }
    let shortest = "write the shortest operation that must be reported, such as \"60 ms\"";
    // A bounce that is known has already been compared with it.
    never_zero(
        "a shortest closed time",
        figures.shortest.closed.filter(|_| figures.bounce.make.is_none()),
        shortest,
    );
    never_zero(
        "a shortest open time",
        figures.shortest.open.filter(|_| figures.bounce.break_.is_none()),
        shortest,
    );
    problems
}

fn from(origin: &Origin) -> String {
    match origin {
        Origin::Given { .. } => "the requirement".to_owned(),
        Origin::Option(name) => format!("the option {name}"),
        Origin::Measured => "the recordings".to_owned(),
        Origin::Network => "the network".to_owned(),
        Origin::Default(reason) => format!("the default: {reason}"),
    }
}

/// Marks the value in the file, if it stands there.
pub(super) fn point(
    problem: Problem,
    source: Option<&Arc<SourceText>>,
    origin: &Origin,
    label: &str,
) -> Problem {
    match (source, origin.span()) {
        (Some(source), Some(span)) => problem.mark(source, span, label),
        _ => problem,
    }
}

pub(super) const fn position_word(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

pub(super) const fn change_word(change: Change) -> &'static str {
    match change {
        Change::Make => "make",
        Change::Break => "break",
    }
}
