//! From a channel name as a person writes it to a variable and a bit of it.

use super::header::{Header, Kind, Variable, split_range};
use crate::nearest::nearest_scoped;
use crate::raw_input::quoted;
use crate::trace::channel::{Channel, listed};
use crate::trace::error::{Faults, Lack};
use crate::trace::{ReadOptions, Thresholds};

/// What to follow in the file.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Selected {
    /// The full name, with the bit.
    pub(super) name: String,
    pub(super) code: u32,
    pub(super) part: Part,
}

/// What of a variable's value counts.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Part {
    /// The bit at this place from the right, from 0.
    Bit(u64),
    /// A real number, as volts.
    Volts(Thresholds),
}

pub(super) fn channels(header: &Header) -> Vec<Channel> {
    header.variables.iter().filter_map(Variable::channel).collect()
}

/// Finds a channel by name; with no name, the only one there is.
pub(super) fn select(
    header: &Header,
    wanted: Option<&str>,
    options: &ReadOptions,
    faults: &mut Faults,
) -> Option<Selected> {
    let all = channels(header);
    if all.is_empty() {
        faults.whole_file("declares no variable that could be a contact");
        faults.help("record the line of the contact as a wire of one bit, or as a voltage");
        return None;
    }
    let Some(wanted) = wanted else {
        let usable: Vec<_> =
            header.variables.iter().filter(|variable| variable.channel().is_some()).collect();
        if usable.iter().all(|variable| variable.code == usable[0].code) {
            return part_of(usable[0], None, options, faults);
        }
        faults.whole_file(format!("has {} channels; choose one", all.len()));
        faults.help(format!("the channels are: {}", listed(&all)));
        faults.lack(Lack::Channel { such_as: all.first().map(|channel| channel.name.clone()) });
        return None;
    };
    // The name may end in a bit, or in what merely looks like one: `mem[3]` may be a vector of its own.
    let whole = matching(header, wanted);
    let (base, range) = split_range(wanted);
    let (found, bit) = if whole.is_empty() {
        let bit = range.filter(|(left, right)| left == right).map(|(left, _)| left);
        (bit.map(|bit| with_bit(header, &base, bit)).unwrap_or_default(), bit)
    } else {
        (whole, None)
    };
    match found.as_slice() {
        [] => {
            not_found(wanted, &all, faults);
            None
        }
        [first, rest @ ..] if rest.iter().all(|variable| variable.code == first.code) => {
            part_of(first, bit, options, faults)
        }
        several => {
            faults.whole_file(format!(
                "{} could be any of {} channels",
                quoted(wanted.as_bytes()),
                several.len()
            ));
            let several: Vec<_> = several.iter().filter_map(|variable| variable.channel()).collect();
            faults.help(format!("write one of these in full: {}", listed(&several)));
            faults.lack(Lack::Channel { such_as: several.first().map(|channel| channel.name.clone()) });
            None
        }
    }
}

/// The variables of that name; where there is none, those whose name ends in it.
fn matching<'a>(header: &'a Header, wanted: &str) -> Vec<&'a Variable> {
    let exact: Vec<_> = header.variables.iter().filter(|variable| variable.name == wanted).collect();
    if !exact.is_empty() {
        return exact;
    }
    let is_ending = |name: &str| name.strip_suffix(wanted).is_some_and(|scopes| scopes.ends_with('.'));
    header.variables.iter().filter(|variable| is_ending(&variable.name)).collect()
}

/// The variables of that name which hold that bit.
fn with_bit<'a>(header: &'a Header, base: &str, bit: i64) -> Vec<&'a Variable> {
    let mut found = matching(header, base);
    // A bus that was written bit by bit has one variable for each.
    if found.iter().any(|variable| variable.kind == Kind::Bit(Some(bit))) {
        found.retain(|variable| variable.kind == Kind::Bit(Some(bit)));
    }
    found
}

fn not_found(wanted: &str, all: &[Channel], faults: &mut Faults) {
    let mut message = format!("has no channel {}", quoted(wanted.as_bytes()));
    let near = nearest_scoped(wanted, all.iter().map(|channel| channel.name.as_str()));
    if let Some(near) = near {
        message.push_str(&format!("; did you mean \"{near}\"?"));
    }
    faults.whole_file(message);
    faults.help(format!("the channels are: {}", listed(all)));
    faults.lack(Lack::Channel { such_as: near.map(str::to_owned) });
}

fn part_of(
    variable: &Variable,
    bit: Option<i64>,
    options: &ReadOptions,
    faults: &mut Faults,
) -> Option<Selected> {
    let name = &variable.name;
    let selected = |name: String, part| Some(Selected { name, code: variable.code, part });
    match (variable.kind, bit) {
        (Kind::Bit(None), None) => selected(name.clone(), Part::Bit(0)),
        (Kind::Bit(Some(index)), None) => selected(format!("{name}[{index}]"), Part::Bit(0)),
        (Kind::Bit(Some(index)), Some(bit)) if index == bit => {
            selected(format!("{name}[{bit}]"), Part::Bit(0))
        }
        (Kind::Vector { left, right }, Some(bit)) if (left.min(right)..=left.max(right)).contains(&bit) => {
            selected(format!("{name}[{bit}]"), Part::Bit(bit.abs_diff(right)))
        }
        (Kind::Vector { left, right }, Some(bit)) => {
            faults.whole_file(format!("channel {name}[{left}:{right}] has no bit {bit}"));
            None
        }
        (Kind::Vector { left, right }, None) => {
            let width = left.abs_diff(right) + 1;
            faults.whole_file(format!("channel {name} is {width} bits wide; choose one bit of it"));
            faults.help(format!("write {name}[{right}] to {name}[{left}]"));
            faults.lack(Lack::Channel { such_as: Some(format!("{name}[{right}]")) });
            None
        }
        (Kind::Bit(_), Some(bit)) => {
            faults.whole_file(format!("channel {name} has no bit {bit}: it is a single bit"));
            None
        }
        (Kind::Real, None) => match options.thresholds {
            Some(thresholds) => selected(name.clone(), Part::Volts(thresholds)),
            None => {
                faults.whole_file(format!("channel {name} is a real number; levels need two thresholds"));
                faults.help("give the falling and the rising threshold in volts");
                faults.lack(Lack::Thresholds { proposed: None });
                None
            }
        },
        (Kind::Real, Some(bit)) => {
            faults.whole_file(format!("channel {name} has no bit {bit}: it is a real number"));
            None
        }
        (Kind::Text, _) => {
            faults.whole_file(format!("channel {name} is text"));
            None
        }
    }
}
