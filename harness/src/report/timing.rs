//! Timing diagrams in plain text: one column a tick, made of ASCII only, so that they survive any terminal.

use std::fmt::{self, Write};

use debounce_core::Position;

use crate::prove::{Witness, WitnessTick};

/// Ticks in one row; with its name in front a row fits 80 columns.
pub(super) const ROW: usize = 64;

/// A witness as a timing diagram.
///
/// ```text
/// tick     1        10
/// contact  ___######
/// reads    ___#_####
/// because  ....b....
/// output   ______###
/// ```
/// `_` is open, `#` is closed; a reading that the contact does not explain is marked `b` in a bounce, `d` in a
/// disturbance, `?` where the cause is not known. The output is what the logic says after the tick.
#[derive(Clone, Copy, Debug)]
pub struct TimingDiagram<'a>(pub &'a Witness);

impl fmt::Display for TimingDiagram<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self(witness) = self;
        for (row, ticks) in witness.ticks.chunks(ROW).enumerate() {
            if row > 0 {
                f.write_char('\n')?;
            }
            let first = row * ROW + 1;
            writeln!(f, "tick     {}", ruler(first, ticks.len()))?;
            writeln!(f, "contact  {}", lane(ticks, |tick| level(tick.contact)))?;
            writeln!(f, "reads    {}", lane(ticks, |tick| level(tick.sample)))?;
            writeln!(f, "because  {}", lane(ticks, reason))?;
            writeln!(f, "output   {}", lane(ticks, |tick| level(tick.output)))?;
        }
        if let Some(from) = witness.loop_from {
            writeln!(f, "ticks {} to {} repeat for ever", from + 1, witness.ticks.len())?;
        }
        Ok(())
    }
}

pub(super) fn level(position: Position) -> char {
    match position {
        Position::Open => '_',
        Position::Closed => '#',
    }
}

fn reason(tick: &WitnessTick) -> char {
    match tick {
        tick if tick.sample == tick.contact => '.',
        WitnessTick { disturbed: true, .. } => 'd',
        WitnessTick { bouncing: true, .. } => 'b',
        _ => '?',
    }
}

fn lane(ticks: &[WitnessTick], symbol: impl Fn(&WitnessTick) -> char) -> String {
    ticks.iter().map(symbol).collect()
}

/// The numbers of the first tick and of every tenth, each beginning at its column where it has room.
pub(super) fn ruler(first: usize, length: usize) -> String {
    let mut text = first.to_string();
    for tick in (first + 1..first + length).filter(|tick| tick.is_multiple_of(10)) {
        let column = tick - first;
        if column > text.len() {
            text = format!("{text:<column$}{tick}");
        }
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    fn witness(ticks: usize, loop_from: Option<usize>) -> Witness {
        let tick = |at: usize| WitnessTick {
            contact: Position::closed_if(at >= 2),
            sample: Position::closed_if(at >= 2 && at != 3),
            output: Position::closed_if(at >= 5),
            bouncing: at == 3,
            disturbed: false,
        };
        Witness { start: Position::Open, ticks: (0..ticks).map(tick).collect(), loop_from }
    }

    #[test]
    fn timing_diagram_shows_each_tick_in_its_column() {
        let shown = TimingDiagram(&witness(11, None)).to_string();
        let expected = "\
tick     1        10
contact  __#########
reads    __#_#######
because  ...b.......
output   _____######
";
        assert_eq!(shown, expected);
    }

    #[test]
    fn timing_diagram_of_a_long_witness_stays_within_80_columns() {
        let shown = TimingDiagram(&witness(200, Some(150))).to_string();
        assert!(shown.lines().all(|line| line.len() <= 80), "{shown}");
        assert!(shown.contains("tick     65   70        80"), "{shown}");
        assert!(shown.ends_with("ticks 151 to 200 repeat for ever\n"), "{shown}");
    }
}
