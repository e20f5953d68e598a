//! The board, which is not there: [`Board`] plays the part of its lines, from a script.
//!
//! On a real board this is the port's input register and the keypad's pins.

use core::cell::Cell;

use debounce_core::{MatrixPins, PortReader};
use embedded_hal::delay::DelayNs;
use embedded_hal::digital::{Error, ErrorKind, ErrorType, InputPin, OutputPin};

/// A millisecond at the clock of the emulated LM3S6965 after reset; on the nRF51822 it is a little less.
pub(crate) const CYCLES_PER_TICK: u32 = 12_500;

/// What people do: at a tick, a line of the port is closed or opened, and bounces.
const SCRIPT: [(u32, u32, bool); 15] = [
    // The door stands closed at power-up.
    (0, 3, true),
    (40, 0, true),
    (90, 0, false),
    // The lamp key: one tap, then a hold.
    (130, 2, true),
    (170, 2, false),
    (300, 2, true),
    (500, 2, false),
    (520, 1, true),
    (560, 1, false),
    (600, 3, false),
    (650, 3, true),
    // A disturbance of 2 ms, and one of 7.
    (700, 1, true),
    (702, 1, false),
    (730, 0, true),
    (737, 0, false),
];

/// How a contact reads in the first ticks after a change: 1 the new position, 0 the old one.
const BOUNCE: u32 = 0b10110;
const BOUNCE_TICKS: u32 = 5;

/// The ticks at which the knob moves on by a quarter of a cycle: two clicks forward, one back.
const FORWARD: [u32; 8] = [310, 315, 320, 325, 335, 340, 345, 350];
const BACKWARD: [u32; 4] = [400, 404, 408, 412];
/// The lines of the knob in each quarter of a cycle; closed is 1.
const QUARTERS: [u8; 4] = [0b00, 0b01, 0b11, 0b10];

/// Keys of the keypad that are down: from, until, row, column.
const KEYS: [(u32, u32, usize, usize); 4] = [
    (760, 790, 1, 2),
    // Three corners of a rectangle; without diodes the fourth reads closed too.
    (800, 860, 0, 0),
    (810, 860, 0, 1),
    (830, 860, 3, 0),
];

/// The lines cannot be read now: they hang on a bus that is busy now and then.
#[derive(Debug)]
pub(crate) struct NotReady;

impl Error for NotReady {
    fn kind(&self) -> ErrorKind {
        ErrorKind::Other
    }
}

/// Once in so many ticks the port is not ready.
const BUSY_EVERY: u32 = 97;

/// All lines of the board.
pub(crate) struct Board {
    tick: Cell<u32>,
    /// The row of the keypad that is driven low.
    driven: Cell<Option<usize>>,
}

impl Board {
    pub(crate) const fn new() -> Self {
        Self { tick: Cell::new(0), driven: Cell::new(None) }
    }

    pub(crate) fn now(&self) -> u32 {
        self.tick.get()
    }

    /// A tick goes by.
    pub(crate) fn pass(&self) {
        self.tick.set(self.now() + 1);
    }

    /// The keypad behind its pins; 10 us are enough for a column to settle.
    pub(crate) fn keypad(&self) -> MatrixPins<Row<'_>, Column<'_>, Settle, 4, 3> {
        let rows = [0, 1, 2, 3].map(|row| Row { board: self, row });
        let columns = [0, 1, 2].map(|column| Column { board: self, column });
        MatrixPins::new(rows, columns, Settle, 10)
    }

    fn is_closed(&self, line: u32) -> bool {
        let past = SCRIPT.iter().filter(|(at, which, _)| *which == line && *at <= self.now());
        let Some(&(at, _, closed)) = past.last() else { return false };
        let since = self.now() - at;
        let arrived = at == 0 || since >= BOUNCE_TICKS || BOUNCE >> since & 1 == 1;
        closed == arrived
    }

    fn knob(&self) -> u8 {
        let passed = |ticks: &[u32]| ticks.iter().filter(|at| **at <= self.now()).count();
        QUARTERS[(passed(&FORWARD) + 4 - passed(&BACKWARD)) % 4]
    }

    /// Whether a current flows from a row to a column, straight or the long way round through pressed keys.
    fn conducts(&self, row: usize, column: usize) -> bool {
        let down = |row: usize, column: usize| {
            KEYS.iter()
                .any(|&(from, until, r, c)| (r, c) == (row, column) && (from..until).contains(&self.now()))
        };
        let round =
            |other: usize| down(other, column) && (0..3).any(|way| down(row, way) && down(other, way));
        down(row, column) || (0..4).any(round)
    }
}

impl PortReader<u8> for &Board {
    type Error = NotReady;

    fn read_port(&mut self) -> Result<u8, NotReady> {
        if self.now() % BUSY_EVERY == BUSY_EVERY - 1 {
            return Err(NotReady);
        }
        let contacts = (0..4).fold(0, |port, line| port | u8::from(self.is_closed(line)) << line);
        // Pull-ups: what is closed reads low.
        Ok(!(contacts | self.knob() << 4))
    }
}

pub(crate) struct Row<'a> {
    board: &'a Board,
    row: usize,
}

impl ErrorType for Row<'_> {
    type Error = NotReady;
}

impl OutputPin for Row<'_> {
    fn set_low(&mut self) -> Result<(), NotReady> {
        self.board.driven.set(Some(self.row));
        Ok(())
    }

    fn set_high(&mut self) -> Result<(), NotReady> {
        self.board.driven.set(None);
        Ok(())
    }
}

pub(crate) struct Column<'a> {
    board: &'a Board,
    column: usize,
}

impl ErrorType for Column<'_> {
    type Error = NotReady;
}

impl InputPin for Column<'_> {
    fn is_high(&mut self) -> Result<bool, NotReady> {
        self.is_low().map(|low| !low)
    }

    fn is_low(&mut self) -> Result<bool, NotReady> {
        Ok(self.board.driven.get().is_some_and(|row| self.board.conducts(row, self.column)))
    }
}

/// The lines of a script settle at once.
pub(crate) struct Settle;

impl DelayNs for Settle {
    fn delay_ns(&mut self, _: u32) {}
}
