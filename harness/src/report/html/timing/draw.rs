//! One stretch of a recording, drawn.
//!
//! The script draws the same with the same places, which it gets from [`Lanes::json`].

use debounce_core::Position;
use maud::{Markup, html};
use serde_json::{Value, json};

use super::axis::axis;
use super::waves::Waves;
use super::{LogicRun, Moment, Shown};
use crate::report::plot::{Scale, px, text_width};
use crate::report::words;

/// Where each lane lies, from top to bottom.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Lanes {
    contact: (f64, f64),
    /// Samples, states, output; there is none without a logic.
    logic: Option<[(f64, f64); 3]>,
    axis: f64,
}

const MARGIN: f64 = 4.0;

impl Lanes {
    pub(super) fn of(shown: &Shown<'_>) -> Self {
        if shown.runs.is_empty() {
            return Self { contact: (28.0, 64.0), logic: None, axis: 80.0 };
        }
        let logic = [(110.0, 134.0), (160.0, 182.0), (208.0, 240.0)];
        Self { contact: (48.0, 84.0), logic: Some(logic), axis: 256.0 }
    }

    pub(super) fn json(&self) -> Value {
        json!({ "contact": self.contact, "logic": self.logic, "axis": self.axis, "margin": MARGIN })
    }
}

/// The height of a diagram.
pub(super) fn height(shown: &Shown<'_>) -> f64 {
    Lanes::of(shown).axis + 46.0
}

/// Everything inside one diagram.
pub(super) fn drawing(shown: &Shown<'_>, _: &Waves<'_>, moment: &Moment, width: f64) -> Markup {
    let lanes = Lanes::of(shown);
    let start = shown.one.recording.trace.start_ns();
    let window = ((moment.window.0 - start) as f64, (moment.window.1 - start) as f64);
    let x = Scale::linear(window, (MARGIN, width - MARGIN));
    let zero = (moment.zero_ns.max(start) - start) as f64;
    let run = shown.runs.get(moment.run);
    html! {
        (axis(&x, zero, lanes.contact.0, lanes.axis))
        (contact(shown, &x, lanes.contact))
        @if let (Some(run), Some([samples, states, output])) = (run, lanes.logic) {
            (self::samples(shown, run, &x, samples))
            (self::states(run, &x, states))
            (self::output(shown, run, &x, output))
            (latencies(shown, run, &x, output.1))
        }
    }
}

fn name(text: &str, top: f64) -> Markup {
    html! { text class="lane" x=(px(MARGIN)) y=(px(top - 7.0)) { (text) } }
}

/// The line between two levels that turns over at each of `edges`, for the values of `x`.
fn wave(x: &Scale, (top, bottom): (f64, f64), starts: Position, edges: impl Iterator<Item = f64>) -> String {
    let (left, right) = x.places();
    let level = |position: Position| px(if position.is_closed() { top } else { bottom });
    let mut at = starts;
    let mut path = format!("M{} {}", px(left), level(at));
    for edge in edges {
        at = at.opposite();
        path.push_str(&format!("H{}V{}", px(x.at(edge)), level(at)));
    }
    path.push_str(&format!("H{}", px(right)));
    path
}

fn contact(shown: &Shown<'_>, x: &Scale, lane: (f64, f64)) -> Markup {
    let trace = &shown.one.recording.trace;
    let start = trace.start_ns();
    let (from, until) = x.values();
    let inside = |at: u64| (at - start) as f64 > from && ((at - start) as f64) < until;
    let first = trace.edges().partition_point(|&at| (at - start) as f64 <= from);
    let edges = trace.edges()[first..].iter().take_while(|&&at| inside(at));
    let path = wave(x, lane, trace.position_after(first), edges.map(|&at| (at - start) as f64));
    let segmentation = &shown.one.segmentation;
    let bounces = segmentation.operations.iter().map(|operation| (operation.burst, "bounce"));
    let disturbances = segmentation.disturbances.iter().map(|disturbance| (disturbance.burst, "disturbance"));
    html! {
        @for (burst, class) in bounces.chain(disturbances) {
            @let (first, last) = ((burst.first_ns - start) as f64, (burst.last_ns - start) as f64);
            @if last > from && first < until && last > first {
                @let (left, right) = (x.within(first), x.within(last));
                rect class=(class) x=(px(left)) y=(px(lane.0 - 3.0)) width=(px((right - left).max(1.0)))
                    height=(px(lane.1 - lane.0 + 6.0)) {}
            }
        }
        (name("contact", lane.0))
        path class="wave contact" d=(path) {}
    }
}

