//! Both worlds tied together: what holds in samples holds in time.
//!
//! Traces are drawn in time, anywhere inside an envelope in time, and sampled at any phase, with tolerance, jitter
//! and lost ticks. The samples must lie inside the envelope in samples that `in_ticks` answers, and the delays in
//! nanoseconds inside what the proof of a law and the clock together promise.

use std::collections::BTreeSet;
use std::hash::Hash;

use debounce_core::{
    Change, Envelope, Law, MajorityRegister, PerChange, PerPosition, Period, ShiftRegister, StateMachine,
    TickClock,
};
use harness::envelope::PhysicalEnvelope;
use harness::prove::{Environment, prove};
use harness::strategy::{Wave, Waves};
use integration_tests::predicate::{Letter, is_legal};
use proptest::test_runner::{Config, RngSeed, TestCaseError, TestError, TestRunner};
use rand::SeedableRng;
use rand::rngs::ChaCha8Rng;

const US: u64 = 1_000;
const SEED: u64 = 20_261;

/// In microseconds: dwell open and closed, bounce at make and break, glitch open and closed, quiet, calm.
const fn physical(
    dwell: [u64; 2],
    bounce: [u64; 2],
    glitch: [u64; 2],
    quiet: u64,
    calm: u64,
) -> PhysicalEnvelope {
    PhysicalEnvelope {
        dwell_ns: PerPosition { open: dwell[0] * US, closed: dwell[1] * US },
        bounce_ns: PerChange { make: bounce[0] * US, break_: bounce[1] * US },
        glitch_ns: PerPosition { open: glitch[0] * US, closed: glitch[1] * US },
        quiet_ns: quiet * US,
        calm_ns: calm * US,
    }
}

const PHYSICAL: [PhysicalEnvelope; 9] = [
    physical([20_000, 20_000], [0, 0], [0, 0], 0, 0),
    physical([20_000, 16_500], [3_000, 1_200], [0, 0], 0, 0),
    physical([24_000, 24_000], [2_000, 3_000], [1_000, 1_000], 6_000, 0),
    physical([24_000, 20_000], [1_700, 900], [1_999, 1_999], 5_500, 0),
    physical([30_000, 30_000], [500, 0], [3_000, 500], 6_000, 0),
    physical([30_000, 30_000], [0, 400], [0, 2_500], 7_000, 0),
    physical([30_000, 30_000], [0, 0], [900, 900], 5_000, 3_000),
    physical([30_000, 26_000], [2_000, 1_000], [1_500, 2_500], 7_000, 6_000),
    physical([5_000, 5_000], [4_000, 2_000], [400, 400], 4_100, 0),
];

fn clocks() -> [TickClock; 5] {
    let ms = TickClock::new(Period::from_ms(1));
    [
        ms,
        ms.tolerance_ppm(50_000).jitter_ns(100 * US),
        ms.jitter_ns(900 * US).tolerance_ppm(10),
        TickClock::new(Period::from_hz(700)).tolerance_ppm(100_000).jitter_ns(300 * US).lost(1),
        ms.tolerance_ppm(20_000).lost(2),
    ]
}

/// Every pair of envelope and clock in which a logic can be proved at all.
fn pairs() -> Vec<(PhysicalEnvelope, TickClock, Envelope)> {
    let mut pairs = Vec::new();
    for physical in PHYSICAL {
        for clock in clocks() {
            if let Ok(envelope) = physical.in_ticks(&clock)
                && Environment::of(&envelope).is_ok()
            {
                pairs.push((physical, clock, envelope));
            }
        }
    }
    pairs
}

fn waves(physical: &PhysicalEnvelope, clock: &TickClock, cases: u64) -> impl Iterator<Item = Wave> {
    let waves = Waves::of(physical, clock).expect("a sound clock");
    let mut rng = ChaCha8Rng::seed_from_u64(SEED);
    (0..cases).map(move |_| waves.draw(&mut rng))
}

/// Whether some way through the automaton explains the samples.
fn is_inside(environment: &Environment, wave: &Wave) -> bool {
    let mut at = BTreeSet::from([environment.start(wave.trace.initial())]);
    for taken in wave.delivered() {
        let branches = at.iter().flat_map(|&state| environment.branches(state));
        at = branches
            .filter(|branch| branch.sample() == taken.sample)
            .map(|branch| branch.target())
            .filter(|&target| environment.state(target).contact == taken.contact)
            .collect();
    }
    !at.is_empty()
}

#[test]
fn samples_of_any_trace_in_an_envelope_in_time_are_in_the_envelope_in_samples() {
    let pairs = pairs();
    assert_eq!(pairs.len(), 45);
    for (physical, clock, envelope) in pairs {
        let environment = Environment::of(&envelope).unwrap();
        for wave in waves(&physical, &clock, 1_500) {
            assert!(is_inside(&environment, &wave), "{physical:?}\n{clock:?}\n{envelope:?}\n{wave:?}");
        }
    }
}

#[test]
fn samples_of_short_traces_are_legal_by_the_separate_predicate() {
    for (physical, clock, envelope) in pairs() {
        for wave in waves(&physical, &clock, 150) {
            let word: Vec<Letter> =
                wave.delivered().map(|taken| (taken.contact, taken.sample)).take(24).collect();
            assert!(is_legal(&word, wave.trace.initial(), &envelope), "{envelope:?}\n{wave:?}");
        }
    }
}

