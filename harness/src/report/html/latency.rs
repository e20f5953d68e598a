//! Measured latencies of the candidates, beside what is proved and what is asked.

use std::collections::BTreeMap;

use debounce_core::{Change, PerChange};
use maud::{Markup, html};

use super::{Cell, Figure, Section, table};
use crate::choose::Candidate;
use crate::law_text::LawParameters;
use crate::replay::Delay;
use crate::report::plot::{Axis, Plane, Scale, px};
use crate::report::words;
use crate::study::Study;

/// Candidates that are shown.
const MOST: usize = 9;
const ROW: f64 = 66.0;
/// Height of the most frequent latency of a candidate.
const STEPS: f64 = 22.0;
const TOP: f64 = 30.0;

/// The delays of the candidates; `None` where nothing was measured.
pub(super) fn section(study: &Study) -> Option<Section> {
    let chosen = chosen(study);
    let figures: Vec<Figure> = [Change::Make, Change::Break]
        .into_iter()
        .filter_map(|change| figure(study, &chosen, change))
        .collect();
    if figures.is_empty() {
        return None;
    }
    let body = html! {
        p {
            "The recommended candidate, the best of each other kind of logic, and the best that holds at each other tick. \
             The delay is from the first edge of an operation to the sample that reports it, over \
             every operation recorded and every phase of the tick. The steps show how it is distributed, one step for \
             each number of samples, as high as it is frequent. Below them the bar reaches from the median to 95 %, \
             the thin line from the shortest to the longest; the diamond is what is proved never to be reached."
        }
        div class="pair" { @for figure in &figures { (figure.markup()) } }
    };
    Some(Section { id: "latency", heading: "Latency, measured".to_owned(), body })
}

/// The recommended one, the best of each kind of law, and the best that holds at each other tick.
fn chosen(study: &Study) -> Vec<&Candidate> {
    let all = &study.ranking.candidates;
    let mut chosen: Vec<&Candidate> = all.iter().take(1).collect();
    let kinds = all.iter().filter(|one| one.bounds().is_some());
    for one in kinds {
        let kind = kind(&one.parameters);
        if chosen.iter().all(|known| self::kind(&known.parameters) != kind) {
            chosen.push(one);
        }
    }
    for one in all.iter().filter(|one| one.holds()) {
        if chosen.len() < MOST && chosen.iter().all(|known| known.clock != one.clock) {
            chosen.push(one);
        }
    }
    chosen.sort_by_key(|one| all.iter().position(|other| core::ptr::eq(other, *one)));
    chosen.retain(|one| !one.measured.is_empty());
    chosen
}

pub(super) fn kind(parameters: &LawParameters) -> u8 {
    match parameters {
        LawParameters::ShiftRegister { .. } => 0,
        LawParameters::Integrator { .. } => 1,
        LawParameters::MajorityRegister { .. } => 2,
        LawParameters::StateMachine { .. } => 3,
    }
}

/// The delays of one candidate over all recordings: the worst of each figure.
fn delay(candidate: &Candidate, change: Change) -> Option<Delay> {
    let delays = candidate.measured.iter().filter_map(|m| Some(m.at(change).latency.as_ref()?.delay));
    delays.reduce(|a, b| Delay {
        best_ns: a.best_ns.min(b.best_ns),
        median_ns: a.median_ns.max(b.median_ns),
        p95_ns: a.p95_ns.max(b.p95_ns),
        p99_ns: a.p99_ns.max(b.p99_ns),
        below_ns: a.below_ns.max(b.below_ns),
    })
}

fn at(pair: Option<PerChange<u64>>, change: Change) -> Option<u64> {
    pair.map(|pair| pair.at(change))
}

fn figure(study: &Study, chosen: &[&Candidate], change: Change) -> Option<Figure> {
    let rows: Vec<(&Candidate, Delay)> =
        chosen.iter().filter_map(|one| Some((*one, delay(one, change)?))).collect();
    if rows.is_empty() {
        return None;
    }
    let asked = study.resolved.required.latency.at(change).value.ns();
    let proved = rows.iter().filter_map(|(one, _)| at(one.worst_below_ns, change));
    let longest = rows.iter().map(|(_, delay)| delay.below_ns).chain(proved).max().unwrap_or(1);
    // What is asked may be far beyond everything; then it is only said.
    let reach = if asked <= longest * 2 { longest.max(asked) } else { longest };
    let height = TOP + ROW * rows.len() as f64 + 54.0;
    let plane = Plane { width: 480.0, height, left: 6.0, right: 468.0, top: TOP, bottom: height - 48.0 };
    let x = Scale::linear((0.0, reach as f64 * 1.04), plane.across());
    let word = words::change(change);
    let drawing = html! {
        (plane.bottom_axis(&Axis::of_time("delay", x, 6)))
        @if asked <= reach {
            path class="limit asked" d={ "M" (px(x.at(asked as f64))) " 22V" (px(plane.bottom)) } {}
            text class="limit-name asked" x=(px(x.at(asked as f64) + 2.0)) y="16" text-anchor="end" {
                "asked " (words::about(asked))
            }
        }
        @for (index, (one, delay)) in rows.iter().enumerate() {
            (row(study, one, delay, &x, TOP + ROW * index as f64, change))
        }
    };
    Some(Figure {
        id: format!("latency-{word}"),
        title: format!("Delay of a {word}"),
        description: rows
            .iter()
            .map(|(one, delay)| {
                format!(
                    "{} at {}: median {}, 95 % {}, below {}. ",
                    one.parameters,
                    study.tick(one),
                    words::about(delay.median_ns),
                    words::about(delay.p95_ns),
                    words::at_most(delay.below_ns)
                )
            })
            .collect(),
        view_box: plane.view_box(),
        drawing,
        caption: html! { @if asked > reach { "Asked: less than " (words::about(asked)) ", beyond the right edge." } },
        data: Some(numbers(study, &rows, change)),
    })
}

