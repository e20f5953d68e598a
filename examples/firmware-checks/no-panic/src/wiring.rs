//! Pins, ports, hand-over and what the field shows.

use core::fmt::{self, Write as _};
use core::future::{Future, poll_fn};
use core::pin::pin;
use core::task::{Context, Poll, Waker};

use debounce_core::{
    Bank, Burst, Bursts, BurstsState, Change, DebouncedPin, DebouncedPins, DebouncedPort, Delivery, Envelope,
    Heartbeat, KeyDiodes, Level, Machine, Mailbox, Matrix, MatrixPins, Monitor, MonitorState, Outside,
    Period, PinPort, Polarity, PortReader, Recorded, RecordedRun, Recorder, RecorderMode, RecorderText,
    Running, ScanError, ShiftRegister, Started, StartingBank, Tally, TickFault, Wear,
};
use embedded_hal::delay::DelayNs;
use embedded_hal::digital::{Error, ErrorKind, ErrorType, InputPin, OutputPin};
use embedded_hal_async::digital::Wait;

use crate::image::{any, any_u8, any_u16, keep};
use crate::{change, drive, position};

pub(crate) fn all() {
    pins();
    ports();
    keypad();
    sleeping();
    mailbox();
    wear();
    health();
    recorder();
}

/// A pin that reads anything, and fails now and then.
struct Pin;

#[derive(Debug)]
struct Broken;

impl Error for Broken {
    fn kind(&self) -> ErrorKind {
        ErrorKind::Other
    }
}

impl ErrorType for Pin {
    type Error = Broken;
}

impl InputPin for Pin {
    fn is_high(&mut self) -> Result<bool, Broken> {
        if any() & 2 == 0 { Ok(any() & 1 == 1) } else { Err(Broken) }
    }

    fn is_low(&mut self) -> Result<bool, Broken> {
        self.is_high().map(|high| !high)
    }
}

impl OutputPin for Pin {
    fn set_low(&mut self) -> Result<(), Broken> {
        self.is_high().map(|_| ())
    }

    fn set_high(&mut self) -> Result<(), Broken> {
        self.is_high().map(|_| ())
    }
}

impl Wait for Pin {
    async fn wait_for_high(&mut self) -> Result<(), Broken> {
        self.is_high().map(|_| ())
    }

    async fn wait_for_low(&mut self) -> Result<(), Broken> {
        self.is_high().map(|_| ())
    }

    async fn wait_for_rising_edge(&mut self) -> Result<(), Broken> {
        self.is_high().map(|_| ())
    }

    async fn wait_for_falling_edge(&mut self) -> Result<(), Broken> {
        self.is_high().map(|_| ())
    }

    async fn wait_for_any_edge(&mut self) -> Result<(), Broken> {
        self.is_high().map(|_| ())
    }
}

struct Clock;

impl DelayNs for Clock {
    fn delay_ns(&mut self, ns: u32) {
        keep(&ns);
    }
}

fn pins() {
    let Ok(law) = ShiftRegister::try_new(any_u8()) else { return };
    for polarity in [Polarity::ClosedWhenLow, Polarity::ClosedWhenHigh] {
        let mut pin = DebouncedPin::new(Pin, polarity, Running::new(law, position()));
        for _ in 0..any() {
            keep(&pin.tick());
        }
        let wake: Option<Level> = pin.wake_level();
        keep(&(pin.running().is_settled(), wake, polarity.level(position())));
        keep(&pin.release().1.position());
    }
    let key = || DebouncedPin::new(Pin, Polarity::ClosedWhenLow, Running::starting(law));
    let mut keys = DebouncedPins::new([key(), key(), key(), key(), key()]);
    for _ in 0..any() {
        let reports: [Result<Option<Started>, Broken>; 5] = keys.tick();
        keep(&reports);
    }
    keep(&(keys.are_settled(), keys.pins().iter().filter_map(DebouncedPin::wake_level).count()));
    keep(&keys.release().map(|(_, running)| running.position()));
}

fn ports() {
    let mut port = PinPort::new([Pin, Pin, Pin, Pin, Pin, Pin]);
    let reading: Result<u8, Broken> = port.read_port();
    keep(&reading);
    let bank = StartingBank::<_, 2>::new(Bank::<u8, 2>::new(any_u8()));
    let mut port = DebouncedPort::new(port, Running::from_parts(bank, bank.power_up()));
    for _ in 0..any() {
        keep(&port.tick());
    }
    keep(&(port.is_settled(any_u8()), port.release().1.state()));
    let register = || if any() & 1 == 0 { Ok(any()) } else { Err(Broken) };
    let bank = Bank::<u32, 3>::new(any());
    let mut port = DebouncedPort::new(register, Running::from_parts(bank, bank.all_open()));
    keep(&port.tick());
}