/// The rounding cannot be made any tighter: with any number of the envelope off by one, some samples lie outside.
#[test]
fn samples_leave_an_envelope_that_is_tighter_by_one_in_any_number() {
    let clocks = [
        TickClock::new(Period::from_ms(1)),
        TickClock::new(Period::from_ms(1)).tolerance_ppm(50_000).jitter_ns(100 * US),
    ];
    let physical = physical([12_500, 10_500], [2_300, 1_400], [1_300, 1_300], 4_500, 0);
    for clock in clocks {
        let e = physical.in_ticks(&clock).expect("quiet is seen");
        let tighter = [
            e.bounce(e.bounce.make - 1, e.bounce.break_),
            e.bounce(e.bounce.make, e.bounce.break_ - 1),
            e.glitch(e.glitch.open - 1, e.glitch.closed),
            e.glitch(e.glitch.open, e.glitch.closed - 1),
            e.quiet(e.quiet + 1),
            with_dwell(e, 1, 0),
            with_dwell(e, 0, 1),
        ];
        for (which, envelope) in tighter.into_iter().enumerate() {
            let environment = Environment::of(&envelope).unwrap();
            let leaves = waves(&physical, &clock, 20_000).any(|wave| !is_inside(&environment, &wave));
            assert!(leaves, "tighter number {which} of {e:?} at {clock:?}");
        }
    }
}

fn with_dwell(mut envelope: Envelope, open: u32, closed: u32) -> Envelope {
    envelope.dwell.open += open;
    envelope.dwell.closed += closed;
    envelope
}

#[test]
fn shrinking_a_trace_leaves_the_one_pulse_that_matters() {
    // Fooled by a contrary sample while the contact stays open.
    let envelope = physical([30_000, 30_000], [2_000, 1_000], [1_500, 2_500], 7_000, 0);
    let clock = TickClock::new(Period::from_ms(1)).tolerance_ppm(50_000).jitter_ns(100 * US);
    let is_fooled =
        |wave: &Wave| wave.truth.is_empty() && wave.delivered().any(|taken| taken.sample != taken.contact);
    for seed in 0..4 {
        let rng_seed = RngSeed::Fixed(seed);
        let config = Config { failure_persistence: None, cases: 5_000, rng_seed, ..Config::default() };
        let outcome = TestRunner::new(config).run(&Waves::of(&envelope, &clock).unwrap(), |wave| {
            if is_fooled(&wave) { Err(TestCaseError::fail("fooled")) } else { Ok(()) }
        });
        let Err(TestError::Fail(_, wave)) = outcome else { panic!("it must fail: {outcome:?}") };
        assert!(is_fooled(&wave), "{wave:?}");
        // One pulse is left, or its begin alone where the trace ends in it, and hardly a tick but the one it fools.
        assert!(wave.trace.edges().len() <= 2 && wave.samples.len() <= 2, "{wave:?}");
    }
}

/// Replays waves through a proven law; says how many changes it reported.
fn delays_are_kept<L: Law>(
    law: &L,
    physical: &PhysicalEnvelope,
    clock: &TickClock,
    envelope: &Envelope,
) -> u64
where
    L::State: Hash,
{
    let Some(bounds) = prove(law, envelope).expect("a sound law and envelope").bounds() else { return 0 };
    let promised = |change: Change| {
        let latency = bounds.latency.at(change);
        (clock.delay_ns(latency.best).0, clock.delay_ns(latency.worst).1)
    };
    let mut reported = 0;
    for wave in waves(physical, clock, 300) {
        let mut state = law.rest(wave.trace.initial());
        let mut unreported = wave.truth.iter();
        for taken in wave.delivered() {
            let Some(edge) = law.step(&mut state, taken.sample) else { continue };
            let change = unreported.next().expect("no false edge");
            assert_eq!(change.change, edge, "{wave:?}");
            let delay = wave.delay_units(change, taken).expect("no edge before its change");
            let (least, below) = promised(edge);
            let inside = u128::from(least) * wave.units_per_ns() <= delay
                && delay < u128::from(below) * wave.units_per_ns();
            assert!(
                inside,
                "{edge:?} after {} ns, promised {least} to {below} ns\n{wave:?}",
                delay / wave.units_per_ns()
            );
            reported += 1;
        }
        // What is still unreported at the end must not be overdue.
        if let Some(change) = unreported.next() {
            let below = promised(change.change).1;
            assert!(wave.trace.end_ns() - change.at_ns < below, "{change:?} is overdue\n{wave:?}");
        }
    }
    reported
}

#[test]
fn delays_of_any_trace_are_inside_the_proven_milliseconds() {
    let mut reported = [0; 3];
    for (physical, clock, envelope) in pairs() {
        if let Ok(machine) = StateMachine::<u8>::for_envelope(&envelope) {
            reported[0] += delays_are_kept(&machine, &physical, &clock, &envelope);
        }
        reported[1] += delays_are_kept(&ShiftRegister::new(5), &physical, &clock, &envelope);
        reported[2] += delays_are_kept(&MajorityRegister::<u8>::new(4, 7), &physical, &clock, &envelope);
    }
    assert!(reported.iter().all(|&changes| changes > 1_000), "{reported:?}");
}
