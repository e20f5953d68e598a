//! Every machine, over every input that fits it.

use core::fmt;
use core::hash::{Hash, Hasher};

use debounce_core::{
    Bank, Bursts, Chain, Changeover, ContactPair, Detents, EdgeRule, Envelope, Gesture, GestureTicks,
    Heartbeat, Hysteresis, Integrator, KeyDiodes, Ladder, LadderParts, Lane, Law, Machine, MajorityRegister,
    Matrix, Monitor, PairKind, PairPositions, PatientBank, Phases, Position, PulseCounter, PulseLimits,
    Quadrature, Resolution, RestPhases, ShiftRegister, Speed, Starting, StartingBank, StateMachine,
    StateMachineParameters, TableLaw, Throws,
};

use crate::digest::Digest;
use crate::inputs::{Dice, Line};
use crate::recording::Recording;
use crate::witnesses::{self, Row};

/// Samples of a law and an input.
const SAMPLES: u32 = 100_000;
/// Samples of any other machine.
const FEWER: u32 = 60_000;

struct Replay<'a> {
    say: &'a mut dyn FnMut(fmt::Arguments<'_>),
    /// What the line does at present.
    kind: &'static str,
    samples: u64,
    /// Samples of the prover's waveforms, each through the law it was found for.
    proved: u64,
}

impl Replay<'_> {
    fn run<M: Machine<State: Hash, Output: Hash>>(
        &mut self,
        name: &str,
        machine: &M,
        mut state: M::State,
        samples: u32,
        mut input: impl FnMut() -> M::Input,
    ) {
        let mut digest = Digest::new();
        for _ in 0..samples {
            machine.step(&mut state, input()).hash(&mut digest);
            state.hash(&mut digest);
        }
        self.samples += u64::from(samples);
        (self.say)(format_args!("{name}, {}: {:016x}", self.kind, digest.finish()));
    }

    fn law<L: Law<State: Hash>>(&mut self, name: &str, law: L) {
        for (mut line, kind) in lines() {
            self.kind = kind;
            self.run(name, &law, law.rest(Position::Open), SAMPLES, || line.sample());
            let starting = Starting::new(&law);
            self.run("the same, started", &starting, starting.power_up(), FEWER, || line.sample());
        }
        let (samples, digest) = witnesses::replayed(name, &law);
        if samples > 0 {
            self.proved += samples;
            (self.say)(format_args!("{name}, as proved over {samples} samples: {digest:016x}"));
        }
    }

    fn line<M: Machine<Input = Position, State: Hash, Output: Hash>>(
        &mut self,
        name: &str,
        machine: M,
        state: M::State,
    ) {
        for (mut line, kind) in lines() {
            self.kind = kind;
            self.run(name, &machine, state, FEWER, || line.sample());
        }
    }
}

