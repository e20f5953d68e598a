//! How does firmware stop the tick while nothing happens, and lose no operation when it does?
//!
//! A hatch contact (invented) is sampled by a tick. When the law has settled, the tick is stopped and the interrupt of
//! the pin has to start it again. Most parts know an interrupt on *edges* only, and there lies the trap: a line that
//! moves after the last sample and before the interrupt is armed makes no edge any more, and the firmware sleeps through
//! the operation. So the order is: arm, then read the line *once more*, and sleep only if it still lies where the law has
//! settled. (Where the part can wake on a level, arm the level opposite to the settled one; then nothing needs to be
//! read again.)
//!
//! The part is simulated: every access to it takes a moment, in which the line may move. `cargo test --examples` tries
//! every line of twelve moments and compares with firmware that never sleeps.

use debounce_core::{Change, Position, Running, ShiftRegister};

/// What the firmware needs of the part.
trait Part {
    fn read_line(&mut self) -> Position;
    /// Clears what is pending and arms the interrupt for the next edge.
    fn arm_pin_interrupt(&mut self);
    fn disarm_pin_interrupt(&mut self);
    fn start_tick(&mut self);
    fn stop_tick(&mut self);
}

/// How the firmware goes to sleep.
#[derive(Clone, Copy)]
enum HandOver {
    /// Arms, then reads the line once more.
    ReadAgain,
    /// Arms and trusts the last sample: here to show what goes wrong.
    #[cfg_attr(not(test), allow(dead_code, reason = "only the tests go wrong on purpose"))]
    Trusting,
}

struct Firmware {
    hatch: Running<ShiftRegister>,
    hand_over: HandOver,
}

impl Firmware {
    /// The handler of the tick.
    fn on_tick(&mut self, part: &mut impl Part) -> Option<Change> {
        let report = self.hatch.tick(part.read_line());
        if let Some(settled) = self.hatch.settled_at() {
            part.arm_pin_interrupt();
            let still = match self.hand_over {
                HandOver::ReadAgain => part.read_line() == settled,
                HandOver::Trusting => true,
            };
            if still {
                part.stop_tick();
            } else {
                part.disarm_pin_interrupt();
            }
        }
        report
    }

    /// The handler of the pin interrupt.
    fn on_pin(&mut self, part: &mut impl Part) {
        part.disarm_pin_interrupt();
        part.start_tick();
    }
}

/// Moments from tick to tick.
const TICK: usize = 4;

#[derive(Clone, Copy, PartialEq, Eq)]
enum Switch {
    Off,
    On,
}

/// A part whose every access takes a moment.
struct Simulated<'a> {
    line: &'a [Position],
    now: usize,
    tick: Switch,
    interrupt: Switch,
    pending: bool,
}

impl Simulated<'_> {
    fn position(&self) -> Position {
        self.line.get(self.now).or(self.line.last()).copied().unwrap_or(Position::Open)
    }

    /// A moment passes; an edge in it is noticed if the interrupt was armed before.
    fn moment(&mut self) {
        let before = self.position();
        self.now += 1;
        self.pending |= self.interrupt == Switch::On && self.position() != before;
    }
}

impl Part for Simulated<'_> {
    fn read_line(&mut self) -> Position {
        let position = self.position();
        self.moment();
        position
    }

    fn arm_pin_interrupt(&mut self) {
        self.moment();
        (self.interrupt, self.pending) = (Switch::On, false);
    }

    fn disarm_pin_interrupt(&mut self) {
        (self.interrupt, self.pending) = (Switch::Off, false);
    }

    fn start_tick(&mut self) {
        self.tick = Switch::On;
    }

    fn stop_tick(&mut self) {
        self.tick = Switch::Off;
    }
}

/// The reports on a line, each with its moment, and the ticks it took.
fn run(line: &[Position], hand_over: HandOver) -> (Vec<(usize, Change)>, usize) {
    let hatch = Running::new(ShiftRegister::new(2), Position::Open);
    let mut firmware = Firmware { hatch, hand_over };
    let (tick, interrupt) = (Switch::On, Switch::Off);
    let mut part = Simulated { line, now: 0, tick, interrupt, pending: false };
    let (mut reports, mut ticks) = (Vec::new(), 0);
    while part.now < line.len() {
        // The pin's interrupt goes before the tick's where both are due.
        if part.pending {
            firmware.on_pin(&mut part);
        }
        if part.tick == Switch::On && part.now.is_multiple_of(TICK) {
            let at = part.now;
            ticks += 1;
            reports.extend(firmware.on_tick(&mut part).map(|change| (at, change)));
        } else {
            part.moment();
        }
    }
    (reports, ticks)
}

fn main() {
    let holds = [(Position::Open, 400), (Position::Closed, 1), (Position::Open, 2), (Position::Closed, 300)];
    let line: Vec<_> = holds.iter().flat_map(|&(position, moments)| vec![position; moments]).collect();
    let (reports, ticks) = run(&line, HandOver::ReadAgain);
    for (moment, change) in reports {
        let change = match change {
            Change::Make => "closed",
            Change::Break => "opened",
        };
        println!("moment {moment}: the hatch was {change}");
    }
    println!("{ticks} ticks taken, {} without sleep", line.len().div_ceil(TICK));
}

#[cfg(test)]
mod tests {
    use super::*;

    fn without_sleep(line: &[Position]) -> Vec<(usize, Change)> {
        let mut hatch = Running::new(ShiftRegister::new(2), Position::Open);
        let instants = (0..line.len()).step_by(TICK);
        instants.filter_map(|at| Some((at, hatch.tick(line[at])?))).collect()
    }

    /// Every line of twelve moments behind a start at rest, held at its end until it must have been reported.
    fn lines() -> impl Iterator<Item = Vec<Position>> {
        (0..1_u32 << 12).map(|bits| {
            let moments = (0..12).map(|moment| Position::closed_if(bits >> moment & 1 == 1));
            let mut line: Vec<_> = [Position::Open; 2 * TICK].into_iter().chain(moments).collect();
            let last = line[line.len() - 1];
            line.resize(line.len() + 6 * TICK, last);
            line
        })
    }

    #[test]
    fn asleep_loses_no_operation_at_the_hand_over() {
        let mut spared = 0;
        for line in lines() {
            let (reports, ticks) = run(&line, HandOver::ReadAgain);
            assert_eq!(reports, without_sleep(&line), "{line:?}");
            spared += line.len().div_ceil(TICK) - ticks;
        }
        assert!(spared > 0);
    }

    /// The comparison can fail.
    #[test]
    fn asleep_without_reading_again_would_lose_one() {
        let lost = |line: &Vec<Position>| run(line, HandOver::Trusting).0 != without_sleep(line);
        assert!(lines().filter(lost).count() > 0);
    }
}
