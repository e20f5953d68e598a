//! Two contacts of an invented rain tank, each in an async task of its own.
//!
//! A task ticks only while its contact moves; settled, it sleeps on the level of its pin, and the count of readings at
//! the end shows how little was read. The executor is a loop that polls both tasks after every interrupt; with one of
//! your own, and with real pins, only `board.rs` goes.
//!
//! ```text
//! cargo build --release --target thumbv7m-none-eabi
//! qemu-system-arm -machine lm3s6965evb -nographic -semihosting -icount shift=5 \
//!     -kernel target/thumbv7m-none-eabi/release/async-panel
//! ```
#![no_std]
#![no_main]

mod board;

use core::future::Future;
use core::panic::PanicInfo;
use core::pin::{Pin, pin};
use core::task::{Context, Waker};

use cortex_m::peripheral::syst::SystClkSource;
use cortex_m_rt::{entry, exception};
use cortex_m_semihosting::{debug, hprintln};
use debounce_core::{DebouncedPin, Polarity, Running, Started, StateMachine, StateMachineParameters};

use board::{Line, Ticker};

/// Four samples, 1 ms apart; two that agree clear a count; the bounce after a change is not looked at.
const LAW: StateMachine =
    StateMachine::<u8>::new(StateMachineParameters::confirm(4, 4).patience(2, 2).lockout(5, 5));

#[entry]
fn main() -> ! {
    if let Some(mut core) = cortex_m::Peripherals::take() {
        core.SYST.set_clock_source(SystClkSource::Core);
        core.SYST.set_reload(board::CYCLES_PER_TICK - 1);
        core.SYST.clear_current();
        core.SYST.enable_interrupt();
        core.SYST.enable_counter();
    }
    let lid = pin!(watch("lid", Line::LID));
    let float = pin!(watch("float switch", Line::FLOAT));
    let mut tasks: [Pin<&mut dyn Future<Output = ()>>; 2] = [lid, float];
    // Every interrupt wakes the processor, and then every task may see whether it was meant.
    let mut context = Context::from_waker(Waker::noop());
    while board::now() < board::END {
        for task in &mut tasks {
            // A task ends only with an error of its pin, which these pins do not have.
            let _ = task.as_mut().poll(&mut context);
        }
        cortex_m::asm::wfi();
    }
    hprintln!("{} readings of two contacts in {} ms", board::readings(), board::END);
    debug::exit(debug::EXIT_SUCCESS);
    loop {
        cortex_m::asm::wfi();
    }
}

/// Prints what happens at a contact, for ever.
async fn watch(name: &str, line: Line) {
    // Pull-up and contact to ground: closed reads low.
    let mut contact = DebouncedPin::new(line, Polarity::ClosedWhenLow, Running::starting(LAW));
    let mut ticker = Ticker::new();
    loop {
        let Ok(report) = contact.next_report(async || ticker.next().await).await;
        match report {
            // Found at power-up; nobody operated it.
            Started::Initial(position) => hprintln!("{:4} {} is {:?}", board::now(), name, position),
            Started::Edge(change) => hprintln!("{:4} {}: {:?}", board::now(), name, change),
        }
    }
}

/// Every millisecond: time goes by on the board.
#[exception]
fn SysTick() {
    board::pass();
}

/// Nothing of `debounce-core` comes here; printing may.
#[panic_handler]
fn panic(info: &PanicInfo<'_>) -> ! {
    hprintln!("{}", info);
    loop {
        debug::exit(debug::EXIT_FAILURE);
    }
}
