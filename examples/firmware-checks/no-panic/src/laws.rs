//! The laws, what is said about them, and the banks.

use debounce_core::{
    Bank, BankState, Bounds, Chain, ChainState, Changes, Clause, Config, ConstLaw, Count, EdgeRule, Envelope,
    Integrator, IntegratorState, Lane, LanesStarted, Latency, Law, Machine, MajorityRegister,
    MajorityRegisterState, Parameter, ParameterError, PatientBank, PatientState, PerChange, PerPosition,
    Period, Phase, PortLaw, Running, Settling, ShiftRegister, ShiftRegisterState, Started, Starting,
    StartingBank, StartingBankState, StartingState, StateMachine, StateMachineParameters, StateMachineState,
    TableLaw, TableLawError, TableState, TickClock, Verdict, WindowWord, Word, is_settled, is_still,
};

use crate::image::{any, any_u8, any_u16, keep};
use crate::{change, drive, position};

pub(crate) fn all() {
    integrators();
    registers();
    state_machines();
    chains();
    tables();
    banks::<u8>();
    banks::<u16>();
    banks::<u32>();
    banks::<u64>();
    claims();
}

/// A law by itself, running, started, and as a constant.
fn law<L: Law + Copy>(law: L) {
    let state = law.rest(position());
    keep(&is_settled(&law, &state, position()));
    keep(&is_still(&law, &state, position()));
    keep(&Settling::settled_at(&law, &state));
    drive(&law, state, position);
    let starting: StartingState<L::State> = Starting::new(law).power_up();
    drive(&Starting::new(law), starting, position);
    let mut running = Running::new(law, position());
    keep(&running.tick(position()));
    keep(&(running.position(), running.is_settled(), running.state().eq(running.state())));
    keep(&running.settled_at());
    let mut running = Running::starting(law);
    let report: Option<Started> = running.tick(position());
    keep(&(report, running.position(), running.is_settled(), running.settled_at()));
}

fn refused(error: ParameterError) {
    if let ParameterError::Zero(parameter) = error {
        let parameter: Parameter = parameter;
        keep(&parameter);
    }
    keep(&error);
}

fn integrators() {
    match Integrator::<u8>::try_with_steps(any_u8(), any_u8(), any_u8()) {
        Ok(found) => law(found),
        Err(error) => refused(error),
    }
    if let Ok(found) = Integrator::<u16>::try_new(any_u16()) {
        let state: IntegratorState<u16> = found.rest(position());
        keep(&(state.away(), found.verdict(&envelope())));
        law(found);
    }
    keep(&(counted::<u8>(any_u8()), counted::<u16>(any_u16())));
}

fn counted<C: Count>(count: C) -> C {
    count.plus(C::ONE).minus(count)
}

fn registers() {
    if let Ok(found) = ShiftRegister::try_new(any_u8()) {
        let state: ShiftRegisterState = found.rest(position());
        keep(&(state, found.verdict(&envelope())));
        law(found);
    }
    if let Ok(found) = MajorityRegister::<u8>::try_new(any_u8(), any_u8()) {
        law(found);
    }
    if let Ok(found) = MajorityRegister::<u16>::try_new(any_u8(), any_u8()) {
        law(found);
    }
    if let Ok(found) = MajorityRegister::<u32>::try_new(any_u8(), any_u8()) {
        let state: MajorityRegisterState<u32> = found.rest(position());
        keep(&(state, found.verdict(&envelope()), any().ones()));
        law(found);
    }
    keep(&WindowWord::flipped(any(), any()));
}

fn state_machines() {
    let parameters = StateMachineParameters::confirm(any_u8(), any_u8())
        .patience(any_u8(), any_u8())
        .lockout(any_u8(), any_u8());
    if let Ok(found) = StateMachine::<u8>::try_new(parameters) {
        let state: StateMachineState<u8> = found.rest(position());
        let phase: Phase = state.phase();
        keep(&(phase, state.locked_out(), found.verdict(&envelope())));
        law(found);
    }
    match StateMachine::<u16>::for_envelope(&envelope()) {
        Ok(found) => law(found),
        Err(error) => refused(error),
    }
    struct Door;
    impl Config for Door {
        type Law = StateMachine;
        const LAW: StateMachine =
            StateMachine::<u8>::new(StateMachineParameters::confirm(3, 4).patience(4, 3));
    }
    law(ConstLaw::<Door>::new());
}

