//! The state machine against a model that looks back, the published four states, and its limits.

extern crate std;

use std::vec::Vec;

use super::{Phase, StateMachine, StateMachineParameters, StateMachineState};
use crate::words::{assert_same, row, words};
use crate::{Change, Count, Envelope, Law, Machine, Parameter, ParameterError, PerChange, Position, Running};

/// Looks back over all samples since the lock-out of the last change, and counts the contrary ones that came
/// after the last run of `patience` agreeing samples.
fn looking_back(
    start: Position,
    parameters: StateMachineParameters,
) -> impl FnMut(Position) -> Position + Clone {
    let mut output = start;
    let mut locked = 0;
    let mut heard = Vec::new();
    move |sample| {
        if locked > 0 {
            locked -= 1;
            return output;
        }
        heard.push(sample != output);
        let change = output.opposite().reached_by();
        let patience = usize::from(parameters.patience.at(change));
        let cleared = (patience..=heard.len())
            .rev()
            .find(|&end| heard[end - patience..end].iter().all(|&contrary| !contrary));
        let seen = heard[cleared.unwrap_or(0)..].iter().filter(|&&contrary| contrary).count();
        if seen >= parameters.confirm.at(change).into() {
            output = output.opposite();
            locked = parameters.lockout.at(change);
            heard.clear();
        }
        output
    }
}

fn all(least: u8, most: u8) -> impl Iterator<Item = PerChange<u8>> {
    (least..=most).flat_map(move |make| (least..=most).map(move |break_| PerChange { make, break_ }))
}

fn wide(pair: PerChange<u8>) -> PerChange<u16> {
    PerChange { make: pair.make.into(), break_: pair.break_.into() }
}

#[test]
fn state_machine_every_word_equals_looking_back() {
    let mut compared = 0;
    for confirm in all(1, 3) {
        for patience in all(1, 3) {
            for lockout in all(0, 3) {
                let parameters = StateMachineParameters { confirm, patience, lockout };
                let model = |start| looking_back(start, parameters);
                assert_same(&StateMachine::<u8>::new(parameters), 9, model);
                let parameters = StateMachineParameters {
                    confirm: wide(confirm),
                    patience: wide(patience),
                    lockout: wide(lockout),
                };
                assert_same(&StateMachine::<u16>::new(parameters), 7, model);
                compared += 1;
            }
        }
    }
    assert_eq!(compared, 9 * 9 * 16);
}

#[test]
fn state_machine_every_long_word_equals_looking_back() {
    for parameters in [
        StateMachineParameters::confirm(2, 4).patience(3, 2).lockout(2, 1),
        StateMachineParameters::confirm(4, 1).patience(2, 4).lockout(0, 5),
        StateMachineParameters::confirm(1, 1).lockout(4, 3),
        StateMachineParameters::confirm(5, 3).patience(4, 4),
    ] {
        assert_same(&StateMachine::<u8>::new(parameters), 13, |start| looking_back(start, parameters));
    }
}

/// Source: the four states off, off-seen-on, on, on-seen-off of the Virginia Tech embedded systems course,
/// "Debouncing alternative": a second sample confirms, any other sample goes back.
#[test]
fn state_machine_confirm_two_has_the_published_four_states() {
    let table = |phase, sample| match (phase, sample) {
        (Phase::Open | Phase::Closing | Phase::Opening, Position::Open) => Phase::Open,
        (Phase::Open, Position::Closed) => Phase::Closing,
        (Phase::Closed, Position::Open) => Phase::Opening,
        (Phase::Closed | Phase::Closing | Phase::Opening, Position::Closed) => Phase::Closed,
    };
    let law = StateMachine::<u8>::new(StateMachineParameters::confirm(2, 2));
    for word in words(12) {
        let (mut state, mut expected) = (law.rest(Position::Open), Phase::Open);
        for &sample in &word {
            let _ = law.step(&mut state, sample);
            expected = table(expected, sample);
            assert_eq!(law.phase(&state), expected, "{}", row(&word));
        }
    }
}

