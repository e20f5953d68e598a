//! Debouncing laws for mechanical contacts: small, pure, provable.
//!
//! # The model
//!
//! A contact is [open or closed](Position); its [changes](Change) are the make and the break. Once a *tick* the line is
//! read into a *sample*, the position that the contact looks to be in. A *law* takes one sample a tick and reports an
//! edge when it is sure of a change:
//!
//! ```text
//!  line ──[Polarity]──> sample ──[Law::step]──> Option<Change>
//!                                  │    ▲
//!                                  └state┘
//! ```
//!
//! * A law is a [`Machine`]: its step depends on the law, the state and the sample, and on nothing else. No clock is
//!   read, nothing is global. So the type that runs in an interrupt handler is the type that is explored exhaustively.
//! * Law and state are apart. One law in flash serves any number of inputs; each costs only its state in RAM.
//!   [`Running`] holds both for the common case of one input, and a [`ConstLaw`] takes no room at all.
//! * Times are turned into ticks once, by a [`TickClock`], and always toward the safe side.
//! * An [`Envelope`] is the set of waveforms that a claim is made for, in ticks. Its [`limit`](Envelope::limit) is the
//!   least worst-case latency that any logic whatever can have there.
//! * A law that is [settled](is_settled) at the position of the line stays as it is: the tick may stop, the processor
//!   sleep.
//! * At power-up nothing is known; [`Starting`] finds the position without reporting an operation that nobody made.
//!
//! # The laws
//!
//! | law                  | changes its output when                                     | state, bytes |
//! |----------------------|-------------------------------------------------------------|--------------|
//! | [`Integrator`]       | an up/down count reaches its other end                      | 2 or 4       |
//! | [`ShiftRegister`]    | all of the last n samples read the other position           | 2            |
//! | [`MajorityRegister`] | m of the last n samples read the other position             | 2, 4 or 8    |
//! | [`StateMachine`]     | enough contrary samples came in before enough agreeing ones | 3 or 6       |
//!
//! A [`Chain`] puts one law in front of another and is itself a law.
//!
//! Where nothing else decides, take [`StateMachine::for_envelope`](StateMachine::<u8>::for_envelope).
//!
//! # Examples
//! A door contact, sampled every millisecond, that bounces for up to 4 ms and picks up disturbances of up to 1.5 ms:
//! ```
//! use debounce_core::{Change, Config, ConstLaw, Envelope, Period, Position, Running, StateMachine, TickClock};
//!
//! const CLOCK: TickClock = TickClock::new(Period::from_ms(1)).tolerance_ppm(20_000);
//! const BOUNCE: u32 = CLOCK.samples_touched(4_000_000);
//! const GLITCH: u32 = CLOCK.samples_touched(1_500_000);
//! const DWELL: u32 = CLOCK.samples_seen(50_000_000);
//! const QUIET: u32 = CLOCK.samples_seen(10_000_000);
//! const ENVELOPE: Envelope =
//!     Envelope::clean(DWELL, DWELL).bounce(BOUNCE, BOUNCE).glitch(GLITCH, GLITCH).quiet(QUIET);
//!
//! struct Door;
//! impl Config for Door {
//!     type Law = StateMachine;
//!     const LAW: StateMachine = match StateMachine::<u8>::for_envelope(&ENVELOPE) {
//!         Ok(law) => law,
//!         Err(_) => panic!("the door's envelope has no closed form"),
//!     };
//! }
//!
//! let mut door = Running::new(ConstLaw::<Door>::new(), Position::Open);
//! let made = (1..).find(|_| door.tick(Position::Closed) == Some(Change::Make));
//! assert_eq!(made, Some(3)); // a clean make is reported at the third sample
//! ```
//!
//! # Around the law
//!
//! | from, to                  | types                                                                        |
//! |---------------------------|------------------------------------------------------------------------------|
//! | pins and ports            | `DebouncedPin`, `DebouncedPins`, [`DebouncedPort`] over a [`PortReader`], `PinPort` |
//! | asleep between operations | [`Settling`], [`is_still`], `DebouncedPin::wake_level`, `DebouncedPin::next_report` |
//! | interrupt to main loop    | `Mailbox`                                                                    |
//! | field to workbench        | [`Recorder`]                                                                 |
//! | health in the field       | [`Monitor`], [`Heartbeat`], [`Tally`], [`Wear`]                              |
//!
//! # What may go wrong
//! Nothing here invents an operation. Each type says the details under *Bounds*; a test goes with each line.
//!
//! | what                                   | what comes of it                                                             |
//! |----------------------------------------|------------------------------------------------------------------------------|
//! | a pin or port that answers with an error | the error is returned and no sample taken: a lost tick                     |
//! | an interrupt that comes too late: ticks are lost | everything is later by as many; what lies in lost ticks altogether was never there. [`Heartbeat`] notices it, [`Envelope::lost`] puts it into the claim |
//! | counts beyond the converter or the wiring | `OutOfRange`, which is no sample ([`Hysteresis`], [`Ladder`])              |
//! | both phases of an encoder at once      | [`QuadratureEvent::Lost`], and the count stays ([`Quadrature`], [`Detents`]) |
//! | a stuck key in a matrix                | the other keys go on; those that it makes ambiguous are held back as `doubtful` ([`Matrix`]) |
//! | a short between two rows of a matrix   | twin keys in the same columns of both rows ([`Matrix`])                      |
//! | both throws of a changeover made, or none for too long | a [`ChangeoverFault`], and the position stays                |
//! | a full mailbox                         | the events that were lost are counted, in their place of the order           |
//! | contacts in any position at power-up   | an initial position, told apart from an operation: [`Starting`], [`StartingBank`], and every `POWER_UP` |
//!
//! # Parameters
//! The `new` of a law is for constants: a bad one does not compile, and the compiler says why. `try_new` is for values
//! known at run time and links no panic.
//!
//! # Features
//! None is on by default; with none of them the crate has no dependencies.
//!
//! | feature              | adds                                                               |
//! |----------------------|--------------------------------------------------------------------|
//! | `defmt`              | `defmt::Format` for the public types                               |
//! | `embedded-hal`       | `DebouncedPin`, `DebouncedPins`, `PinPort`, `MatrixPins`: `InputPin` of embedded-hal 1.0 |
//! | `embedded-hal-async` | `DebouncedPin::next_report`, which sleeps until the line moves     |
//! | `mailbox`            | `Mailbox`, from interrupt to main loop                             |
//!
//! # Caution
//! Debouncing makes no input safe. Where a contact guards people or property (interlocks, limit switches of powered
//! machines, emergency stops, doors), use parts certified for it, assessed by qualified people under the local code.
#![doc = include_str!("../COST.md")]
#![no_std]
#![forbid(unsafe_code)]

