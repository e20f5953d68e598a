//! What gives positions a meaning and what stands around a law: one step and the look at what it says.

use debounce_core::{
    Bank, Bursts, Change, Changeover, ContactPair, Delivery, Detents, Envelope, Gesture, GestureTicks,
    Heartbeat, Hysteresis, Integrator, KeyDiodes, Ladder, LadderParts, LadderReading, Machine, Mailbox,
    Matrix, MatrixReport, Monitor, PairKind, PairPositions, Phases, Position, PulseCounter, PulseLimits,
    Quadrature, QuadratureEvent, Recorder, RecorderMode, Resolution, RestPhases, Speed, Starting,
    StartingBank, Tally, Throws, Wear,
};
use rig::Counter;

use crate::measure::{Feed, look_at, measure, next};

/// Steps: inlined into the loop, and as a function that the loop calls. What a step says goes to a function where the
/// condition holds, as a program would look at it.
macro_rules! machines {
    ($($name:ident: $sample:ty, $state:ty = $start:expr,
        |$now:ident, $read:ident| $step:expr, |$said:ident| $if:expr;)*) => {$(
        mod $name {
            use super::*;

            type State = $state;

            #[inline(always)]
            fn once($now: &mut State, $read: $sample) {
                let $said = $step;
                if $if {
                    look_at((&raw const $said).cast());
                }
            }

            // Its size is the flash that the step takes; the name is how it is found.
            #[unsafe(export_name = concat!("cost_rust_", stringify!($name), "_step"))]
            #[inline(never)]
            fn step(state: &mut State, sample: $sample) {
                once(state, sample);
            }

            #[inline(never)]
            unsafe extern "C" fn inlined(feed: *mut Feed, state: *mut State) {
                // SAFETY: the caller gives a feed with room for the notes, and a state.
                while let Some(place) = unsafe { next(feed) } {
                    // SAFETY: the same.
                    unsafe { once(&mut *state, *place) };
                }
            }

            #[inline(never)]
            unsafe extern "C" fn called(feed: *mut Feed, state: *mut State) {
                // SAFETY: the caller gives a feed with room for the notes, and a state.
                while let Some(place) = unsafe { next(feed) } {
                    // SAFETY: the same.
                    unsafe { step(&mut *state, *place) };
                }
            }

            pub(super) fn measured(counter: &Counter) {
                let (name, start) = (stringify!($name), || $start);
                measure::<$sample, _>(counter, format_args!("{name} rust inlined"), start, inlined);
                measure::<$sample, _>(counter, format_args!("{name} rust called"), start, called);
            }
        }
    )*

    /// Measures all of them, one row each.
    pub(crate) fn all(counter: &Counter) {$(
        $name::measured(counter);
    )*}};
}

const GESTURE: Gesture = Gesture::new(GestureTicks { gap: 12, hold: 50, repeat: 9, most_taps: 4 });
const PULSES: PulseCounter =
    PulseCounter::new(PulseLimits { shortest_closed: 3, longest_closed: 200, shortest_open: 2 });
const BURSTS: Bursts = Bursts::new(5);
const MONITOR: Monitor =
    Monitor::new(&Envelope::clean(40, 30).bounce(4, 6).glitch(1, 2).quiet(9).calm(1)).stuck_after(512, 256);
const PAD: Matrix<u8, 4, 2> = Matrix::new(KeyDiodes::None);
const KEYS: Ladder<3> = Ladder::new(&LadderParts {
    pull_up_ohms: 10_000,
    key_ohms: [0, 3_300, 10_000],
    tolerance_ppm: 50_000,
    adc_bits: 12,
    slack_counts: 8,
});
const STARTING: Starting<Integrator> = Starting::new(Integrator::<u8>::new(16));
const STARTING_BANK: StartingBank<Bank<u32, 2>, 2> = StartingBank::new(Bank::new(u32::MAX));

/// Filled by the interrupt and emptied by the main loop; here both in one tick.
static EDGES: Mailbox<Change, 4> = Mailbox::new();

