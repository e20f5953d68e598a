//! The envelope in ticks as a predicate on words of samples, written straight from its definition.

use debounce_core::{Envelope, Position};
use rustc_hash::FxHashSet as HashSet;

#[derive(Clone, Copy, PartialEq, Eq, Hash)]
struct State {
    contact: Position,
    /// Samples since the change, up to the longest dwell.
    held: u32,
    /// Samples that bounce may still take, if it goes on without a break.
    bounce_left: u32,
    /// Samples that the disturbance may still take, if it goes on.
    window_left: u32,
    /// Samples since the last disturbance ended, up to quiet.
    quiet: u32,
    /// Settled samples since the bounce ended, up to calm.
    calm: u32,
}

/// Whether `word` is one of the envelope's words, beginning settled in its first position.
pub(super) fn fits(word: &[Position], e: &Envelope) -> bool {
    let held = e.dwell.open.max(e.dwell.closed);
    let start =
        State { contact: Position::Open, held, bounce_left: 0, window_left: 0, quiet: e.quiet, calm: e.calm };
    let mut states = HashSet::from_iter([start]);
    for &sample in word {
        let mut next = HashSet::default();
        for state in states {
            after(state, sample, e, held, &mut next);
        }
        states = next;
    }
    !states.is_empty()
}

fn after(state: State, sample: Position, e: &Envelope, longest: u32, next: &mut HashSet<State>) {
    let mut contacts = vec![state];
    if state.held >= e.dwell.at(state.contact) {
        let contact = !state.contact;
        let bounce_left = e.bounce.at(contact.reached_by());
        contacts.push(State { contact, held: 0, bounce_left, calm: 0, ..state });
    }
    for state in contacts {
        for in_bounce in [false, true] {
            if in_bounce && state.bounce_left == 0 {
                continue;
            }
            let mut windows = vec![0];
            if state.window_left > 0 {
                windows.push(state.window_left);
            } else if state.quiet >= e.quiet && (in_bounce || state.calm >= e.calm) {
                windows.push(e.glitch.at(state.contact));
            }
            for window in windows {
                let free = in_bounce || window > 0;
                if !free && sample != state.contact {
                    continue;
                }
                let window_left = window.saturating_sub(1);
                next.insert(State {
                    contact: state.contact,
                    held: (state.held + 1).min(longest),
                    bounce_left: if in_bounce { state.bounce_left - 1 } else { 0 },
                    window_left,
                    quiet: if window > 0 { 0 } else { (state.quiet + 1).min(e.quiet) },
                    calm: (state.calm + u32::from(!free)).min(e.calm),
                });
            }
        }
    }
}