/// Strokes nearer to each other than this are not told apart.
const NEAREST_STROKES: f64 = 5.0;

fn samples(shown: &Shown<'_>, run: &LogicRun, x: &Scale, (top, bottom): (f64, f64)) -> Markup {
    let initial = shown.one.recording.trace.initial();
    let (from, until) = x.values();
    let first = run.first_tick(from);
    let apart = x.at(run.tick_ns(1)) - x.at(run.tick_ns(0));
    let ticks = (first..).take_while(|&tick| run.tick_ns(tick) <= until);
    html! {
        (name("samples", top))
        @if apart < NEAREST_STROKES {
            @let edges = run.sampled.iter().map(|&tick| run.tick_ns(tick)).filter(|&at| at > from && at < until);
            path class="wave samples" d=(wave(x, (top, bottom), run.reads(first.saturating_sub(1), initial), edges)) {}
        } @else {
            @for tick in ticks {
                @let at = px(x.at(run.tick_ns(tick)));
                @let closed = run.reads(tick, initial).is_closed();
                path class="stroke" d={ "M" (at) " " (px(top)) "V" (px(bottom)) } {}
                circle class=(if closed { "dot closed" } else { "dot open" }) cx=(at)
                    cy=(px(if closed { top } else { bottom })) r="3.5" {}
            }
        }
    }
}

fn states(run: &LogicRun, x: &Scale, (top, bottom): (f64, f64)) -> Markup {
    let (from, until) = x.values();
    let changed = run.states.partition_point(|&(tick, _)| run.tick_ns(tick) <= from);
    let mut spans = Vec::new();
    let mut state = if changed == 0 { run.first } else { run.states[changed - 1].1 };
    let mut left = from;
    for &(tick, next) in &run.states[changed..] {
        let at = run.tick_ns(tick);
        if at >= until {
            break;
        }
        spans.push((left, at, state));
        (left, state) = (at, next);
    }
    spans.push((left, until, state));
    html! {
        (name("state", top))
        @for (from, until, state) in spans {
            @let (left, right) = (x.within(from), x.within(until));
            @let text = &run.names[state as usize];
            rect class=(if run.closed[state as usize] { "box closed" } else { "box open" }) x=(px(left)) y=(px(top))
                width=(px((right - left).max(0.5))) height=(px(bottom - top)) {}
            @if right - left > text_width(text, 12.0) + 6.0 {
                text class="in-box" x=(px((left + right) / 2.0)) y=(px(bottom - 6.5)) text-anchor="middle" { (text) }
            }
        }
    }
}

fn output(shown: &Shown<'_>, run: &LogicRun, x: &Scale, lane: (f64, f64)) -> Markup {
    let initial = shown.one.recording.trace.initial();
    let (from, until) = x.values();
    let all = || run.output.iter().map(|&tick| run.tick_ns(tick));
    let before = all().filter(|&at| at <= from).count();
    let starts = if before.is_multiple_of(2) { initial } else { initial.opposite() };
    html! {
        (name("output", lane.0))
        path class="wave output" d=(wave(x, lane, starts, all().filter(|&at| at > from && at < until))) {}
    }
}

/// From each change to its report.
fn latencies(shown: &Shown<'_>, run: &LogicRun, x: &Scale, bottom: f64) -> Markup {
    let start = shown.one.recording.trace.start_ns();
    let (from, until) = x.values();
    let seen = run.reports.iter().filter_map(|&(change, tick)| {
        let truth = shown.one.truth[change];
        let (at, reported) = ((truth.at_ns - start) as f64, run.tick_ns(tick));
        (at >= from && reported <= until).then_some((truth.change, at, reported))
    });
    html! {
        @for (change, at, reported) in seen {
            @let (left, right) = (x.at(at), x.at(reported));
            @let text = words::at_most((reported - at).ceil() as u64);
            g class={ "latency " (words::change(change)) } {
                path class="guide" d={ "M" (px(left)) " 10V" (px(bottom)) "M" (px(right)) " 10V" (px(bottom)) } {}
                path class="measure" d={ "M" (px(left)) " 16H" (px(right)) } {}
                @if right - left > text_width(&text, 13.0) + 14.0 {
                    text class="measured" x=(px((left + right) / 2.0)) y="20.5" text-anchor="middle" { (text) }
                }
            }
        }
    }
}