fn lines() -> [(Line, &'static str); 5] {
    [
        (Line::Random(Dice::new()), "random"),
        (Line::Contact { dice: Dice::new(), held: Position::Open, left: 0 }, "contact"),
        (Line::Recorded(Recording::sampled(1_000)), "recorded, every ms"),
        (Line::Recorded(Recording::sampled(50)), "recorded, every 50 us"),
        (Line::Proved(Row::new()), "waveforms of the prover"),
    ]
}

/// A logic of three states as a table: two closed samples in a row make, one open sample breaks.
static ROWS: [[u8; 2]; 3] = [[0, 1], [0, 2], [0, 2]];

pub(crate) fn all(say: &mut dyn FnMut(fmt::Arguments<'_>)) -> u64 {
    let mut replay = Replay { say, kind: "", samples: 0, proved: 0 };
    laws(&mut replay);
    assert_eq!(replay.proved, witnesses::samples(), "a waveform names a law that is not replayed");
    banks(&mut replay);
    meaning(&mut replay);
    replay.samples
}

fn laws(replay: &mut Replay<'_>) {
    replay.law("integrator u8", Integrator::<u8>::new(9));
    replay.law("integrator u16", Integrator::<u16>::with_steps(300, 40, 70));
    replay.law("shift register", ShiftRegister::new(8));
    replay.law("majority register u8", MajorityRegister::<u8>::new(5, 8));
    replay.law("majority register u16", MajorityRegister::<u16>::new(9, 13));
    replay.law("majority register u32", MajorityRegister::<u32>::new(20, 32));
    replay.law("state machine u8", StateMachine::<u8>::new(StateMachineParameters::confirm(6, 4)));
    let patient = StateMachineParameters::confirm(3, 4).patience(4, 3).lockout(6, 3);
    replay.law("patient state machine u8", StateMachine::<u8>::new(patient));
    let patient = StateMachineParameters::confirm(3, 4).patience(4, 3).lockout(6, 3);
    replay.law("patient state machine u16", StateMachine::<u16>::new(patient));
    let chain = Chain::new(
        MajorityRegister::<u8>::new(2, 3),
        StateMachine::<u8>::new(StateMachineParameters::confirm(3, 3)),
    );
    replay.law("chain", chain);
    replay.law("table", TableLaw::new(&ROWS, 2, [0, 2]));
    replay.law("lane of a bank", Lane::new(Bank::<u8, 3>::new(0)));
}

fn banks(replay: &mut Replay<'_>) {
    for (line, kind) in lines() {
        replay.kind = kind;
        let mut one = line.clone();
        let bank = Bank::<u8, 2>::new(0xa5);
        replay.run("bank u8", &bank, bank.all_open(), FEWER, || one.word(8) as u8);
        let mut one = line.clone();
        let bank = Bank::<u32, 3>::new(0xffff_0000);
        replay.run("bank u32", &bank, bank.all_open(), FEWER / 4, || one.word(32));
        let mut one = line.clone();
        let bank = Bank::<u64, 1>::new(1);
        replay.run("bank u64", &bank, bank.all_open(), FEWER / 4, || {
            u64::from(one.word(32)) << 32 | u64::from(one.word(32))
        });
        let mut one = line.clone();
        let rule = EdgeRule::new(3).patience(3).lockout(4);
        let bank = PatientBank::<u16, 2, 2, 3>::new(0x0f0f, rule, EdgeRule::new(4));
        replay.run("patient bank u16", &bank, bank.all_open(), FEWER / 4, || one.word(16) as u16);
        let mut one = line.clone();
        let bank = StartingBank::<_, 2>::new(Bank::<u8, 2>::new(0));
        replay.run("starting bank u8", &bank, bank.power_up(), FEWER, || one.word(8) as u8);
        let mut one = line;
        let pad = Matrix::<u8, 4, 2>::new(KeyDiodes::None);
        replay.run("matrix", &pad, pad.power_up(), FEWER / 4, || {
            [one.word(3) as u8, one.word(3) as u8, one.word(3) as u8, one.word(3) as u8]
        });
    }
}

fn meaning(replay: &mut Replay<'_>) {
    let gesture = Gesture::new(GestureTicks { gap: 12, hold: 50, repeat: 9, most_taps: 4 });
    replay.line("gesture", gesture, Gesture::POWER_UP);
    let pulses = PulseCounter::new(PulseLimits { shortest_closed: 3, longest_closed: 90, shortest_open: 2 });
    replay.line("pulse counter", pulses, PulseCounter::POWER_UP);
    replay.line("bursts", Bursts::new(5), Bursts::POWER_UP);
    let envelope = Envelope::clean(40, 30).bounce(4, 6).glitch(1, 2).quiet(9).calm(1);
    let monitor = Monitor::new(&envelope).stuck_after(512, 256);
    replay.line("monitor", monitor, monitor.power_up());
    for (line, kind) in lines() {
        replay.kind = kind;
        let phases = |line: &mut Line| Phases { a: line.sample(), b: line.sample() };
        for (name, resolution) in [
            ("quadrature x1", Resolution::X1),
            ("quadrature x2", Resolution::X2),
            ("quadrature x4", Resolution::X4),
        ] {
            let mut one = line.clone();
            replay.run(name, &Quadrature::new(resolution), Quadrature::POWER_UP, FEWER, || phases(&mut one));
        }
        let mut one = line.clone();
        replay.run("detents", &Detents::new(RestPhases::BothOpen), Detents::POWER_UP, FEWER, || {
            phases(&mut one)
        });
        let (mut one, knob, mut turned) =
            (line.clone(), Quadrature::new(Resolution::X4), Quadrature::POWER_UP);
        replay.run("speed", &Speed::new(100), Speed::POWER_UP, FEWER, || {
            knob.step(&mut turned, phases(&mut one))
        });
        let mut one = line.clone();
        replay.run("changeover", &Changeover::new(20, 1), Changeover::POWER_UP, FEWER, || Throws {
            resting: one.sample(),
            working: one.sample(),
        });
        for (name, kind) in
            [("equivalent pair", PairKind::Equivalent), ("antivalent pair", PairKind::Antivalent)]
        {
            let mut one = line.clone();
            replay.run(name, &ContactPair::new(kind, 6), ContactPair::POWER_UP, FEWER, || PairPositions {
                first: one.sample(),
                second: one.sample(),
            });
        }
    }
    replay.kind = "random";
    let mut dice = Dice::new();
    let mut ticks = 0_u32;
    replay.run("heartbeat", &Heartbeat::new(5), Heartbeat::POWER_UP, FEWER, || {
        ticks = ticks.wrapping_add(dice.roll() >> 29);
        ticks
    });
    let pedal = Hysteresis::new(300, 700, 8, 1015);
    replay.run("hysteresis", &pedal, Hysteresis::POWER_UP, FEWER, || (dice.roll() >> 22) as u16);
    let ladder = Ladder::<3>::new(&LadderParts {
        pull_up_ohms: 10_000,
        key_ohms: [0, 3_300, 10_000],
        tolerance_ppm: 50_000,
        adc_bits: 10,
        slack_counts: 8,
    });
    replay.run("ladder", &ladder, (), FEWER, || (dice.roll() >> 22) as u16);
}