fn handed_over(sample: Position) -> Option<Delivery<Change>> {
    if sample.is_closed() && EDGES.post(Change::Make).is_err() {
        return None;
    }
    EDGES.take()
}

fn moved(report: &MatrixReport<u8, 4>) -> bool {
    report.rows.iter().any(|row| row.initial != 0 || !row.changes.is_none())
}

machines! {
    starting: Position, <Starting<Integrator> as Machine>::State = STARTING.power_up(),
        |state, sample| STARTING.step(state, sample), |said| said.is_some();
    starting_bank: u32, <StartingBank<Bank<u32, 2>, 2> as Machine>::State = STARTING_BANK.power_up(),
        |state, port| STARTING_BANK.step(state, port), |said| said.initial != 0 || !said.changes.is_none();
    gesture: Position, <Gesture as Machine>::State = Gesture::POWER_UP,
        |state, sample| GESTURE.step(state, sample), |said| said.is_some();
    pulse_counter: Position, <PulseCounter as Machine>::State = PulseCounter::POWER_UP,
        |state, sample| PULSES.step(state, sample), |said| said.is_some();
    quadrature: Phases, <Quadrature as Machine>::State = Quadrature::POWER_UP,
        |state, phases| Quadrature::new(Resolution::X4).step(state, phases), |said| said.is_some();
    detents: Phases, <Detents as Machine>::State = Detents::POWER_UP,
        |state, phases| Detents::new(RestPhases::BothOpen).step(state, phases), |said| said.is_some();
    speed: Option<QuadratureEvent>, <Speed as Machine>::State = Speed::POWER_UP,
        |state, event| Speed::new(100).step(state, event), |said| said.is_some();
    changeover: Throws, <Changeover as Machine>::State = Changeover::POWER_UP,
        |state, throws| Changeover::new(20, 1).step(state, throws),
        |said| said.edge.is_some() || said.fault.is_some();
    contact_pair: PairPositions, <ContactPair as Machine>::State = ContactPair::POWER_UP,
        |state, positions| ContactPair::new(PairKind::Equivalent, 6).step(state, positions),
        |said| said.edge.is_some() || said.fault.is_some();
    matrix_of_16_keys: [u8; 4], <Matrix<u8, 4, 2> as Machine>::State = PAD.power_up(),
        |state, rows| PAD.step(state, rows), |said| moved(&said);
    hysteresis: u16, <Hysteresis as Machine>::State = Hysteresis::POWER_UP,
        |state, counts| Hysteresis::new(1200, 2800, 32, 4060).step(state, counts),
        |said| said.sample().is_none();
    ladder_of_3_keys: u16, () = (),
        |state, counts| KEYS.step(state, counts), |said| said != LadderReading::Idle;
    bursts_and_wear: Position, (<Bursts as Machine>::State, Wear) = (Bursts::POWER_UP, Wear::NEW),
        |state, sample| {
            let burst = BURSTS.step(&mut state.0, sample);
            if let Some(burst) = &burst {
                state.1.record(burst);
            }
            burst
        },
        |said| said.is_some();
    monitor: Position, <Monitor as Machine>::State = MONITOR.power_up(),
        |state, sample| MONITOR.step(state, sample), |said| said.is_some();
    heartbeat_and_tally: Position, (u32, <Heartbeat as Machine>::State, Tally) =
        (0, Heartbeat::POWER_UP, Tally::NEW),
        |state, sample| {
            // The count of ticks goes on while the line is open.
            state.0 = state.0.wrapping_add(u32::from(!sample.is_closed()));
            let fault = Heartbeat::new(1).step(&mut state.1, state.0);
            if let Some(fault) = fault {
                state.2.count_tick_fault(fault);
            }
            fault
        },
        |said| said.is_some();
    recorder_of_64_runs: Position, Recorder<64> = Recorder::new(RecorderMode::Ring),
        |state, sample| state.sample(sample), |said| { let () = said; false };
    mailbox_post_and_take: Position, () = (),
        |_state, sample| handed_over(sample), |said| said.is_some();
}
