//! Latency against tick period: what the best candidate of each clock gives, and what no logic could beat there.

use debounce_core::PerChange;
use maud::html;

use super::{Cell, Figure, Section, table, tick_curves};
use crate::choose::{Candidate, ClockView};
use crate::clock_range::ClockRange;
use crate::quantity::TickPeriod;
use crate::report::plot::{Axis, Plane, Scale, kept_apart, px};
use crate::report::words;
use crate::study::Study;

const PLANE: Plane =
    Plane { width: 940.0, height: 400.0, left: 56.0, right: 780.0, top: 34.0, bottom: 350.0 };

/// The classes of the lines, one for each kind of logic.
const KINDS: [&str; 4] = ["one", "two", "three", "four"];

/// One clock.
struct Row<'a> {
    tick: TickPeriod,
    view: &'a ClockView,
    best: Option<&'a Candidate>,
    holding: usize,
    tried: usize,
}

impl Row<'_> {
    fn ns(&self) -> f64 {
        self.tick.nearest_ns() as f64
    }

    fn best_ns(&self) -> Option<u64> {
        self.best.and_then(|best| best.worst_below_ns).map(later)
    }

    fn limit_ns(&self) -> Option<u64> {
        let limit = self.view.limit?;
        Some(self.view.clock.delay_ns(limit.make.max(limit.break_)).1)
    }
}

fn later(pair: PerChange<u64>) -> u64 {
    pair.make.max(pair.break_)
}

/// The figure; `None` where there are fewer than two tick periods to compare.
pub(super) fn section(study: &Study, range: &ClockRange) -> Option<Section> {
    let rows: Vec<Row<'_>> = rows(study);
    if rows.iter().filter(|row| row.limit_ns().is_some() || row.best_ns().is_some()).count() < 2 {
        return None;
    }
    let (first, last) = (rows.first()?.ns(), rows.last()?.ns());
    let asked = &study.resolved.required.latency;
    let allowed_ns = asked.make.value.ns().min(asked.break_.value.ns());
    let physical_ns = later(study.ranking.physical_limit_ns);
    let drawn = rows.iter().flat_map(|row| [row.best_ns(), row.limit_ns()]).flatten();
    let highest = drawn.chain([physical_ns]).max()?;
    let lines = tick_curves::lines(range);
    // What a line says within the time allowed is drawn, or it would look as if there were nothing.
    let along = lines.iter().filter_map(|line| line.highest_ns(allowed_ns as f64)).fold(0.0, f64::max);
    let highest = highest.max(along.ceil() as u64);
    // What is asked is drawn unless it would leave all else in a corner.
    let shown_asked = allowed_ns <= highest.saturating_mul(3);
    let highest = if shown_asked { highest.max(allowed_ns) } else { highest };
    let last = lines.iter().map(tick_curves::Line::until_ns).fold(last, f64::max);
    let x = Scale::logarithmic((first * 0.85, last * 1.18), PLANE.across());
    let y = Scale::linear((0.0, highest as f64 * 1.06), PLANE.up());
    let mut names = vec![("no tick beats this", "any", physical_ns)];
    names.extend(lines.iter().zip(KINDS).filter_map(|(line, class)| {
        let last_ns = line.last_ns(highest as f64)?;
        Some((line.family, class, last_ns as u64))
    }));
    let limit = rows.iter().rev().find_map(Row::limit_ns);
    names.extend(limit.map(|ns| ("limit at each tick", "here", ns)));
    if shown_asked {
        names.push(("asked", "asked", allowed_ns));
    }
    let places: Vec<f64> = names.iter().map(|(_, _, ns)| y.at(*ns as f64)).collect();
    let places = kept_apart(&places, 18.0, (PLANE.top, PLANE.bottom));
    let chosen = study.ranking.recommended().map(|best| study.tick(best));
    let drawing = html! {
        (PLANE.axes(&Axis::of_log_time("tick period", x, 12), &Axis::of_time("worst delay", y, 6)))
        @for (at, class) in [(Some(physical_ns), "bound any"), (shown_asked.then_some(allowed_ns), "limit asked")] {
            @if let Some(at) = at {
                path class=(class) d={ "M" (px(PLANE.left)) " " (px(y.at(at as f64))) "H" (px(PLANE.right)) } {}
            }
        }
        // Nothing is said of the limit between the ticks, so no line joins them.
        @for (row, ns) in rows.iter().filter_map(|row| Some((row, row.limit_ns()?))) {
            path class="bound here" d={ "M" (px(x.at(row.ns()) - 14.0)) " " (px(y.at(ns as f64))) "h28" } {}
        }
        @for (line, class) in lines.iter().zip(KINDS) { path class={ "kind " (class) } d=(line.path(&x, &y)) {} }
        @for row in &rows {
            @if let Some(ns) = row.best_ns() {
                @let (cx, cy) = (x.at(row.ns()), y.at(ns as f64));
                @if Some(row.tick) == chosen {
                    path class="mark first" d={ "M" (px(cx)) " " (px(cy - 9.0)) "l9 9l-9 9l-9 -9z" } {}
                } @else {
                    circle class="mark holds" cx=(px(cx)) cy=(px(cy)) r="5" {}
                }
            }
        }
        @for ((name, class, _), at) in names.iter().zip(&places) {
            text class={ "line-name " (class) } x=(px(PLANE.right + 10.0)) y=(px(at + 4.5)) { (name) }
        }
    };
    let figure = Figure {
        id: "tick-period".to_owned(),
        title: "Worst delay against tick period".to_owned(),
        description: rows.iter().map(sentence).collect(),
        view_box: PLANE.view_box(),
        drawing,
        caption: html! {
            "The later of make and break. Marks are the best candidates that hold; lines are the best of each kind of \
             logic in between, as far as closed forms tell or exploring does, with a jump wherever the envelope comes to a sample \
             more or less. " span class="sign first" {} "marks the recommended tick. "
            @if !shown_asked { "Asked: " (words::about(allowed_ns)) ", above the top edge." }
        },
        data: Some(numbers(&rows)),
    };
    let body = html! {
        p {
            "A slower tick wakes the processor less and sees less. For each tick period: the shortest worst delay of \
             the candidates that hold, and what no logic whatever could beat with samples that far apart."
        }
        (figure.wide())
    };
    Some(Section { id: "ticks", heading: "Latency against tick period".to_owned(), body })
}

