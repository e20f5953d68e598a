//! The sample clock in lines of a summary: where each kind of law works, which clock to take, what sleep saves.

use std::io;

use super::lines::{Lines, strong};
use crate::clock_range::{Activity, Asleep, ClockRange, Span};
use crate::quantity::{Time, counted};
use crate::report::words;

/// What a choice shows of the sample clock.
pub(super) struct ClockView {
    pub(super) range: ClockRange,
    /// The slowest tick period that holds, for each tolerance in parts per million.
    pub(super) by_tolerance: Vec<(u32, Option<u64>)>,
    pub(super) activity: Activity,
    /// Of the first candidate, at its tick period, where it holds and settles.
    pub(super) asleep: Option<Asleep>,
}

impl ClockView {
    /// What is needed to decide; with `details` all that is known.
    pub(super) fn write(&self, lines: &mut Lines<'_>, details: bool) -> io::Result<()> {
        for (index, curve) in self.range.curves.iter().enumerate() {
            let text = match (curve.works.is_empty(), curve.holds.is_empty()) {
                (true, _) => "works at no tick period".to_owned(),
                (false, true) => format!("works {}, but nowhere in time", spans(&curve.works)),
                (false, false) if curve.works == curve.holds => {
                    format!("works, and is in time, {}", spans(&curve.works))
                }
                (false, false) => format!("works {}; in time {}", spans(&curve.works), spans(&curve.holds)),
            };
            let text = format!("{}: {text}", curve.family);
            if index == 0 { lines.item("Clock", &text)? } else { lines.more(&text)? }
        }
        if details {
            lines.more(&self.how())?;
        }
        if let Some(best) = &self.range.recommended {
            lines.item("Free tick", &strong(&format!("{} with {}", time(best.period_ns), best.law)))?;
            let mut text = format!(
                "were the timer free: a make in less than {}, a break in less than {}",
                words::at_most(best.below_ns.make),
                words::at_most(best.below_ns.break_)
            );
            if details {
                text.push_str(&format!(
                    "; the slowest at all is {}; the same law holds from {} to {}",
                    words::at_least(best.slowest_ns),
                    words::at_most(best.same_law.from_ns),
                    words::at_least(best.same_law.until_ns)
                ));
            }
            lines.more(&text)?;
        }
        let slowest = |&(ppm, period): &(u32, Option<u64>)| {
            let period = period.map_or("none".to_owned(), words::at_least);
            format!("{} % {period}", f64::from(ppm) / 10_000.0)
        };
        let all: Vec<String> = self.by_tolerance.iter().map(slowest).collect();
        lines.item(
            "Oscillator",
            &format!("slowest tick in time by the tolerance of the clock: {}", all.join(", ")),
        )?;
        self.power(lines, details)
    }

    /// How what is said of the kinds of law is known.
    fn how(&self) -> String {
        format!(
            "for every tick period from {} to {} and over {} rounding steps, by closed form; the majority register by exploring it, which does not reach the shortest ticks",
            time(self.range.span.from_ns),
            time(self.range.span.until_ns),
            self.range.steps.len()
        )
    }

    fn power(&self, lines: &mut Lines<'_>, details: bool) -> io::Result<()> {
        let Some(asleep) = &self.asleep else { return Ok(()) };
        lines.item(
            "Power",
            &format!(
                "{:.0} wake-ups a second; where the tick stops while settled, with {} operations and {} disturbances an hour, at most {:.2} a second and asleep for at least {:.2} % of the time",
                asleep.ticking_per_second,
                self.activity.operations_per_hour,
                self.activity.disturbances_per_hour,
                asleep.stopping_per_second,
                // Rounded down: it must not be overstated.
                (asleep.share * 10_000.0).floor() / 100.0
            ),
        )?;
        if !details {
            return Ok(());
        }
        lines.more(&format!(
            "settled at most {} after a make, {} after a break, {} after a disturbance",
            counted(u64::from(asleep.ticks_after.make), "tick"),
            asleep.ticks_after.break_,
            asleep.ticks_after_disturbance.open.max(asleep.ticks_after_disturbance.closed)
        ))
    }
}

fn time(ns: u64) -> String {
    Time::from_ns(ns).to_string()
}

/// The stretches, the longest ones if they are many.
fn spans(spans: &[Span]) -> String {
    let one =
        |span: &Span| format!("from {} to {}", words::at_most(span.from_ns), words::at_least(span.until_ns));
    match spans {
        [first, .., last] if spans.len() > SHOWN => format!(
            "in {} stretches from {} to {}",
            spans.len(),
            words::at_most(first.from_ns),
            words::at_least(last.until_ns)
        ),
        _ => spans.iter().map(one).collect::<Vec<_>>().join(" and "),
    }
}

/// Stretches listed on the screen.
const SHOWN: usize = 3;