fn keypad() {
    let mut pins = MatrixPins::new([Pin, Pin, Pin, Pin], [Pin, Pin, Pin], Clock, any());
    let pad = Matrix::<u8, 4, 2>::new(KeyDiodes::None);
    let scan: Result<[u8; 4], ScanError<Broken, Broken>> = pins.scan();
    if let Ok(keys) = scan {
        keep(&pad.step(&mut pad.power_up(), keys));
    }
}

/// Each future is polled once: that runs everything in it, for every wait may be over at once or not.
///
/// Polled again it would bring the check of the language that an `async fn` which has ended is not resumed. That one is
/// in every `async fn`, and no `.await` comes to it.
fn sleeping() {
    let Ok(law) = ShiftRegister::try_new(any_u8()) else { return };
    let mut key = DebouncedPin::new(Pin, Polarity::ClosedWhenLow, Running::starting(law));
    let mut context = Context::from_waker(Waker::noop());
    for _ in 0..any() {
        let mut report = pin!(key.next_report(async || poll_fn(|_| ready()).await));
        let polled: Poll<Result<Started, Broken>> = report.as_mut().poll(&mut context);
        keep(&polled);
    }
    keep(&key.running().position());
}

/// A tick that is over, or not yet.
fn ready() -> Poll<()> {
    if any() & 1 == 0 { Poll::Ready(()) } else { Poll::Pending }
}

/// There are no interrupts in this image.
struct NoInterrupts;

critical_section::set_impl!(NoInterrupts);

// SAFETY: nothing interrupts the one thread.
unsafe impl critical_section::Impl for NoInterrupts {
    unsafe fn acquire() -> critical_section::RawRestoreState {
        any() & 1 == 1
    }

    unsafe fn release(restore: critical_section::RawRestoreState) {
        keep(&restore);
    }
}

fn mailbox() {
    static EDGES: Mailbox<Change, 4> = Mailbox::new();
    keep(&EDGES.post(change()));
    let delivery: Option<Delivery<Change>> = EDGES.take();
    keep(&delivery);
}

fn wear() {
    if let Ok(bursts) = Bursts::try_new(any_u16()) {
        let mut state: BurstsState = Bursts::POWER_UP;
        let mut wear = Wear::NEW;
        let burst: Option<Burst> = bursts.step(&mut state, position());
        if let Some(burst) = burst {
            wear.record(&burst);
        }
        keep(&(wear.operations(), wear.longest_bounce(), wear.most_changes(), wear.is_ageing()));
        drive(&bursts, state, position);
    }
}

fn health() {
    let mut tally = Tally::NEW;
    let envelope = Envelope::clean(any(), any()).bounce(any(), any()).glitch(any(), any());
    if let Ok(monitor) = Monitor::try_new(&envelope.quiet(any()).calm(any()).lost(any())) {
        let monitor = monitor.stuck_after(any(), any());
        let mut state: MonitorState = monitor.power_up();
        let outside: Option<Outside> = monitor.step(&mut state, position());
        if let Some(outside) = outside {
            tally.count(outside);
        }
        keep(&(monitor.rest(), state.is_outside()));
        drive(&monitor, state, position);
    }
    let beat = Heartbeat::new(any());
    let mut last = Heartbeat::POWER_UP;
    let fault: Option<TickFault> = beat.step(&mut last, any());
    if let Some(fault) = fault {
        tally.count_tick_fault(fault);
    }
    keep(&(tally, tally.is_clean()));
    drive(&beat, last, any);
}

/// Takes text a byte at a time.
struct Line;

impl fmt::Write for Line {
    fn write_str(&mut self, text: &str) -> fmt::Result {
        text.bytes().for_each(|byte| keep(&byte));
        Ok(())
    }
}

fn recorder() {
    let mode = if any() & 1 == 0 { RecorderMode::Ring } else { RecorderMode::StopWhenFull };
    let mut recorder = Recorder::<16>::new(mode);
    for _ in 0..any() {
        recorder.sample(position());
    }
    recorder.lost(any());
    keep(&(recorder.is_stopped(), recorder.forgotten()));
    for run in recorder.runs() {
        let run: RecordedRun = run;
        let recorded: Recorded = run.recorded;
        keep(&(recorded, run.ticks));
    }
    if let Some(period) = Period::try_from_ratio(any().into(), any()) {
        let text: RecorderText<'_, 16> = recorder.text(period);
        keep(&write!(Line, "{text}"));
    }
    recorder.clear();
    keep(&recorder);
}
