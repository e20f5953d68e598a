//! The envelope as a predicate on whole words, written apart from the harness and sharing no code with it.
//!
//! A word gives for each sample where the contact is and what was read. The predicate asks whether *some* choice
//! of bounce lengths and disturbance windows explains it. It looks at whole words and all choices, slowly and
//! plainly; the harness walks an automaton. The two must agree on every word.

use debounce_core::{Envelope, Position};

/// One sample of a word: where the contact is, and what was read.
pub type Letter = (Position, Position);

/// Whether some bounce lengths and disturbance windows explain `word`, begun settled at `start`.
#[must_use]
pub fn is_legal(word: &[Letter], start: Position, envelope: &Envelope) -> bool {
    let changes: Vec<usize> =
        (0..word.len()).filter(|&at| word[at].0 != if at == 0 { start } else { word[at - 1].0 }).collect();
    let dwells = changes.windows(2).all(|pair| {
        let held = (pair[1] - pair[0]) as u32;
        held >= envelope.dwell.at(word[pair[0]].0)
    });
    dwells && some_bounce(word, &changes, &mut vec![], envelope)
}

/// Tries every length of bounce for every change.
fn some_bounce(word: &[Letter], changes: &[usize], lengths: &mut Vec<u32>, envelope: &Envelope) -> bool {
    let Some(&change) = changes.get(lengths.len()) else {
        let mut bouncing = vec![false; word.len()];
        for (&from, &length) in changes.iter().zip(lengths.iter()) {
            bouncing.iter_mut().skip(from).take(length as usize).for_each(|sample| *sample = true);
        }
        return some_windows(word, changes, &bouncing, &mut vec![], 0, envelope);
    };
    let most = envelope.bounce.at(word[change].0.reached_by());
    // A shorter bounce explains less; it can only help where a disturbance waits for the bounce to end.
    let least = if envelope.calm == 0 { most } else { 0 };
    (least..=most).any(|length| {
        lengths.push(length);
        let found = some_bounce(word, changes, lengths, envelope);
        lengths.pop();
        found
    })
}

/// Tries every set of disturbance windows `(first, after)`, in order, that begins at or after `from`.
fn some_windows(
    word: &[Letter],
    changes: &[usize],
    bouncing: &[bool],
    windows: &mut Vec<(usize, usize)>,
    from: usize,
    envelope: &Envelope,
) -> bool {
    let explained = |at: usize, windows: &[(usize, usize)]| {
        word[at].0 == word[at].1 || bouncing[at] || covered(windows, at)
    };
    if (0..from).any(|at| !explained(at, windows)) {
        return false;
    }
    if (0..word.len()).all(|at| explained(at, windows)) {
        return true;
    }
    for first in from..word.len() {
        let bounce_ended = changes
            .iter()
            .rfind(|&&change| change <= first)
            .map(|&change| (change..first).rfind(|&sample| bouncing[sample]).map_or(change, |last| last + 1));
        let calm = bounce_ended.is_none_or(|ended| {
            let settled = (ended..first).filter(|&sample| !covered(windows, sample)).count();
            settled as u32 >= envelope.calm
        });
        if envelope.calm > 0 && (bouncing[first] || !calm) {
            continue;
        }
        for width in 1..=envelope.glitch.at(word[first].0) as usize {
            windows.push((first, first + width));
            let next = first + width + envelope.quiet as usize;
            let found = some_windows(word, changes, bouncing, windows, next.min(word.len()), envelope);
            windows.pop();
            if found {
                return true;
            }
        }
    }
    false
}

fn covered(windows: &[(usize, usize)], at: usize) -> bool {
    windows.iter().any(|&(first, after)| (first..after).contains(&at))
}

/// Calls `visit` with every legal word of up to `length` samples begun at `start`, each after its prefixes;
/// where `visit` returns false, longer words with this prefix are left out.
pub fn each_legal_word(
    start: Position,
    envelope: &Envelope,
    length: usize,
    visit: &mut impl FnMut(&[Letter]) -> bool,
) {
    fn extend(
        word: &mut Vec<Letter>,
        start: Position,
        envelope: &Envelope,
        length: usize,
        visit: &mut impl FnMut(&[Letter]) -> bool,
    ) {
        if word.len() == length {
            return;
        }
        for contact in Position::BOTH {
            for sample in Position::BOTH {
                word.push((contact, sample));
                if is_legal(word, start, envelope) && visit(word) {
                    extend(word, start, envelope, length, visit);
                }
                word.pop();
            }
        }
    }
    extend(&mut Vec::new(), start, envelope, length, visit);
}
