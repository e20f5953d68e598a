//! Samples of the demo recording.

use debounce_core::Position;

/// The recording that the workbench shows as its demo; invented.
const TEXT: &str = include_str!("../../../../harness/src/demo/vent_button.vcd");

/// The recording sampled once in `period_us`, over and over.
///
/// It reads no more of the format than this one file has: times in nanoseconds, one wire.
#[derive(Clone)]
pub(crate) struct Recording {
    lines: core::str::Lines<'static>,
    period_ns: u64,
    now_ns: u64,
    next_ns: u64,
    line: Position,
}

impl Recording {
    pub(crate) fn sampled(period_us: u64) -> Self {
        Self {
            lines: TEXT.lines(),
            period_ns: period_us * 1_000,
            now_ns: 0,
            next_ns: 0,
            line: Position::Open,
        }
    }

    pub(crate) fn sample(&mut self) -> Position {
        while self.next_ns <= self.now_ns {
            match self.lines.next() {
                None => *self = Self::sampled(self.period_ns / 1_000),
                Some("0!") => self.line = Position::Open,
                Some("1!") => self.line = Position::Closed,
                Some(line) => {
                    if let Some(time) = line.strip_prefix('#').and_then(|digits| digits.parse().ok()) {
                        self.next_ns = time;
                        if time > self.now_ns {
                            break;
                        }
                    }
                }
            }
        }
        self.now_ns += self.period_ns;
        self.line
    }
}
