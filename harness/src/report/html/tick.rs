//! Latency against tick period: what the best candidate of each clock gives, and what no logic could beat there.

use debounce_core::PerChange;
use maud::html;

use super::{Cell, Figure, Section, table};
use crate::choose::{Candidate, ClockView};
use crate::quantity::TickPeriod;
use crate::report::plot::{Axis, Plane, Scale, kept_apart, px};
use crate::report::words;
use crate::study::Study;

const PLANE: Plane =
    Plane { width: 940.0, height: 400.0, left: 56.0, right: 780.0, top: 34.0, bottom: 350.0 };

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

/// One figure of a row.
type Value = fn(&Row<'_>) -> Option<u64>;
const BEST: Value = |row| row.best_ns();
const LIMIT: Value = |row| row.limit_ns();

fn later(pair: PerChange<u64>) -> u64 {
    pair.make.max(pair.break_)
}

/// The figure; `None` where there are fewer than two tick periods to compare.
pub(super) fn section(study: &Study) -> Option<Section> {
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
    // What is asked is drawn unless it would leave all else in a corner.
    let shown_asked = allowed_ns <= highest.saturating_mul(3);
    let highest = if shown_asked { highest.max(allowed_ns) } else { highest };
    let x = Scale::logarithmic((first * 0.85, last * 1.18), PLANE.across());
    let y = Scale::linear((0.0, highest as f64 * 1.06), PLANE.up());
    let line = |value: Value| {
        let places = rows.iter().filter_map(|row| Some((x.at(row.ns()), y.at(value(row)? as f64))));
        places.map(|(x, y)| format!("{} {}", px(x), px(y))).collect::<Vec<_>>()
    };
    let (best, limit) = (line(BEST), line(LIMIT));
    let end = |value: Value| rows.iter().rev().find_map(value);
    let mut names = vec![("no tick beats this", "any", physical_ns)];
    names.extend(end(BEST).map(|ns| ("best that holds", "best", ns)));
    names.extend(end(LIMIT).map(|ns| ("limit at the tick", "here", ns)));
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
        @if !limit.is_empty() { path class="bound here" d={ "M" (limit.join("L")) } {} }
        @if !best.is_empty() { path class="front" d={ "M" (best.join("L")) } {} }
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
            "The later of make and break. " span class="sign first" {} "marks the recommended tick. "
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