mod analog;
mod bank;
mod chain;
mod changeover;
mod closed_form;
mod const_law;
mod count;
mod envelope;
mod error;
mod integrator;
mod law;
#[cfg(test)]
mod lost_ticks;
mod machine;
mod majority_register;
mod meaning;
pub mod proofs;
mod running;
mod shift_register;
mod starting;
mod state_machine;
mod still;
mod table;
mod time;
mod wiring;
#[cfg(test)]
mod words;

pub use analog::{
    AnalogSample, Chord, Hysteresis, HysteresisError, HysteresisState, Ladder, LadderError, LadderParts,
    LadderReading, Window,
};
pub use bank::{
    Bank, BankState, Changes, EdgeRule, Lane, LanesStarted, PatientBank, PatientState, PortLaw, StartingBank,
    StartingBankState, Word,
};
pub use chain::{Chain, ChainState};
pub use changeover::{Changeover, ChangeoverFault, ChangeoverReport, ChangeoverState, Throws};
pub use const_law::{Config, ConstLaw};
pub use count::Count;
pub use envelope::{Bounds, Clause, Envelope, Latency, PerChange, PerPosition, Verdict};
pub use error::{Parameter, ParameterError};
pub use integrator::{Integrator, IntegratorState};
pub use law::{Law, is_settled};
pub use machine::{Change, Machine, Position};
pub use majority_register::{MajorityRegister, MajorityRegisterState, WindowWord};
pub use meaning::{
    ContactPair, DetentState, Detents, Gesture, GestureError, GestureEvent, GestureState, GestureTicks,
    KeyDiodes, Matrix, MatrixReport, MatrixState, PairFault, PairKind, PairPositions, PairReport, PairState,
    Phases, PulseCounter, PulseEvent, PulseFlaw, PulseLimits, PulseLimitsError, PulseState, PulseTally,
    Quadrature, QuadratureEvent, QuadratureState, Resolution, RestPhases, Speed, SpeedState, TallyFull, Turn,
};
#[cfg(feature = "embedded-hal")]
pub use meaning::{MatrixPins, ScanError};
pub use running::Running;
pub use shift_register::{ShiftRegister, ShiftRegisterState};
pub use starting::{Started, Starting, StartingState};
pub use state_machine::{Phase, StateMachine, StateMachineParameters, StateMachineState};
pub use still::is_still;
pub use table::{TableLaw, TableLawError, TableState};
pub use time::{Period, TickClock};
pub use wiring::{
    Burst, Bursts, BurstsState, DebouncedPort, Heartbeat, Level, Monitor, MonitorState, Outside, Polarity,
    PortReader, Recorded, RecordedRun, Recorder, RecorderMode, RecorderText, Settling, Tally, TickFault,
    Wear,
};
#[cfg(feature = "embedded-hal")]
pub use wiring::{DebouncedPin, DebouncedPins, PinPort};
#[cfg(feature = "mailbox")]
pub use wiring::{Delivery, Mailbox};