/// Source: the variant beside it, which reports the first sample and then waits without looking.
#[test]
fn state_machine_lock_out_alone_waits_without_looking() {
    const WAIT: usize = 4;
    let law = StateMachine::<u8>::new(StateMachineParameters::confirm(1, 1).lockout(WAIT as u8, WAIT as u8));
    for ignored in words(WAIT) {
        let mut running = Running::new(law, Position::Open);
        assert_eq!(running.tick(Position::Closed), Some(Change::Make));
        for (passed, &sample) in ignored.iter().enumerate() {
            assert_eq!(usize::from(running.state().locked_out()), WAIT - passed);
            assert_eq!(running.state().phase(), Phase::Closed);
            assert_eq!(running.tick(sample), None);
        }
        assert_eq!(running.state().locked_out(), 0);
        assert_eq!(running.tick(Position::Open), Some(Change::Break));
    }
}

#[test]
fn state_machine_patience_keeps_a_count_over_fewer_agreeing_samples() {
    let line = [1, 0, 0, 1, 0, 0, 1].map(|bit| Position::closed_if(bit == 1));
    let made = |patience| {
        let parameters = StateMachineParameters::confirm(3, 3).patience(patience, 1);
        let mut running = Running::new(StateMachine::<u8>::new(parameters), Position::Open);
        line.map(|sample| running.tick(sample)).last().copied().flatten()
    };
    assert_eq!([1, 2, 3].map(made), [None, None, Some(Change::Make)]);
}

#[track_caller]
fn widest<C: Count>(law: StateMachine<C>, ticks: u32) {
    let mut running = Running::new(law, Position::Open);
    for sample in [Position::Closed, Position::Open] {
        for _ in 1..ticks {
            assert_eq!(running.tick(sample), None);
        }
        assert_eq!(running.tick(sample), Some(sample.reached_by()));
        for _ in 0..ticks {
            assert!(!running.is_settled());
            assert_eq!(running.tick(sample.opposite()), None);
        }
        assert!(running.is_settled());
    }
}

#[test]
fn state_machine_counts_at_the_end_of_their_width_still_serve() {
    let (narrow, wide) = (u8::MAX, u16::MAX);
    let parameters = StateMachineParameters::confirm(narrow, narrow);
    widest(
        StateMachine::<u8>::new(parameters.patience(narrow, narrow).lockout(narrow, narrow)),
        narrow.into(),
    );
    let parameters = StateMachineParameters::confirm(wide, wide);
    widest(StateMachine::<u16>::new(parameters.patience(wide, wide).lockout(wide, wide)), wide.into());
}

#[test]
fn state_machine_any_state_whatever_finds_the_line_again() {
    let law = StateMachine::<u8>::new(StateMachineParameters::confirm(3, 2).patience(2, 4).lockout(5, 6));
    for output in Position::BOTH {
        for (seen, agree) in (0..=u8::MAX).flat_map(|seen| (0..=u8::MAX).map(move |agree| (seen, agree))) {
            for line in Position::BOTH {
                let mut state = StateMachineState { output, seen, agree };
                for _ in 0..u32::from(agree) + 3 + 6 {
                    let _ = law.step(&mut state, line);
                }
                assert_eq!(state, law.rest(line), "{output:?} {seen} {agree}");
            }
        }
    }
}

#[track_caller]
fn refused(parameters: StateMachineParameters, expected: Parameter) {
    assert_eq!(StateMachine::<u8>::try_new(parameters), Err(ParameterError::Zero(expected)));
}

#[test]
fn state_machine_parameters_of_zero_are_refused_except_the_lock_out() {
    let one = StateMachineParameters::confirm(1, 1);
    assert_eq!(StateMachine::<u8>::try_new(one).unwrap().parameters(), one);
    refused(StateMachineParameters::confirm(0, 1), Parameter::ConfirmMake);
    refused(StateMachineParameters::confirm(1, 0), Parameter::ConfirmBreak);
    refused(one.patience(0, 1), Parameter::PatienceMake);
    refused(one.patience(1, 0), Parameter::PatienceBreak);
}

const ENVELOPE: Envelope = Envelope::clean(60, 60).bounce(7, 4).glitch(2, 3).quiet(4);

#[test]
fn state_machine_for_envelope_without_calm_is_patient() {
    const LAW: StateMachine = match StateMachine::<u8>::for_envelope(&ENVELOPE) {
        Ok(law) => law,
        Err(_) => panic!("the envelope has a closed form"),
    };
    assert_eq!(LAW.parameters(), StateMachineParameters::confirm(3, 4).patience(4, 3).lockout(6, 3));
}