fn chains() {
    let first = MajorityRegister::<u8>::try_new(any_u8(), any_u8());
    let second = StateMachine::<u8>::try_new(StateMachineParameters::confirm(any_u8(), any_u8()));
    if let (Ok(first), Ok(second)) = (first, second) {
        let chain = Chain::new(first, second);
        let state: ChainState<MajorityRegisterState<u8>, StateMachineState<u8>> = chain.rest(position());
        keep(&(chain.first().eq(&first), state.second().phase()));
        law(chain);
    }
}

fn tables() {
    let rows = [[any_u8(), any_u8()], [any_u8(), any_u8()]];
    match TableLaw::try_new(&rows, any_u8(), [any_u8(), any_u8()]) {
        Ok(found) => {
            let state: TableState = found.rest(position());
            keep(&state.number());
            law(found);
        }
        Err(error) => {
            let error: TableLawError = error;
            keep(&error);
        }
    }
}

fn banks<W: Word + From<u8>>() {
    let port = || W::from(any_u8());
    port_law(&Bank::<W, 2>::new(port()), port);
    port_law(&Bank::<W, 1>::new(port()), port);
    let bank = Bank::<W, 3>::new(port());
    let state: BankState<W, 3> = bank.rest(port());
    keep(&(bank.closed(&state), bank.is_settled(&state, port()), state.counting()));
    port_law(&bank, port);
    let rule = EdgeRule::try_new(any_u16(), any_u16(), any_u16());
    if let Ok(bank) = rule.and_then(|rule| PatientBank::<W, 2, 2, 3>::try_new(port(), rule, rule)) {
        let state: PatientState<W, 2, 2, 3> = bank.rest(port());
        keep(&(bank.closed(&state), bank.is_settled(&state, port()), state.counting()));
        port_law(&bank, port);
    }
    let starting = StartingBank::<_, 2>::new(bank);
    let mut state: StartingBankState<W, BankState<W, 3>, 2> = starting.power_up();
    let report: LanesStarted<W> = starting.step(&mut state, port());
    keep(&report);
    drive(&starting, state, port);
    law(Lane::new(Bank::<u8, 2>::new(0)));
}

fn port_law<W: Word, B: PortLaw<W>>(bank: &B, port: impl Fn() -> W) {
    let mut state = bank.at_rest(port());
    bank.seat(&mut state, port(), port());
    let changes: Changes<W> = bank.step(&mut state, port());
    keep(&(bank.outputs(&state), bank.looks_closed(port()), changes.any(), port().count(), W::lane(any())));
    drive(bank, state, port);
}

fn envelope() -> Envelope {
    Envelope::clean(any(), any())
        .bounce(any(), any())
        .glitch(any(), any())
        .quiet(any())
        .calm(any())
        .lost(any())
}

fn claims() {
    let verdict: Option<PerChange<u32>> = envelope().limit();
    keep(&verdict);
    if let Ok(found) = Integrator::<u8>::try_new(any_u8()) {
        match found.verdict(&envelope()) {
            Verdict::Holds(bounds) => {
                let bounds: Bounds = bounds;
                let latency: PerChange<Latency> = bounds.latency;
                keep(&latency.at(change()));
            }
            Verdict::Fails(clause) => {
                let clause: Clause = clause;
                keep(&clause);
            }
            other => keep(&other),
        }
    }
    keep(&PerPosition { open: any(), closed: any() }.at(position()));
    let clock = Period::try_from_ratio(u64::from(any()), any())
        .and_then(|period| TickClock::new(period).try_tolerance_ppm(any()));
    if let Some(clock) = clock {
        let clock = clock.jitter_ns(u64::from(any())).lost(any());
        keep(&(clock.samples_touched(any().into()), clock.samples_seen(any().into()), clock.delay_ns(any())));
    }
}
