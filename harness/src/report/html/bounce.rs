//! All makes laid over each other, and all breaks, aligned at the first edge.

use debounce_core::{Change, Position};
use maud::html;

use super::{Figure, Section};
use crate::characterise::Operation;
use crate::report::plot::{Axis, Plane, Scale, px, rows_apart, text_width};
use crate::report::words;
use crate::study::Observed;

/// A limit to be marked: what it is, and where.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Limit {
    pub(super) name: &'static str,
    pub(super) at_ns: u64,
    pub(super) class: &'static str,
}

/// Operations that get a row of their own; of more, evenly spaced ones do.
const MOST_ROWS: usize = 120;

/// Columns in which the share of closed lines is counted.
const COLUMNS: usize = 320;

const PLANE: Plane =
    Plane { width: 480.0, height: 420.0, left: 46.0, right: 468.0, top: 76.0, bottom: 376.0 };
/// The share of closed lines is drawn above, the rows below.
const SHARE: (f64, f64) = (176.0, PLANE.top);
const ROWS: (f64, f64) = (196.0, PLANE.bottom);

/// The two figures; `None` where nothing was recorded whole.
pub(super) fn section(observed: &[Observed], limits: impl Fn(Change) -> Vec<Limit>) -> Option<Section> {
    let figures: Vec<_> = [Change::Make, Change::Break]
        .into_iter()
        .filter_map(|change| figure(observed, change, &limits(change)))
        .collect();
    if figures.is_empty() {
        return None;
    }
    let body = html! {
        p {
            "Every operation that was recorded whole, laid over the others with its first edge at 0. The curve says in \
             what share of them the line reads closed that long after; below, each row is one operation, in the order \
             of recording, dark while the line is closed."
        }
        div class="pair" { @for figure in &figures { (figure.markup()) } }
    };
    Some(Section { id: "overlay", heading: "All operations, laid over each other".to_owned(), body })
}

/// The line around one operation: its edges in nanoseconds from the first, and where it stood before.
struct Aligned {
    before: Position,
    edges: Vec<f64>,
}

impl Aligned {
    fn of(one: &Observed, operation: &Operation, until_ns: u64) -> Self {
        let first_ns = operation.burst.first_ns;
        let edges = one.recording.trace.edges();
        let first = edges.partition_point(|&at| at < first_ns);
        let inside = edges[first..].iter().take_while(|&&at| at - first_ns <= until_ns);
        Self {
            before: operation.change.to().opposite(),
            edges: inside.map(|&at| (at - first_ns) as f64).collect(),
        }
    }

    fn closed_at(&self, at: f64) -> bool {
        let passed = self.edges.iter().take_while(|&&edge| edge <= at).count();
        let position = if passed.is_multiple_of(2) { self.before } else { self.before.opposite() };
        position.is_closed()
    }

    /// The stretches in which the line is closed.
    fn closed_spans(&self, from: f64, until: f64) -> Vec<(f64, f64)> {
        let mut spans = Vec::new();
        let (mut since, mut position) = (from, self.before);
        for &edge in self.edges.iter().chain(core::iter::once(&until)) {
            if position.is_closed() {
                spans.push((since, edge));
            }
            (since, position) = (edge, position.opposite());
        }
        spans
    }
}

