//! Pins, ports, hand-over and what the field shows.

use core::fmt;
use core::future::Future;
use core::pin::pin;
use core::task::{Context, Waker};

use debounce_core::{
    AsyncPin, Burst, Bursts, BurstsState, Change, DebouncedPin, Delivery, KeyDiodes, Machine, Mailbox,
    Matrix, MatrixPins, Monitor, MonitorLimits, MonitorState, Outside, PerChange, PerPosition, PinPort,
    Polarity, ReadPort, Recorder, RecorderMode, Running, ScanError, ShiftRegister, Wear,
};
use embedded_hal::delay::DelayNs;
use embedded_hal::digital::{Error, ErrorKind, ErrorType, InputPin, OutputPin, PinState};
use embedded_hal_async::digital::Wait;

use crate::image::{any, any_u8, any_u16, keep};
use crate::{change, drive, position};

pub(crate) fn all() {
    pins();
    keypad();
    sleeping();
    mailbox();
    field();
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

impl embedded_hal_async::delay::DelayNs for Clock {
    async fn delay_ns(&mut self, ns: u32) {
        keep(&ns);
    }
}

fn pins() {
    if let Ok(law) = ShiftRegister::try_new(any_u8()) {
        for polarity in [Polarity::ClosedWhenLow, Polarity::ClosedWhenHigh] {
            let mut pin = DebouncedPin::new(Pin, polarity, Running::new(law, position()));
            for _ in 0..any() {
                keep(&pin.tick());
            }
            keep(&pin.running().is_settled());
        }
    }
    let mut port = PinPort::new([Pin, Pin, Pin, Pin, Pin, Pin]);
    let reading: Result<u8, Broken> = port.read_port();
    keep(&reading);
}

fn keypad() {
    let mut pins = MatrixPins::new([Pin, Pin, Pin, Pin], [Pin, Pin, Pin], Clock, any());
    let pad = Matrix::<u8, 4, 2>::new(KeyDiodes::None);
    let scan: Result<[u8; 4], ScanError<Broken, Broken>> = pins.scan();
    if let Ok(keys) = scan {
        keep(&pad.step(&mut pad.power_up(), keys));
    }
}

fn sleeping() {
    let Ok(law) = ShiftRegister::try_new(any_u8()) else { return };
    let mut key = AsyncPin::new(Pin, Clock, law, PinState::Low, any());
    let mut context = Context::from_waker(Waker::noop());
    {
        let mut change = pin!(key.wait_for_change());
        keep(&change.as_mut().poll(&mut context).is_ready());
    }
    keep(&key.position());
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

fn field() {
    if let Some(bursts) = Bursts::try_new(any_u16()) {
        let mut state: BurstsState = Bursts::POWER_UP;
        let mut wear = Wear::NEW;
        let burst: Option<Burst> = bursts.step(&mut state, position());
        if let Some(burst) = burst {
            wear.record(&burst);
        }
        keep(&(wear.operations(), wear.longest_bounce(), wear.most_changes(), wear.is_ageing()));
        drive(&bursts, state, position);
    }
    let limits = MonitorLimits {
        bounce: PerChange { make: any_u16(), break_: any_u16() },
        glitch: PerPosition { open: any_u16(), closed: any_u16() },
        quiet: any_u16(),
        stuck_256_ticks: PerPosition { open: any_u16(), closed: any_u16() },
    };
    if let Some(monitor) = Monitor::try_new(limits) {
        let mut state: MonitorState = Monitor::POWER_UP;
        let outside: Option<Outside> = monitor.step(&mut state, position());
        keep(&outside);
        drive(&monitor, state, position);
    }
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
    keep(&(recorder.is_stopped(), recorder.first(), recorder.forgotten(), recorder.runs().count()));
    keep(&recorder.dump(&mut Line));
    recorder.clear();
}