#[test]
fn state_machine_for_envelope_with_calm_is_the_textbook_one() {
    let law = StateMachine::<u8>::for_envelope(&ENVELOPE.calm(4)).unwrap();
    assert_eq!(law.parameters(), StateMachineParameters::confirm(3, 4).lockout(6, 3));
}

#[test]
fn state_machine_for_envelope_without_bounce_has_no_lock_out() {
    let law = StateMachine::<u8>::for_envelope(&Envelope::clean(9, 9).bounce(0, 1)).unwrap();
    assert_eq!(law.parameters(), StateMachineParameters::confirm(1, 1));
}

#[track_caller]
fn no_form(envelope: Envelope, expected: ParameterError) {
    assert_eq!(StateMachine::<u8>::for_envelope(&envelope), Err(expected));
    assert_eq!(StateMachine::<u16>::for_envelope(&envelope), Err(expected));
}

#[test]
fn state_machine_for_envelope_outside_the_closed_form_is_refused() {
    no_form(ENVELOPE.quiet(3), ParameterError::QuietTooShort { quiet: 3, glitch: 3 });
    no_form(ENVELOPE.lost(1), ParameterError::QuietTooShort { quiet: 3, glitch: 3 });
    no_form(ENVELOPE.calm(1), ParameterError::CalmTooShort { calm: 1, glitch: 3 });
    no_form(ENVELOPE.calm(3), ParameterError::CalmTooShort { calm: 3, glitch: 3 });
    no_form(ENVELOPE.quiet(9).calm(4).lost(1), ParameterError::CalmTooShort { calm: 3, glitch: 3 });
    no_form(ENVELOPE.quiet(0).glitch(0, 2), ParameterError::QuietTooShort { quiet: 0, glitch: 2 });
    // A calm that losses may eat whole promises nothing, and the patient machine needs none.
    let eaten = StateMachine::<u8>::for_envelope(&ENVELOPE.quiet(9).calm(4).lost(4)).unwrap();
    assert_eq!(eaten, StateMachine::<u8>::for_envelope(&ENVELOPE).unwrap());
}

#[test]
fn state_machine_for_envelope_with_short_quiet_serves_disturbances_of_one_position() {
    let law = StateMachine::<u8>::for_envelope(&ENVELOPE.quiet(1).glitch(0, 3)).unwrap();
    assert_eq!(law.parameters(), StateMachineParameters::confirm(1, 4).patience(4, 1).lockout(6, 3));
    let calm = StateMachine::<u8>::for_envelope(&ENVELOPE.quiet(1).calm(4)).unwrap();
    assert_eq!(calm, StateMachine::<u8>::for_envelope(&ENVELOPE.calm(4)).unwrap());
    // Without disturbances nothing depends on quiet.
    let undisturbed = StateMachine::<u8>::for_envelope(&ENVELOPE.quiet(0).glitch(0, 0)).unwrap();
    assert_eq!(undisturbed.parameters(), StateMachineParameters::confirm(1, 1).lockout(6, 3));
}

#[track_caller]
fn narrow(envelope: Envelope, parameter: Parameter, ticks: u32) {
    let error = ParameterError::CountTooNarrow { parameter, ticks, most: 255 };
    assert_eq!(StateMachine::<u8>::for_envelope(&envelope), Err(error));
    let wide = StateMachine::<u16>::for_envelope(&envelope);
    assert!(wide.is_ok());
}

#[test]
fn state_machine_for_envelope_beyond_the_count_is_refused() {
    let quiet = Envelope::clean(9_000, 9_000).quiet(1_000);
    assert!(StateMachine::<u8>::for_envelope(&quiet.bounce(256, 256).glitch(254, 254)).is_ok());
    narrow(quiet.bounce(257, 0), Parameter::LockoutMake, 256);
    narrow(quiet.bounce(0, 257), Parameter::LockoutBreak, 256);
    narrow(quiet.glitch(255, 0), Parameter::ConfirmMake, 256);
    narrow(quiet.glitch(0, 255), Parameter::ConfirmBreak, 256);
    let all = quiet.bounce(u32::MAX, 0).glitch(u32::MAX - 1, 0).quiet(u32::MAX);
    assert_eq!(
        StateMachine::<u16>::for_envelope(&all),
        Err(ParameterError::CountTooNarrow {
            parameter: Parameter::ConfirmMake,
            ticks: u32::MAX,
            most: 65_535
        })
    );
}
