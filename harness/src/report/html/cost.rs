//! What each candidate costs, and why those that do not hold do not.

use maud::html;

use super::{Cell, Section, table};
use crate::choose::{Candidate, Evidence, Judgement};
use crate::report::words;
use crate::study::Study;

/// Rows of the table.
const MOST: usize = 16;

/// The first candidates with what they cost and give.
pub(super) fn section(study: &Study) -> Section {
    let all = &study.ranking.candidates;
    let mut shown: Vec<&Candidate> = all.iter().take(MOST).collect();
    shown.extend(all.iter().skip(MOST).filter(|one| one.pareto).take(MOST));
    let rows: Vec<Vec<Cell>> = shown.iter().map(|one| row(study, one)).collect();
    let head =
        ["law", "tick", "a second", "bytes", "make <", "break <", "x limit", "known by", "what is asked"];
    let body = html! {
        p {
            "Bytes are RAM for one input, with the parameters in flash. What is known was found by the closed form, or by exploring so many states. A star marks candidates that no other one that \
             holds beats in delay, ticks a second and RAM together. " (words::count(all.len(), "candidate"))
            " were judged; these are the first " (shown.len().min(MOST)) ", and the starred ones after them."
        }
        div class="laws" { (table("Candidates, best first", &head, &rows)) }
    };
    Section { id: "cost", heading: "Candidates and cost".to_owned(), body }
}

fn row(study: &Study, one: &Candidate) -> Vec<Cell> {
    let tick = study.tick(one);
    let star = if one.pareto { " *" } else { "" };
    let worst = one.worst_below_ns;
    let time = |ns: Option<u64>| Cell::number(ns.map_or("-".to_owned(), words::at_most));
    let known = match &one.judgement {
        Judgement::Faithful { evidence, .. } | Judgement::Refuted { evidence, .. } => match evidence {
            Evidence::ClosedForm => "closed form".to_owned(),
            Evidence::Explored { states } => format!("{states} states"),
        },
        Judgement::Unproven(_) => "not known".to_owned(),
    };
    let asked = one.shortfalls.first().map_or("holds".to_owned(), words::shortfall);
    vec![
        Cell::text(format!("{}{star}", one.parameters)),
        Cell::number(tick.to_string()),
        Cell::number(format!("{:.0}", tick.ticks_per_second())),
        Cell::number(one.state_bytes.to_string()),
        time(worst.map(|worst| worst.make)),
        time(worst.map(|worst| worst.break_)),
        Cell::number(one.times_limit.map_or("-".to_owned(), |times| format!("{times:.2}"))),
        Cell::text(known),
        Cell::text(asked),
    ]
}
