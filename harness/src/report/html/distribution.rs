//! How long bounces last: histogram and distribution, with the claimed limit marked.

use debounce_core::Change;
use maud::{Markup, html};

use super::bounce::{Limit, marked, told};
use super::{Cell, Figure, Section, table};
use crate::characterise::quantile_type_7;
use crate::report::plot::{Axis, Plane, Scale, linear_ticks, px};
use crate::report::words;
use crate::study::Observed;

const PLANE: Plane =
    Plane { width: 480.0, height: 430.0, left: 46.0, right: 468.0, top: 86.0, bottom: 386.0 };
/// The histogram is drawn above, the distribution below.
const HISTOGRAM: (f64, f64) = (206.0, PLANE.top);
const DISTRIBUTION: (f64, f64) = (PLANE.bottom, 250.0);

/// The two figures; `None` where nothing was recorded whole.
pub(super) fn section(observed: &[Observed], limits: impl Fn(Change) -> Vec<Limit>) -> Option<Section> {
    let figures: Vec<Figure> = [Change::Make, Change::Break]
        .into_iter()
        .filter_map(|change| figure(observed, change, &limits(change)))
        .collect();
    if figures.is_empty() {
        return None;
    }
    let body = html! {
        div class="pair" { @for figure in &figures { (figure.markup()) } }
    };
    Some(Section { id: "bounce", heading: "How long it bounces".to_owned(), body })
}

fn figure(observed: &[Observed], change: Change, limits: &[Limit]) -> Option<Figure> {
    let mut all: Vec<u64> = observed
        .iter()
        .flat_map(|one| one.figures.changes.of(change).sorted_bounces_ns.iter().copied())
        .collect();
    all.sort_unstable();
    let longest = *all.last()?;
    let reach = limits.iter().map(|limit| limit.at_ns).chain([longest, 1_000]).max().unwrap_or(longest);
    let x = Scale::linear((0.0, reach as f64 * 1.05), PLANE.across());
    let bins = bins(&all, reach);
    let most = bins.iter().map(|bin| bin.count).max().unwrap_or(1);
    let counts = Scale::linear((0.0, most as f64), HISTOGRAM);
    let word = words::change(change);
    let drawing = html! {
        (PLANE.bottom_axis(&Axis::of_time("bounce, first edge to last", x, 6)))
        (counts_axis(&counts, most))
        @for bin in bins.iter().filter(|bin| bin.count > 0) {
            @let (left, right) = (x.at(bin.from as f64), x.within(bin.until as f64));
            @let top = counts.at(bin.count as f64);
            rect class={ "bar " (word) } x=(px(left + 0.5)) y=(px(top)) width=(px((right - left - 1.0).max(0.5)))
                height=(px(counts.at(0.0) - top)) {}
        }
        (distribution(&all, &x, word))
        (marked(limits, &x, &PLANE))
    };
    let [p50, p90, p95] = [500, 900, 950].map(|permille| quantile_type_7(&all, permille).unwrap_or(0));
    Some(Figure {
        id: format!("bounce-{word}"),
        title: format!("Bounce at {}", words::count(all.len(), word)),
        description: format!(
            "Histogram of the bounce at {} and, below, the share that bounces no longer than each time. Median {}, \
             95 % within {}, longest {}.{}",
            words::count(all.len(), word),
            words::about(p50),
            words::about(p95),
            words::about(longest),
            told(limits)
        ),
        view_box: PLANE.view_box(),
        drawing,
        caption: html! {
            "Median " (words::about(p50)) ", 90 % within " (words::about(p90)) ", 95 % within " (words::about(p95))
            ", longest " (words::about(longest)) ", as recorded."
        },
        data: Some(bin_table(&bins, word)),
    })
}

/// A stretch of the histogram: from `from` to just before `until`.
struct Bin {
    from: u64,
    until: u64,
    count: usize,
}

/// Bins of a round width, about twenty of them.
fn bins(sorted: &[u64], reach: u64) -> Vec<Bin> {
    const ABOUT: usize = 24;
    let (_, step) = linear_ticks(0.0, reach as f64, ABOUT);
    let width = (step.round() as u64).max(1);
    (0..=sorted.last().copied().unwrap_or(0) / width)
        .map(|index| {
            let (from, until) = (index * width, (index + 1) * width);
            let count = sorted.iter().filter(|&&ns| ns >= from && ns < until).count();
            Bin { from, until, count }
        })
        .collect()
}

fn counts_axis(counts: &Scale, most: usize) -> Markup {
    let (values, _) = linear_ticks(0.0, most as f64, 4);
    html! {
        text class="axis-title" x="4" y=(px(HISTOGRAM.1 - 12.0)) { "operations" }
        @for value in values.into_iter().filter(|value| value.fract() == 0.0) {
            path class="rule" d={ "M" (px(PLANE.left - 4.0)) " " (px(counts.at(value))) "H" (px(PLANE.right)) } {}
            text class="tick" x=(px(PLANE.left - 8.0)) y=(px(counts.at(value) + 4.5)) text-anchor="end" {
                (format!("{value:.0}"))
            }
        }
    }
}

/// The share of operations that bounce no longer, as a stair.
fn distribution(sorted: &[u64], x: &Scale, word: &str) -> Markup {
    let share = Scale::linear((0.0, 1.0), DISTRIBUTION);
    let mut path = format!("M{} {}", px(x.at(0.0)), px(share.at(0.0)));
    // Of very many operations not every step can be seen.
    let every = (sorted.len() / 400).max(1);
    for (index, &ns) in sorted.iter().enumerate() {
        if (index + 1).is_multiple_of(every) || index + 1 == sorted.len() {
            let y = px(share.at((index + 1) as f64 / sorted.len() as f64));
            path.push_str(&format!("H{}V{y}", px(x.at(ns as f64))));
        }
    }
    path.push_str(&format!("H{}", px(x.places().1)));
    html! {
        text class="axis-title" x="4" y=(px(DISTRIBUTION.1 - 12.0)) { "no longer, % of operations" }
        @for (value, text) in [(0.0, "0"), (0.5, "50"), (1.0, "100")] {
            path class="rule" d={ "M" (px(PLANE.left - 4.0)) " " (px(share.at(value))) "H" (px(PLANE.right)) } {}
            text class="tick" x=(px(PLANE.left - 8.0)) y=(px(share.at(value) + 4.5)) text-anchor="end" { (text) }
        }
        path class={ "curve " (word) } d=(path) {}
    }
}

fn bin_table(bins: &[Bin], word: &str) -> Markup {
    let rows: Vec<Vec<Cell>> = bins
        .iter()
        .filter(|bin| bin.count > 0)
        .map(|bin| {
            vec![
                Cell::number(words::about(bin.from)),
                Cell::number(words::about(bin.until)),
                Cell::number(bin.count.to_string()),
            ]
        })
        .collect();
    table(&format!("Bounce at a {word}"), &["from", "to just before", "operations"], &rows)
}
