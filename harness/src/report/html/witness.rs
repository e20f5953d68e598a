//! A waveform in samples as a diagram: counter-examples, and the slowest waveforms of a proof.

use debounce_core::{Change, Clause, Position};
use maud::{Markup, html};

use super::{Figure, Section};
use crate::prove::{Outcome, Proof, Recovery, Witness, WitnessTick};
use crate::report::plot::px;
use crate::report::words;

/// Ticks in one row of a diagram.
const ROW: usize = 44;
/// The width of a tick.
const TICK: f64 = 20.0;
/// Room for the names of the lanes.
const NAMES: f64 = 76.0;
/// How much of the rest before the first tick is shown.
const LEAD: f64 = 12.0;
/// The height of a row.
const HEIGHT: f64 = 176.0;
/// Ticks in a row in which nothing changes, of which no more than this are drawn.
const STEADY: usize = 10;

/// Ticks of a diagram that needs half the page.
const NARROW: usize = 20;

/// One column of a diagram.
#[derive(Clone, Copy, PartialEq, Debug)]
enum Column {
    /// A tick, by its index.
    Tick(usize),
    /// So many ticks that are all like the one before.
    Alike(usize),
}

/// The proof in pictures: the slowest waveforms, or the one that refutes.
pub(super) fn of_proof(proof: &Proof) -> Section {
    let (heading, body) = match &proof.outcome {
        Outcome::Faithful { bounds, slowest } => {
            let figures = [Change::Make, Change::Break].into_iter().filter_map(|change| {
                let witness = slowest.of(change).as_ref()?;
                let samples = bounds.latency.at(change).worst as usize;
                let title = format!(
                    "The slowest {}: reported after {}",
                    words::change(change),
                    words::count(samples, "sample")
                );
                Some(witness_figure(&format!("slowest-{}", words::change(change)), &title, witness))
            });
            let figures: Vec<Figure> = figures.collect();
            let intro = html! {
                p {
                    "Of all waveforms inside the envelope these make the logic slowest, so the bounds cannot be \
                     improved for it. " (LETTERS)
                }
                div class="pair" { @for figure in &figures { (placed(figure)) } }
            };
            ("The worst that can happen", intro)
        }
        Outcome::Refuted { clause, witness } => {
            let body = html! {
                p { (LETTERS) " No shorter waveform inside the envelope breaks the promise." }
                (refuted(*clause, witness, "counter-example"))
            };
            ("Counter-example", body)
        }
    };
    Section { id: "waveforms", heading: heading.to_owned(), body }
}

/// A broken promise with the waveform that breaks it.
pub(super) fn refuted(clause: Clause, witness: &Witness, id: &str) -> Markup {
    self::witness(id, &format!("A shortest waveform in which {}", words::clause(clause)), witness)
}

/// How to read such a diagram.
pub(super) const LETTERS: &str =
    "A sample that reads other than the contact stands in a bounce (b) or in a disturbance (d).";

/// What happens after operations that are too short, where that is no happy end.
pub(super) fn recovery(recovery: &Recovery, id: &str, title: &str) -> Option<Markup> {
    match recovery {
        Recovery::Within(_) => None,
        Recovery::Never(shown) => Some(witness(id, title, shown)),
    }
}

/// A waveform as a figure.
#[must_use]
pub fn witness(id: &str, title: &str, witness: &Witness) -> Markup {
    html! { div class="pair" { (placed(&witness_figure(id, title, witness))) } }
}

/// A short waveform takes half the page, a long one all of it.
fn placed(figure: &Figure) -> Markup {
    if figure.view_box.starts_with("0 0 480 ") { figure.markup() } else { figure.wide() }
}

fn witness_figure(id: &str, title: &str, witness: &Witness) -> Figure {
    let columns = columns(witness);
    let rows: Vec<&[Column]> = columns.chunks(ROW).collect();
    let room = if columns.len() <= NARROW { 480.0 } else { 940.0_f64 };
    let width = room.max(NAMES + TICK * columns.len().min(ROW) as f64 + 6.0);
    let height = HEIGHT * rows.len() as f64;
    Figure {
        id: id.to_owned(),
        title: title.to_owned(),
        description: description(witness),
        view_box: format!("0 0 {} {}", px(width), px(height)),
        drawing: html! {
            @for (index, row) in rows.iter().enumerate() { (drawn(witness, row, HEIGHT * index as f64)) }
        },
        caption: html! {
            (words::count(witness.ticks.len(), "tick"))
            @if let Some(from) = witness.loop_from {
                "; ticks " (from + 1) " to " (witness.ticks.len()) " repeat for ever"
            }
            "."
        },
        data: Some(html! { pre { (crate::report::timing::TimingDiagram(witness)) } }),
    }
}

