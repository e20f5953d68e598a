//! Latency against immunity: what each candidate bears, and how late it is while it does.

mod points;

use maud::{Markup, html};

use self::points::{Point, Points};
use super::{Cell, Figure, Section, table};
use crate::report::plot::{Axis, Plane, Scale, px};
use crate::report::words;
use crate::study::Study;

const PLANE: Plane =
    Plane { width: 940.0, height: 500.0, left: 56.0, right: 926.0, top: 34.0, bottom: 450.0 };

/// Rows of the table of numbers.
const MOST_ROWS: usize = 40;

/// The plane; `None` where no candidate has a place in it.
pub(super) fn section(study: &Study) -> Option<Section> {
    let points = Points::of(study);
    let widest = points.all.iter().map(|point| point.bears_ns).max()?;
    let asked = &study.resolved.required;
    let allowed_ns = asked.latency.make.value.ns().min(asked.latency.break_.value.ns());
    let needed_ns = study.physical.glitch_ns.open.max(study.physical.glitch_ns.closed);
    let x = Scale::linear((0.0, widest.max(needed_ns) as f64 * 1.06), PLANE.across());
    let latest = points.all.iter().map(|point| point.below_ns).max().unwrap_or(1);
    // Far above what is asked there is nothing to choose from.
    let highest = latest.min(allowed_ns.saturating_mul(2)).max(allowed_ns.min(latest * 2));
    let y = Scale::linear((0.0, highest as f64 * 1.05), PLANE.up());
    let drawing = html! {
        (PLANE.axes(&Axis::of_time("widest disturbance borne", x, 9), &Axis::of_time("worst delay", y, 7)))
        (requirement(&x, &y, needed_ns, allowed_ns))
        (curves(&points, &x, &y))
        @for point in points.all.iter().filter(|point| point.below_ns <= highest) { (dot(point, &x, &y)) }
    };
    let above = points.all.iter().filter(|point| point.below_ns > highest).count();
    let figure = Figure {
        id: "plane-picture".to_owned(),
        title: "Worst delay against the widest disturbance borne".to_owned(),
        description: description(study, &points, needed_ns, allowed_ns),
        view_box: PLANE.view_box(),
        drawing,
        caption: caption(&points, above),
        data: Some(numbers(&points)),
    };
    let body = html! {
        p {
            "A logic that bears wider disturbances must look longer before it believes a change. Each mark is one \
             candidate: to the right how wide a disturbance it bears, upward how late it can be while it does. \
             Nothing can lie below the curve."
        }
        (figure.wide())
    };
    Some(Section { id: "plane", heading: "Latency against immunity".to_owned(), body })
}

/// The corner that is asked for.
fn requirement(x: &Scale, y: &Scale, needed_ns: u64, allowed_ns: u64) -> Markup {
    let (left, top) = (x.within(needed_ns as f64), y.within(allowed_ns as f64));
    let (right, bottom) = (x.places().1, y.places().0);
    html! {
        rect class="asked-for" x=(px(left)) y=(px(top)) width=(px(right - left)) height=(px(bottom - top)) {}
        path class="limit asked" d={ "M" (px(left)) " " (px(bottom)) "V" (px(top)) "H" (px(right)) } {}
        text class="limit-name asked" x=(px(right - 4.0)) y=(px(top - 6.0)) text-anchor="end" {
            "asked: bears " (words::at_most(needed_ns)) ", reports within " (words::about(allowed_ns))
        }
    }
}

fn curves(points: &Points, x: &Scale, y: &Scale) -> Markup {
    let line = |places: &[(u64, u64)]| {
        let (_, highest) = y.values();
        let inside = places.iter().filter(|(_, below)| *below as f64 <= highest);
        let text = inside
            .map(|&(bears, below)| format!("{} {}", px(x.within(bears as f64)), px(y.at(below as f64))));
        text.collect::<Vec<_>>().join("L")
    };
    let at_tick = line(&points.limit_at_tick);
    html! {
        path class="bound any" d={ "M" (line(&points.limit)) } {}
        @if points.limit_at_tick.len() > 1 { path class="bound here" d={ "M" (at_tick) } {} }
        @if points.front.len() > 1 { path class="front" d=(stair(&points.front, x, y)) {} }
    }
}

