//! Analog fronts, change-over contacts, and what positions mean.

use debounce_core::{
    AnalogSample, Changeover, ChangeoverFault, ChangeoverReport, ChangeoverState, Chord, ContactPair,
    DetentState, Detents, Gesture, GestureError, GestureEvent, GestureState, GestureTicks, Hysteresis,
    HysteresisError, HysteresisState, KeyDiodes, Ladder, LadderError, LadderParts, LadderReading, Machine,
    Matrix, MatrixReport, MatrixState, PairFault, PairKind, PairPositions, PairReport, PairState, Phases,
    PulseCounter, PulseEvent, PulseFlaw, PulseLimits, PulseLimitsError, PulseState, PulseTally, Quadrature,
    QuadratureEvent, QuadratureState, Resolution, RestPhases, Speed, SpeedState, TallyFull, Throws, Turn,
    Window,
};

use crate::image::{any, any_u8, any_u16, keep};
use crate::{drive, position};

pub(crate) fn all() {
    analog();
    changeover();
    gesture();
    encoder();
    pulses();
    pair();
    matrix();
}

fn analog() {
    match Hysteresis::try_new(any_u16(), any_u16(), any_u16(), any_u16()) {
        Ok(pedal) => {
            let mut state: HysteresisState = Hysteresis::POWER_UP;
            let sample: AnalogSample = pedal.step(&mut state, any_u16());
            keep(&sample.sample());
            drive(&pedal, state, any_u16);
        }
        Err(error) => {
            let error: HysteresisError = error;
            keep(&error);
        }
    }
    let parts = LadderParts {
        pull_up_ohms: any(),
        key_ohms: [any(), any(), any()],
        tolerance_ppm: any(),
        adc_bits: any_u8(),
        slack_counts: any_u16(),
    };
    let chord: Option<Chord> = parts.chord_alias();
    keep(&chord);
    match Ladder::try_new(&parts) {
        Ok(ladder) => {
            let reading: LadderReading = ladder.step(&mut (), any_u16());
            let idle: Window = ladder.idle();
            keep(&(reading.port(), idle.holds(any_u16())));
            drive(&ladder, (), any_u16);
        }
        Err(error) => {
            let error: LadderError = error;
            keep(&error);
        }
    }
}

fn changeover() {
    let lever = Changeover::new(any_u16(), any_u16());
    let throws = || Throws { resting: position(), working: position() };
    let mut state: ChangeoverState = Changeover::POWER_UP;
    let report: ChangeoverReport = lever.step(&mut state, throws());
    let fault: Option<ChangeoverFault> = report.fault;
    keep(&(fault, state.position()));
    drive(&lever, state, throws);
}

fn gesture() {
    let ticks = GestureTicks { gap: any_u16(), hold: any_u16(), repeat: any_u16(), most_taps: any_u8() };
    match Gesture::try_new(ticks) {
        Ok(gesture) => {
            let mut state: GestureState = Gesture::POWER_UP;
            let event: Option<GestureEvent> = gesture.step(&mut state, position());
            keep(&event);
            drive(&gesture, state, position);
        }
        Err(error) => {
            let error: GestureError = error;
            keep(&error);
        }
    }
}

fn encoder() {
    let phases = || Phases { a: position(), b: position() };
    for resolution in [Resolution::X1, Resolution::X2, Resolution::X4] {
        let state: QuadratureState = Quadrature::POWER_UP;
        drive(&Quadrature::new(resolution), state, phases);
    }
    let detents: DetentState = Detents::POWER_UP;
    drive(&Detents::new(RestPhases::BothOpen), detents, phases);
    let event = || match any() & 3 {
        0 => Some(QuadratureEvent::Step(Turn::Forward)),
        1 => Some(QuadratureEvent::Step(Turn::Backward)),
        2 => Some(QuadratureEvent::Lost),
        _ => None,
    };
    if let Ok(speed) = Speed::try_new(any_u16()) {
        let state: SpeedState = Speed::POWER_UP;
        keep(&speed.per_second(any_u16() as i16, any_u16().into()));
        drive(&speed, state, event);
    }
}

fn pulses() {
    let limits =
        PulseLimits { shortest_closed: any_u16(), longest_closed: any_u16(), shortest_open: any_u16() };
    match PulseCounter::try_new(limits) {
        Ok(counter) => {
            let mut state: PulseState = PulseCounter::POWER_UP;
            let mut tally = PulseTally::default();
            let event: Option<PulseEvent> = counter.step(&mut state, position());
            if let Some(event) = event {
                let full: Result<(), TallyFull> = tally.record(event);
                keep(&full);
                if let PulseEvent::Refused(flaw) = event {
                    let flaw: PulseFlaw = flaw;
                    keep(&flaw);
                }
            }
            keep(&(tally.counted(), tally.refused(), PulseCounter::per_hour(any_u16(), any())));
            drive(&counter, state, position);
        }
        Err(error) => {
            let error: PulseLimitsError = error;
            keep(&error);
        }
    }
}

fn pair() {
    let positions = || PairPositions { first: position(), second: position() };
    for kind in [PairKind::Equivalent, PairKind::Antivalent] {
        let lid = ContactPair::new(kind, any_u16());
        let mut state: PairState = ContactPair::POWER_UP;
        let report: PairReport = lid.step(&mut state, positions());
        let fault: Option<PairFault> = report.fault;
        keep(&fault);
        drive(&lid, state, positions);
    }
}

fn matrix() {
    for diodes in [KeyDiodes::None, KeyDiodes::Everywhere] {
        let pad = Matrix::<u8, 4, 2>::new(diodes);
        let rows = || [any_u8(), any_u8(), any_u8(), any_u8()];
        let mut state: MatrixState<u8, 4, 2> = pad.power_up();
        let report: MatrixReport<u8, 4> = pad.step(&mut state, rows());
        keep(&(report.doubtful, pad.closed(&state), pad.is_settled(&state, rows())));
        drive(&pad, state, rows);
    }
}
