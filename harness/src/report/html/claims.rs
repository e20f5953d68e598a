//! What the recordings allow to claim of the bounce, and on which claim the design stands.

use debounce_core::{Change, PerChange};
use maud::html;

use super::{Cell, Section, table};
use crate::report::{claim_words, words};
use crate::study::Claims;

const BOTH: [Change; 2] = [Change::Make, Change::Break];

/// Every figure of the claims, for makes beside breaks; `None` where nothing was recorded whole.
pub(super) fn section(claims: &Claims) -> Option<Section> {
    if BOTH.iter().all(|&change| claims.bounce.at(change).is_none()) {
        return None;
    }
    let (coverage, confidence) = (claims.coverage, claims.confidence);
    let body = html! {
        p {
            "A claim speaks of operations to come: with " (confidence) " confidence a share of them bounces no longer \
             than a time. What is asked for is " (coverage) ". The longest recorded, with doubtful tails and the \
             sample period of the recorder added, is the time; how many were recorded sets the share."
        }
        div class="claims" { (table("Claims about the bounce, and what is designed for", &["what", "makes", "breaks"], &rows(claims))) }
        p class="note" {
            "The claim is a tolerance limit free of any assumed distribution (S. S. Wilks, Ann. Math. Stat. 12 (1941) \
             91-96). It holds for operations that are independent of one another and of the kind that was recorded; \
             operations that depend on one another allow less."
            @if BOTH.iter().any(|&change| claims.pooled.changes.of(change).tail.is_some()) {
                " An indication is a curve fitted to the longest ones (J. Pickands, Ann. Stat. 3 (1975) 119-131), drawn \
                 out beyond what was seen: it tells where to look, and nothing is designed for it."
            }
        }
    };
    Some(Section { id: "claims", heading: "What may be claimed".to_owned(), body })
}

fn rows(claims: &Claims) -> Vec<Vec<Cell>> {
    let mut rows = Vec::new();
    let mut add = |what: &str, of: &dyn Fn(Change) -> Option<String>| {
        let found = PerChange { make: of(Change::Make), break_: of(Change::Break) };
        if found.make.is_some() || found.break_.is_some() {
            let cell = |text: Option<String>| Cell::text(text.unwrap_or_else(|| "-".to_owned()));
            rows.push(vec![Cell::text(what), cell(found.make), cell(found.break_)]);
        }
    };
    let claim = |change| claims.bounce.at(change);
    let figures = |change| claims.pooled.changes.of(change);
    add("recorded whole", &|change| {
        Some(format!("{}, {} in doubt", figures(change).count, figures(change).ambiguous))
    });
    add("longest, on the safe side", &|change| Some(words::at_most(claim(change)?.longest_ns)));
    add(&format!("claimed with {} confidence", claims.confidence), &|change| {
        Some(claim_words::claim(&claim(change)?, change))
    });
    add(&format!("limit for {}", claims.coverage), &|change| {
        Some(claim_words::limit(claims, &claim(change)?, change))
    });
    add("designed for", &|change| {
        let design = claims.design.of(change);
        Some(format!("{}: {}", words::at_most(design.ns), claim_words::design_basis(design)))
    });
    add("independence", &|change| {
        claim(change)?;
        Some(claim_words::order(&figures(change).independence))
    });
    add("still longer ones", &|change| claim_words::indication(figures(change)));
    rows
}