/// How often each number of samples occurs over all recordings, rising; together 1.
fn shares(candidate: &Candidate, change: Change) -> Vec<(u64, f64)> {
    let mut counts: BTreeMap<u64, f64> = BTreeMap::new();
    for figures in candidate.measured.iter().map(|measured| measured.at(change)) {
        for one in figures.latency.iter().flat_map(|latency| &latency.samples.histogram) {
            *counts.entry(one.samples).or_default() += one.share * f64::from(figures.changes);
        }
    }
    let whole: f64 = counts.values().sum();
    counts.into_iter().map(|(samples, count)| (samples, count / whole)).collect()
}

/// The distribution as steps above `bottom`: a latency of so many samples is a delay within the last of their ticks.
fn steps(shares: &[(u64, f64)], tick_ns: f64, x: &Scale, bottom: f64) -> String {
    let most = shares.iter().map(|(_, share)| *share).fold(0.0, f64::max);
    let step = |&(samples, share): &(u64, f64)| {
        let (from, until) = ((samples.saturating_sub(1)) as f64 * tick_ns, samples as f64 * tick_ns);
        let (left, right) = (px(x.within(from)), px(x.within(until)));
        format!("M{left} {}V{}H{right}V{}z", px(bottom), px(bottom - STEPS * share / most), px(bottom))
    };
    shares.iter().map(step).collect()
}

fn row(study: &Study, one: &Candidate, delay: &Delay, x: &Scale, top: f64, change: Change) -> Markup {
    let word = words::change(change);
    let place = |ns: u64| px(x.at(ns as f64));
    let middle = top + 52.0;
    let tick_ns = study.tick(one).nearest_ns() as f64;
    html! {
        path class={ "steps " (word) } d=(steps(&shares(one, change), tick_ns, x, top + 43.0)) {}
        text class={ "row-name" @if !one.holds() { " fails" } } x="6" y=(px(top + 14.0)) {
            (one.parameters) ", " (study.tick(one)) @if !one.holds() { " (does not hold)" }
        }
        path class={ "whisker " (word) } d={ "M" (place(delay.best_ns)) " " (px(middle)) "H" (place(delay.below_ns))
            "M" (place(delay.below_ns)) " " (px(middle - 4.0)) "v8" } {}
        rect class={ "bar " (word) } x=(place(delay.median_ns)) y=(px(middle - 4.0))
            width=(px(x.at(delay.p95_ns as f64) - x.at(delay.median_ns as f64))) height="8" {}
        @if let Some(worst) = at(one.worst_below_ns, change) {
            path class="diamond" d={ "M" (place(worst)) " " (px(middle - 7.0)) "l7 7l-7 7l-7 -7z" } {}
        }
    }
}

fn numbers(study: &Study, rows: &[(&Candidate, Delay)], change: Change) -> Markup {
    let rows: Vec<Vec<Cell>> = rows
        .iter()
        .map(|(one, delay)| {
            let proved = at(one.worst_below_ns, change).map_or("-".to_owned(), words::at_most);
            let shares = shares(one, change);
            let shares: Vec<String> =
                shares.iter().map(|(samples, share)| format!("{samples}: {:.1} %", share * 100.0)).collect();
            vec![
                Cell::text(one.parameters.to_string()),
                Cell::number(study.tick(one).to_string()),
                Cell::number(words::about(delay.best_ns)),
                Cell::number(words::about(delay.median_ns)),
                Cell::number(words::at_most(delay.p95_ns)),
                Cell::number(words::at_most(delay.p99_ns)),
                Cell::number(words::at_most(delay.below_ns)),
                Cell::number(proved),
                Cell::text(shares.join(", ")),
            ]
        })
        .collect();
    let head =
        ["law", "tick", "shortest", "median", "95 %", "99 %", "below", "proved below", "samples: share"];
    table(&format!("Delay of a {}", words::change(change)), &head, &rows)
}