fn rows(study: &Study) -> Vec<Row<'_>> {
    let mut rows: Vec<Row<'_>> = study
        .ranking
        .clocks
        .iter()
        .enumerate()
        .map(|(index, view)| {
            let here = || study.ranking.candidates.iter().filter(move |candidate| candidate.clock == index);
            let best = here()
                .filter(|candidate| candidate.holds())
                .min_by_key(|candidate| candidate.worst_below_ns.map_or(u64::MAX, later));
            Row {
                tick: view.clock.period().into(),
                view,
                best,
                holding: here().filter(|candidate| candidate.holds()).count(),
                tried: here().count(),
            }
        })
        .collect();
    rows.sort_by_key(|row| row.tick);
    rows
}

fn sentence(row: &Row<'_>) -> String {
    let limit =
        row.limit_ns().map_or("limit unknown".to_owned(), |ns| format!("limit {}", words::at_most(ns)));
    match row.best_ns() {
        Some(ns) => format!("At {}: best {}, {limit}. ", row.tick, words::at_most(ns)),
        None => format!("At {}: none holds, {limit}. ", row.tick),
    }
}

fn numbers(rows: &[Row<'_>]) -> maud::Markup {
    let rows: Vec<Vec<Cell>> = rows
        .iter()
        .map(|row| {
            let reason = row.view.envelope.err().map_or_else(String::new, |error| error.to_string());
            let best = row.best.map_or(reason, |best| best.parameters.to_string());
            vec![
                Cell::number(row.tick.to_string()),
                Cell::number(row.tried.to_string()),
                Cell::number(row.holding.to_string()),
                Cell::number(row.best_ns().map_or("-".to_owned(), words::at_most)),
                Cell::number(row.limit_ns().map_or("-".to_owned(), words::at_most)),
                Cell::text(best),
            ]
        })
        .collect();
    let head = ["tick", "candidates", "hold", "best worst delay", "limit", "best candidate"];
    table("Every tick period", &head, &rows)
}