/// The front as a stair: to bear a little more than one of its marks takes the next one.
fn stair(front: &[(u64, u64)], x: &Scale, y: &Scale) -> String {
    let (_, highest) = y.values();
    let mut path = String::new();
    for &(bears, below) in front.iter().filter(|(_, below)| *below as f64 <= highest) {
        let (across, up) = (px(x.at(bears as f64)), px(y.at(below as f64)));
        path.push_str(&if path.is_empty() { format!("M{across} {up}") } else { format!("V{up}H{across}") });
    }
    path
}

fn dot(point: &Point, x: &Scale, y: &Scale) -> Markup {
    let (cx, cy) = (x.at(point.bears_ns as f64), y.at(point.below_ns as f64));
    let radius = if point.holds && !point.at_first_tick { "2.4" } else { "4" };
    let class = match (point.recommended, point.holds) {
        (true, _) => "mark first",
        (_, true) => "mark holds",
        (_, false) => "mark fails",
    };
    html! {
        @if point.recommended {
            path class=(class) d={ "M" (px(cx)) " " (px(cy - 9.0)) "l9 9l-9 9l-9 -9z" } {}
        } @else {
            circle class=(class) cx=(px(cx)) cy=(px(cy)) r=(radius) {}
        }
    }
}

fn caption(points: &Points, above: usize) -> Markup {
    html! {
        ul class="key" {
            li { span class="sign first" {} "the recommended candidate" }
            li { span class="sign holds" {} "holds, at the recommended tick (small: at another)" }
            li { span class="sign fails" {} "does not hold" }
            li { span class="sign front" {} "joins those that none beats in both" }
            li { span class="sign any" {} "what no logic can beat, at any tick" }
            @if points.limit_at_tick.len() > 1 { li { span class="sign here" {} "what no logic can beat at the recommended tick" } }
        }
        p {
            "Disturbances of the same width in both positions; the later of make and break. A candidate may also hold \
             what is asked from above the shaded corner: against narrower disturbances it is quicker. "
            @if points.left_out > 0 {
                (words::count(points.left_out, "candidate")) " at other ticks have no closed form, and no place here. "
            }
            @if above > 0 { (words::count(above, "mark")) " lie above the top edge." }
        }
    }
}

fn description(study: &Study, points: &Points, needed_ns: u64, allowed_ns: u64) -> String {
    let first = points.all.iter().find(|point| point.recommended);
    let first = first.map_or(String::new(), |point| {
        format!(
            " The recommended one bears {} with a worst delay below {}.",
            words::at_least(point.bears_ns),
            words::at_most(point.below_ns)
        )
    });
    format!(
        "{} of {} candidates, by the widest disturbance they bear and their worst delay. Asked: to bear {} and to \
         report within {}.{first}",
        points.all.iter().map(|point| point.candidates).sum::<usize>(),
        study.ranking.candidates.len(),
        words::at_most(needed_ns),
        words::about(allowed_ns)
    )
}

/// The marks on the front, with their candidates.
fn numbers(points: &Points) -> Markup {
    let rows: Vec<Vec<Cell>> = points
        .all
        .iter()
        .filter(|point| point.on_front || point.recommended)
        .take(MOST_ROWS)
        .map(|point| {
            vec![
                Cell::text(&point.name),
                Cell::number(words::at_least(point.bears_ns)),
                Cell::number(words::at_most(point.below_ns)),
                Cell::text(if point.holds { "holds" } else { "does not hold" }),
                Cell::number(point.candidates.to_string()),
            ]
        })
        .collect();
    let head = ["law and tick", "bears", "worst delay below", "what is asked", "candidates here"];
    table("Candidates that none beats in both", &head, &rows)
}
