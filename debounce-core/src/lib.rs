//! Debouncing laws for mechanical contacts.
#![no_std]
#![forbid(unsafe_code)]

mod analog;
mod bank;
mod changeover;
mod envelope;
mod law;
mod machine;
mod meaning;
mod still;
mod time;
mod wiring;

pub use analog::{
    AnalogSample, Chord, Hysteresis, HysteresisError, HysteresisState, Ladder, LadderError, LadderParts,
    LadderReading, Window,
};
pub use bank::{
    Bank, BankState, Changes, EdgeRule, Lane, LanesStarted, PatientBank, PatientState, PortLaw, StartingBank,
    StartingBankState, Word,
};
pub use changeover::{Changeover, ChangeoverFault, ChangeoverReport, ChangeoverState, Throws};
pub use envelope::{Bounds, Clause, Envelope, Latency, PerChange, PerPosition, Verdict};
pub use law::{Law, is_settled};
pub use machine::{Change, Machine, Position};
pub use meaning::{
    ContactPair, DetentState, Detents, Gesture, GestureError, GestureEvent, GestureState, GestureTicks,
    KeyDiodes, Matrix, MatrixReport, MatrixState, PairFault, PairKind, PairPositions, PairReport, PairState,
    Phases, PulseCounter, PulseEvent, PulseFlaw, PulseLimits, PulseLimitsError, PulseState, PulseTally,
    Quadrature, QuadratureEvent, QuadratureState, Resolution, RestPhases, Speed, SpeedState, TallyFull, Turn,
};
#[cfg(feature = "embedded-hal")]
pub use meaning::{MatrixPins, ScanError};
pub use still::is_still;
pub use time::{Period, TickClock};
#[cfg(feature = "embedded-hal-async")]
pub use wiring::AsyncPin;
#[cfg(feature = "embedded-hal")]
pub use wiring::PinPort;
pub use wiring::{
    Burst, Bursts, BurstsState, Monitor, MonitorLimits, MonitorState, Outside, ReadPort, Recorder,
    RecorderMode, Wear,
};
#[cfg(feature = "mailbox")]
pub use wiring::{Delivery, Mailbox};
