//! A port of an invented flood gate that sleeps: the tick runs only while a contact moves.
//!
//! The interrupt of the tick reads the port and settles it. When the bank has settled, it stops the tick and arms the
//! interrupt of the pins, which starts the tick again. The pins are armed for the *level*: they ask for the interrupt
//! as long as the port reads otherwise than it did last. An edge that comes between the last reading and the arming
//! is then still seen; armed for edges it would be lost, and with it the operation. The board moves one of its contacts
//! at just that moment, every time, and at the end every operation must have been reported.
//!
//! ```text
//! cargo build --release --target thumbv7m-none-eabi --bin sleeping-port
//! qemu-system-arm -machine lm3s6965evb -nographic -semihosting -icount shift=5 \
//!     -kernel target/thumbv7m-none-eabi/release/sleeping-port
//! ```
#![no_std]
#![no_main]

mod board;

use core::cell::RefCell;
use core::panic::PanicInfo;

use cortex_m::interrupt::{self, Mutex};
use cortex_m::peripheral::{NVIC, SYST, syst::SystClkSource};
use cortex_m_rt::{entry, exception};
use cortex_m_semihosting::{debug, hprintln};
use debounce_core::{Bank, BankState, Changes, Delivery, Machine, Mailbox};

use board::{Board, LINES, PINS, WORLD};

/// From the interrupt to the main loop.
static CHANGES: Mailbox<Changes<u8>, 8> = Mailbox::new();

/// The board and what reads it, for the interrupts; they all have one priority, so that none comes into another.
static PORT: Mutex<RefCell<Option<Port>>> = Mutex::new(RefCell::new(None));

/// Four samples of a millisecond; the contacts bounce for up to three, and none counts as operated for that.
const BANK: Bank<u8, 2> = Bank::new(0);

/// A port that ticks while it must.
struct Port {
    board: Board,
    tick: SYST,
    bank: BankState<u8, 2>,
    ticks: u32,
    starts: u32,
}

impl Port {
    /// A timer interrupt.
    fn tick(&mut self) {
        self.ticks += 1;
        let reading = self.board.read();
        let changes = BANK.step(&mut self.bank, reading);
        if !changes.is_none() {
            // A full box counts what it cannot take, and the main loop hears of it.
            let _ = CHANGES.post(changes);
        }
        if BANK.is_settled(&self.bank, reading) {
            self.tick.disable_counter();
            self.board.arm(reading);
        }
    }

    /// A pin interrupt.
    fn wake(&mut self) {
        self.starts += 1;
        self.board.disarm();
        self.tick.clear_current();
        self.tick.enable_counter();
    }
}

#[entry]
fn main() -> ! {
    if let Some(core) = cortex_m::Peripherals::take() {
        let mut tick = core.SYST;
        tick.set_clock_source(SystClkSource::Core);
        tick.set_reload(board::CYCLES_PER_TICK - 1);
        tick.enable_interrupt();
        tick.clear_current();
        tick.enable_counter();
        let port = Port { board: Board::start(), tick, bank: BANK.all_open(), ticks: 0, starts: 0 };
        interrupt::free(|free| PORT.borrow(free).replace(Some(port)));
        // SAFETY: everything that the interrupts use is in its place.
        unsafe {
            NVIC::unmask(PINS);
            NVIC::unmask(WORLD);
        }
    }
    let mut reported = [0; LINES];
    loop {
        while let Some(delivery) = CHANGES.take() {
            match delivery {
                Delivery::Event(changes) => {
                    for (line, count) in reported.iter_mut().enumerate() {
                        *count += u32::from(changes.any() >> line & 1);
                    }
                }
                Delivery::Lost(count) => hprintln!("{} reports were lost", count),
            }
        }
        interrupt::free(|free| {
            if let Some(port) = PORT.borrow(free).borrow().as_ref().filter(|port| port.board.is_over()) {
                end(port, reported);
            }
        });
        cortex_m::asm::wfi();
    }
}

fn end(port: &Port, reported: [u32; LINES]) {
    // The exact numbers are the compiler's: a few instructions decide which of two timers comes first.
    for (line, (operated, reported)) in port.board.operated().into_iter().zip(reported).enumerate() {
        if operated == reported && operated >= 30 {
            hprintln!("contact {}: every operation was reported once", line);
        } else {
            hprintln!("contact {}: operated {} times, reported {} times", line, operated, reported);
        }
    }
    if port.ticks < board::END / 5 && port.starts >= 60 {
        hprintln!("the tick stood still for more than four fifths of {} ms", board::END);
    } else {
        hprintln!("{} ticks in {} ms; the pins started them {} times", port.ticks, board::END, port.starts);
    }
    debug::exit(debug::EXIT_SUCCESS);
}

fn with_port(act: impl FnOnce(&mut Port)) {
    interrupt::free(|free| PORT.borrow(free).borrow_mut().as_mut().map(act));
}

#[exception]
fn SysTick() {
    with_port(Port::tick);
}

/// The interrupts of the part: of its pins, and of the timer that stands for the world.
#[exception]
unsafe fn DefaultHandler(number: i16) {
    with_port(|port| match number {
        number if number == board::PINS_NUMBER => port.wake(),
        _ => port.board.pass(),
    });
}

/// Nothing of `debounce-core` comes here; printing may.
#[panic_handler]
fn panic(info: &PanicInfo<'_>) -> ! {
    hprintln!("{}", info);
    loop {
        debug::exit(debug::EXIT_FAILURE);
    }
}