fn figure(observed: &[Observed], change: Change, limits: &[Limit]) -> Option<Figure> {
    let all = || {
        observed.iter().flat_map(|one| {
            let of_kind = one.segmentation.operations.iter().filter(move |o| o.change == change);
            of_kind.map(move |operation| (one, operation))
        })
    };
    let longest = all().map(|(_, operation)| operation.bounce_ns()).max()?;
    let reach = limits.iter().map(|limit| limit.at_ns).chain([longest]).max().unwrap_or(longest).max(1_000);
    let (from, until) = (-(reach as f64) * 0.08, reach as f64 * 1.12);
    let aligned: Vec<Aligned> =
        all().map(|(one, operation)| Aligned::of(one, operation, until as u64)).collect();
    let x = Scale::linear((from, until), PLANE.across());
    let axis = Axis::of_time("time after the first edge", x, 6);
    let share = Scale::linear((0.0, 1.0), SHARE);
    let drawn: Vec<&Aligned> = thinned(&aligned, MOST_ROWS);
    let row = (ROWS.1 - ROWS.0) / drawn.len() as f64;
    let rows: String = drawn
        .iter()
        .enumerate()
        .flat_map(|(index, one)| {
            let top = ROWS.0 + index as f64 * row;
            one.closed_spans(from, until).into_iter().map(move |(since, at)| (top, since, at))
        })
        .map(|(top, since, at)| {
            let (left, right) = (x.within(since), x.within(at));
            format!("M{} {}H{}v{}H{}z", px(left), px(top), px(right.max(left + 0.2)), px(row), px(left))
        })
        .collect();
    let word = words::change(change);
    let count = aligned.len();
    let drawing = html! {
        (PLANE.bottom_axis(&axis))
        (share_axis(&share))
        path class={ "curve " (word) } d=(share_curve(&aligned, &x, &share)) {}
        path class={ "rows " (word) } d=(rows) {}
        (marked(limits, &x, &PLANE))
    };
    Some(Figure {
        id: format!("overlay-{word}"),
        title: format!("{} from the first edge", words::count(count, word)),
        description: format!(
            "{} aligned at their first edge. The longest bounce lasts {}.{}",
            words::count(count, word),
            words::about(longest),
            told(limits)
        ),
        view_box: PLANE.view_box(),
        drawing,
        caption: html! {
            @if drawn.len() < count { "Rows for " (drawn.len()) " of them, evenly spaced; the curve counts all." }
        },
        data: None,
    })
}

/// The limits in words, for those who do not see them marked.
pub(super) fn told(limits: &[Limit]) -> String {
    limits.iter().map(|limit| format!(" {}: {}.", limit.name, words::at_most(limit.at_ns))).collect()
}

/// Evenly spaced ones, at most so many.
fn thinned<T>(all: &[T], most: usize) -> Vec<&T> {
    if all.len() <= most {
        return all.iter().collect();
    }
    (0..most).map(|index| &all[index * all.len() / most]).collect()
}

fn share_axis(share: &Scale) -> maud::Markup {
    html! {
        text class="axis-title" x="4" y=(px(SHARE.1 - 12.0)) { "line closed, %" }
        @for (value, text) in [(0.0, "0"), (0.5, "50"), (1.0, "100")] {
            path class="rule" d={ "M" (px(PLANE.left - 4.0)) " " (px(share.at(value))) "H" (px(PLANE.right)) } {}
            text class="tick" x=(px(PLANE.left - 8.0)) y=(px(share.at(value) + 4.5)) text-anchor="end" { (text) }
        }
    }
}

/// The share of operations whose line is closed, in so many columns.
fn share_curve(aligned: &[Aligned], x: &Scale, share: &Scale) -> String {
    let (from, until) = x.values();
    let mut path = String::new();
    let mut before = None;
    for column in 0..=COLUMNS {
        let at = from + (until - from) * column as f64 / COLUMNS as f64;
        let closed = aligned.iter().filter(|one| one.closed_at(at)).count();
        if before == Some(closed) && column < COLUMNS {
            continue;
        }
        let y = px(share.at(closed as f64 / aligned.len() as f64));
        let letter = if before.is_none() {
            format!("M{} {y}", px(x.at(at)))
        } else {
            format!("H{}V{y}", px(x.at(at)))
        };
        path.push_str(&letter);
        before = Some(closed);
    }
    path
}

/// Upright lines with their names above, no two of which touch.
pub(super) fn marked(limits: &[Limit], x: &Scale, plane: &Plane) -> maud::Markup {
    let places: Vec<(f64, f64)> = limits
        .iter()
        .map(|limit| {
            let width = text_width(&text(limit), 12.5);
            let right = (x.at(limit.at_ns as f64) + 4.0).clamp(plane.left + width, plane.right);
            (right - width, right)
        })
        .collect();
    // From the right on, so that a line never runs through the name of one farther right.
    let mirrored: Vec<(f64, f64)> = places.iter().map(|(left, right)| (-right, -left)).collect();
    let rows = rows_apart(&mirrored, 8.0);
    html! {
        @for ((limit, (_, right)), row) in limits.iter().zip(&places).zip(&rows) {
            @let at = px(x.at(limit.at_ns as f64));
            @let y = 16.0 + 17.0 * *row as f64;
            path class={ "limit " (limit.class) } d={ "M" (at) " " (px(y + 5.0)) "V" (px(plane.bottom)) } {}
            text class={ "limit-name " (limit.class) } x=(px(*right)) y=(px(y)) text-anchor="end" { (text(limit)) }
        }
    }
}

fn text(limit: &Limit) -> String {
    format!("{} {}", limit.name, words::at_most(limit.at_ns))
}
