//! The envelope in words and as a picture, so that all readers agree on what is claimed.

use debounce_core::{Change, Envelope};
use maud::{Markup, html};

use super::{Cell, Figure, Section, table};
use crate::envelope::PhysicalEnvelope;
use crate::report::plot::px;
use crate::report::words;

/// The envelope in time, and what the clock makes of it.
pub(super) fn section(
    physical: &PhysicalEnvelope,
    network: &[String],
    ticks: Option<(&Envelope, String)>,
) -> Section {
    let body = html! {
        p { "Everything that is proved holds for every contact that" }
        ul class="clauses" { @for line in words::envelope(physical) { li { (line) "." } } }
        p { "Nothing is claimed of a contact that does anything else." }
        @if !network.is_empty() {
            p { "The network between contact and pin" }
            ul class="clauses" { @for line in network { li { (line) "." } } }
        }
        div class="pair" {
            @for change in [Change::Make, Change::Break] { (picture(physical, change).markup()) }
        }
        @if let Some((envelope, tick)) = ticks { (in_ticks(envelope, &tick)) }
    };
    Section { id: "envelope", heading: "Envelope, in words".to_owned(), body }
}

/// An envelope in samples as a table to open.
fn in_ticks(envelope: &Envelope, tick: &str) -> Markup {
    html! {
        details {
            summary { "The same in samples, at a tick of " (tick) }
            (sample_table(envelope))
        }
    }
}

/// An envelope in samples, where nothing is known of the time.
pub(super) fn in_samples(envelope: &Envelope) -> Section {
    let body = html! {
        p { "For every row of samples in which" }
        (sample_table(envelope))
        p { "Nothing is claimed of a contact that does anything else." }
    };
    Section { id: "envelope", heading: "Envelope".to_owned(), body }
}

/// An envelope in samples.
pub(super) fn sample_table(envelope: &Envelope) -> Markup {
    let Envelope { dwell, bounce, glitch, quiet, calm, lost, .. } = envelope;
    let row = |name: &str, value: u32| vec![Cell::text(name), Cell::number(value.to_string())];
    let rows = vec![
        row("stays closed, at least", dwell.closed),
        row("stays open, at least", dwell.open),
        row("bounces after a make, at most", bounce.make),
        row("bounces after a break, at most", bounce.break_),
        row("disturbed while open, at most", glitch.open),
        row("disturbed while closed, at most", glitch.closed),
        row("quiet between disturbances, at least", *quiet),
        row("calm after a bounce, at least", *calm),
        row("ticks lost in a row, at most", *lost),
    ];
    table("The envelope in samples", &["clause", "samples"], &rows)
}

const LEVELS: (f64, f64) = (40.0, 100.0);

/// A dimension below the waveform: from, until, row, what it says.
struct Measure {
    from: f64,
    until: f64,
    row: f64,
    text: String,
}

impl Measure {
    fn y(&self) -> f64 {
        128.0 + 28.0 * self.row
    }
}

/// One change and the position after it, with the clauses about them as dimensions; not to scale.
fn picture(physical: &PhysicalEnvelope, change: Change) -> Figure {
    let position = change.to();
    let (bounce, glitch) = (physical.bounce_ns.at(change), physical.glitch_ns.at(position));
    let dwell = physical.dwell_ns.at(position);
    let (before, after) = if position.is_closed() { (LEVELS.1, LEVELS.0) } else { (LEVELS.0, LEVELS.1) };
    // Places along the picture: the change, the end of its bounce, two disturbances, the next change.
    let (at, settled, next) = (50.0, 150.0, 430.0);
    let wave = |edges: &[f64]| {
        let mut level = before;
        let mut path = format!("M0 {}", px(level));
        for edge in edges {
            level = if level == before { after } else { before };
            path.push_str(&format!("H{}V{}", px(*edge), px(level)));
        }
        path + "H470"
    };
    let bounces = [at, 66.0, 76.0, 98.0, 112.0, 138.0, settled];
    let disturbed = physical.has_disturbances() && glitch > 0;
    let strikes = [(196.0, 232.0), (336.0, 372.0)];
    let mut edges = if bounce > 0 { bounces.to_vec() } else { vec![at] };
    if disturbed {
        edges.extend(strikes.iter().flat_map(|&(from, until)| [from, until]));
    }
    edges.push(next);
    let word = words::position(position);
    let mut measures = Vec::new();
    let mut add = |from, until, row, text: String| measures.push(Measure { from, until, row, text });
    add(at, next, 0.0, format!("{word} for at least {}", words::at_least(dwell)));
    if bounce > 0 {
        add(at, settled, 1.0, format!("bounce: at most {}", words::at_most(bounce)));
    }
    if disturbed {
        add(strikes[0].0, strikes[0].1, 2.0, format!("disturbed: at most {}", words::at_most(glitch)));
        add(
            strikes[0].1,
            strikes[1].0,
            3.0,
            format!("quiet: at least {}", words::at_least(physical.quiet_ns)),
        );
    }
    let title = format!("After a {}", words::change(change));
    Figure {
        id: format!("envelope-{}", words::change(change)),
        description: format!(
            "Not to scale. {}.",
            measures.iter().map(|measure| measure.text.clone()).collect::<Vec<_>>().join("; ")
        ),
        title,
        view_box: format!("0 0 480 {}", if disturbed { 244 } else { 188 }),
        drawing: html! {
            @for (level, text) in [(LEVELS.0, "closed"), (LEVELS.1, "open")] {
                path class="rule" d={ "M0 " (px(level)) "H480" } {}
                text class="tick" x="0" y=(px(if level == LEVELS.0 { level - 8.0 } else { level + 18.0 })) { (text) }
            }
            @if bounce > 0 { rect class="bounce" x=(px(at)) y="34" width=(px(settled - at)) height="72" {} }
            @if disturbed {
                @for (from, until) in strikes {
                    rect class="disturbance" x=(px(from)) y="34" width=(px(until - from)) height="72" {}
                }
            }
            path class="wave contact" d=(wave(&edges)) {}
            // All lines before all letters, so that no line runs through any.
            @for measure in &measures { (dimension(measure)) }
            @for measure in &measures {
                text class="measured" x=(px(measure.from + 5.0)) y=(px(measure.y() + 17.0)) { (measure.text) }
            }
        },
        caption: html! { "Not to scale." },
        data: None,
    }
}

/// A dimension line with the two guides that lead to it.
fn dimension(measure: &Measure) -> Markup {
    let y = measure.y();
    html! {
        path class="guide" d={ "M" (px(measure.from)) " 106V" (px(y + 6.0)) "M" (px(measure.until)) " 106V" (px(y + 6.0)) } {}
        path class="measure" d={ "M" (px(measure.from)) " " (px(y)) "H" (px(measure.until)) } {}
    }
}
