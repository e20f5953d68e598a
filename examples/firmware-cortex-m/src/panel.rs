//! What the interrupt does in a tick: [`Panel`].

use debounce_core::{
    Bank, BankState, Change, DetentState, Detents, Gesture, GestureEvent, GestureState, GestureTicks,
    KeyDiodes, Machine, Matrix, MatrixState, Phases, PortReader, Position, QuadratureEvent, RestPhases,
    StartingBank, StartingBankState, Turn,
};

use crate::board::Board;

/// What the main loop hears of.
#[derive(Clone, Copy)]
pub(crate) enum Event {
    /// The position of a contact at power-up; nobody operated it.
    Found {
        line: &'static str,
        position: Position,
    },
    Changed {
        line: &'static str,
        change: Change,
    },
    Lamp(GestureEvent),
    /// The knob moved from one rest to the next.
    Clicked(Turn),
    StepsLost,
    /// A key of the keypad was pressed.
    Pressed {
        row: usize,
        column: u32,
    },
    /// The keypad shows keys that may be ghosts.
    Doubt,
    /// The show is over.
    End,
}

/// The lines of the port that are contacts of their own, lowest first; all have pull-ups, so closed reads low.
const LINES: [&str; 4] = ["vent up", "vent down", "lamp key", "door"];
const CONTACTS: u8 = 0b1111;
const LAMP: u8 = 1 << 2;
/// The two lines of the knob, pull-ups too.
const KNOB_A: u8 = 1 << 4;
const KNOB_B: u8 = 1 << 5;

// Eight samples of one millisecond in a row: the buttons bounce for up to five.
const CONTACT_BANK: StartingBank<Bank<u8, 3>, 3> = StartingBank::new(Bank::new(CONTACTS));
const LAMP_KEY: Gesture = Gesture::new(GestureTicks { gap: 60, hold: 120, repeat: 40, most_taps: 2 });
const KNOB: Detents = Detents::new(RestPhases::BothOpen);
const KEYPAD: Matrix<u8, 4, 2> = Matrix::new(KeyDiodes::None);

/// The state of everything on the panel.
pub(crate) struct Panel {
    contacts: StartingBankState<u8, BankState<u8, 3>, 3>,
    closed: u8,
    lamp: GestureState,
    knob: DetentState,
    keypad: MatrixState<u8, 4, 2>,
    in_doubt: bool,
}

impl Panel {
    /// Nothing is known yet.
    pub(crate) fn power_up() -> Self {
        Self {
            contacts: CONTACT_BANK.power_up(),
            closed: 0,
            lamp: Gesture::POWER_UP,
            knob: Detents::POWER_UP,
            keypad: KEYPAD.power_up(),
            in_doubt: false,
        }
    }

    /// Reads and settles everything once.
    pub(crate) fn tick(&mut self, mut board: &Board, mut post: impl FnMut(Event)) {
        // What cannot be read has no sample in this tick: for the laws a tick was lost.
        if let Ok(port) = board.read_port() {
            self.contacts(port, &mut post);
            self.knob(port, &mut post);
        }
        if let Ok(rows) = board.keypad().scan() {
            self.keys(rows, &mut post);
        }
    }

    fn contacts(&mut self, port: u8, post: &mut impl FnMut(Event)) {
        let report = CONTACT_BANK.step(&mut self.contacts, port & CONTACTS);
        // What was found at power-up reads as it looks now: closed is low.
        self.closed = (self.closed | report.changes.make | (report.initial & !port)) & !report.changes.break_;
        for (bit, line) in LINES.iter().enumerate() {
            let lane = 1 << bit;
            if report.initial & lane != 0 {
                let position = Position::closed_if(self.closed & lane != 0);
                post(Event::Found { line, position });
            }
            // The lamp key means more than its two positions.
            if lane == LAMP {
                continue;
            }
            if report.changes.make & lane != 0 {
                post(Event::Changed { line, change: Change::Make });
            }
            if report.changes.break_ & lane != 0 {
                post(Event::Changed { line, change: Change::Break });
            }
        }
        if let Some(event) = LAMP_KEY.step(&mut self.lamp, Position::closed_if(self.closed & LAMP != 0)) {
            post(Event::Lamp(event));
        }
    }

    fn knob(&mut self, port: u8, post: &mut impl FnMut(Event)) {
        let phases =
            Phases { a: Position::closed_if(port & KNOB_A == 0), b: Position::closed_if(port & KNOB_B == 0) };
        match KNOB.step(&mut self.knob, phases) {
            Some(QuadratureEvent::Step(turn)) => post(Event::Clicked(turn)),
            Some(QuadratureEvent::Lost) => post(Event::StepsLost),
            None => {}
        }
    }

    fn keys(&mut self, rows: [u8; 4], post: &mut impl FnMut(Event)) {
        let report = KEYPAD.step(&mut self.keypad, rows);
        for (row, lanes) in report.rows.iter().enumerate() {
            for column in (0..3).filter(|column| lanes.changes.make >> column & 1 == 1) {
                post(Event::Pressed { row, column });
            }
        }
        let in_doubt = report.doubtful != [0; 4];
        if in_doubt && !self.in_doubt {
            post(Event::Doubt);
        }
        self.in_doubt = in_doubt;
    }
}