/// The ticks, long steady stretches shortened.
fn columns(witness: &Witness) -> Vec<Column> {
    let ticks = &witness.ticks;
    let mut columns = Vec::new();
    let mut index = 0;
    while index < ticks.len() {
        let alike = ticks[index..].iter().take_while(|tick| **tick == ticks[index]).count();
        if alike > STEADY {
            let kept = STEADY / 2;
            columns.extend((index..index + kept).map(Column::Tick));
            columns.push(Column::Alike(alike - 2 * kept));
            columns.extend((index + alike - kept..index + alike).map(Column::Tick));
        } else {
            columns.extend((index..index + alike).map(Column::Tick));
        }
        index += alike;
    }
    columns
}

const CONTACT: (f64, f64) = (34.0, 58.0);
const SAMPLES: (f64, f64) = (76.0, 100.0);
const OUTPUT: (f64, f64) = (140.0, 164.0);
const CAUSE: f64 = 122.0;

fn drawn(witness: &Witness, columns: &[Column], top: f64) -> Markup {
    html! {
        g transform={ "translate(0 " (px(top)) ")" } {
            @for (name, y) in [("contact", 50.0), ("samples", 92.0), ("because", CAUSE), ("output", 156.0)] {
                text class="lane" x="0" y=(px(y)) { (name) }
            }
            @for (place, column) in columns.iter().enumerate() {
                @let left = NAMES + TICK * place as f64;
                @match *column {
                    Column::Tick(index) => (tick(&witness.ticks[index], index, left, place == 0)),
                    Column::Alike(count) => (alike(count, left)),
                }
            }
            path class="wave contact" d=(lane(witness, columns, CONTACT, |tick| tick.contact)) {}
            path class="wave output" d=(lane(witness, columns, OUTPUT, |tick| tick.output)) {}
        }
    }
}

fn tick(tick: &WitnessTick, index: usize, left: f64, first: bool) -> Markup {
    let middle = px(left + TICK / 2.0);
    let cause = match tick {
        tick if tick.sample == tick.contact => None,
        WitnessTick { disturbed: true, .. } => Some(("d", "disturbance")),
        WitnessTick { bouncing: true, .. } => Some(("b", "bounce")),
        _ => Some(("?", "unknown")),
    };
    let closed = tick.sample.is_closed();
    html! {
        @if first || (index + 1).is_multiple_of(5) {
            text class="tick" x=(middle) y="16" text-anchor="middle" { (index + 1) }
        }
        @if let Some((letter, class)) = cause {
            rect class=(class) x=(px(left + 1.0)) y="70" width=(px(TICK - 2.0)) height="58" {}
            text class={ "cause " (class) } x=(middle) y=(px(CAUSE)) text-anchor="middle" { (letter) }
        }
        path class="stroke" d={ "M" (middle) " " (px(SAMPLES.0)) "V" (px(SAMPLES.1)) } {}
        circle class=(if closed { "dot closed" } else { "dot open" }) cx=(middle)
            cy=(px(if closed { SAMPLES.0 } else { SAMPLES.1 })) r="3.5" {}
    }
}

fn alike(count: usize, left: f64) -> Markup {
    html! {
        rect class="gap" x=(px(left + 2.0)) y="24" width=(px(TICK - 4.0)) height="146" {}
        text class="gap-count" transform={ "translate(" (px(left + TICK / 2.0 + 4.5)) " 97) rotate(-90)" }
            text-anchor="middle" { (count) " more" }
    }
}

fn lane(
    witness: &Witness,
    columns: &[Column],
    (top, bottom): (f64, f64),
    of: impl Fn(&WitnessTick) -> Position,
) -> String {
    let level = |position: Position| px(if position.is_closed() { top } else { bottom });
    let mut path = String::new();
    for (place, column) in columns.iter().enumerate() {
        let left = NAMES + TICK * place as f64;
        // A stretch that is left out is like the tick before it, and the path just goes on.
        let Column::Tick(index) = *column else { continue };
        let before = if index == 0 { witness.start } else { of(&witness.ticks[index - 1]) };
        if path.is_empty() {
            path = format!("M{} {}", px(left - LEAD), level(before));
        }
        path.push_str(&format!("H{}V{}", px(left), level(of(&witness.ticks[index]))));
    }
    path + &format!("H{}", px(NAMES + TICK * columns.len() as f64))
}

/// The waveform in words: each change of contact and output, and each sample that reads something else.
fn description(witness: &Witness) -> String {
    let mut parts = vec![format!("Settled {}", words::position(witness.start))];
    let mut before = WitnessTick {
        contact: witness.start,
        sample: witness.start,
        output: witness.start,
        bouncing: false,
        disturbed: false,
    };
    for (tick, number) in witness.ticks.iter().zip(1..) {
        if tick.contact != before.contact {
            parts.push(format!("tick {number}: the contact is {}", words::position(tick.contact)));
        }
        if tick.sample != tick.contact {
            let cause = if tick.disturbed { "in a disturbance" } else { "in a bounce" };
            parts.push(format!("tick {number}: reads {} {cause}", words::position(tick.sample)));
        }
        if tick.output != before.output {
            parts.push(format!("tick {number}: the output becomes {}", words::position(tick.output)));
        }
        before = *tick;
        if parts.len() > 60 {
            parts.push("and so on; the text below has every tick".to_owned());
            break;
        }
    }
    parts.join("; ") + "."
}
