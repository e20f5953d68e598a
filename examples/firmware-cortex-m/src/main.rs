//! The control panel of an invented greenhouse.
//!
//! Three buttons, a door contact, a knob and a keypad. One timer interrupt a millisecond reads them all, settles them
//! and works out what they mean; the main loop takes the events from a mailbox and acts on them. Nothing here reads a
//! clock, allocates or waits in the interrupt.
//!
//! It runs in QEMU as it stands; on a part of your own, replace `board.rs` and print elsewhere:
//!
//! ```text
//! cargo build --release --target thumbv7m-none-eabi
//! qemu-system-arm -machine lm3s6965evb -nographic -semihosting -icount shift=5 \
//!     -kernel target/thumbv7m-none-eabi/release/control-panel
//! ```
#![no_std]
#![no_main]

mod board;
mod panel;

use core::panic::PanicInfo;

use cortex_m::peripheral::syst::SystClkSource;
use cortex_m_rt::{entry, exception};
use cortex_m_semihosting::{debug, hprint, hprintln};
use debounce_core::{Delivery, GestureEvent, Mailbox, Turn};

use board::Board;
use panel::{Event, Panel};

/// From the interrupt to the main loop: events, each with its tick.
static EVENTS: Mailbox<(u32, Event), 16> = Mailbox::new();

/// The ticks that the show takes.
const END: u32 = 900;

#[entry]
fn main() -> ! {
    if let Some(mut core) = cortex_m::Peripherals::take() {
        core.SYST.set_clock_source(SystClkSource::Core);
        core.SYST.set_reload(board::CYCLES_PER_TICK - 1);
        core.SYST.clear_current();
        core.SYST.enable_interrupt();
        core.SYST.enable_counter();
    }
    let mut greenhouse = Greenhouse { vent_percent: 0, lamp: false };
    loop {
        while let Some(delivery) = EVENTS.take() {
            match delivery {
                Delivery::Event((tick, event)) => {
                    hprint!("{:4} ", tick);
                    greenhouse.act(event);
                }
                // The panel's state is still right; only what happened in between is not known.
                Delivery::Lost(count) => hprintln!("{} events were lost", count),
            }
        }
        cortex_m::asm::wfi();
    }
}

/// Every millisecond.
#[exception]
fn SysTick() {
    static mut BOARD: Board = Board::new();
    static mut PANEL: Option<Panel> = None;
    let panel = PANEL.get_or_insert_with(Panel::power_up);
    let now = BOARD.now();
    // A full box counts what it cannot take, and says so when it is emptied.
    let post = |event| _ = EVENTS.post((now, event));
    panel.tick(BOARD, post);
    if now == END {
        post(Event::End);
    }
    BOARD.pass();
}

/// What the panel controls.
struct Greenhouse {
    vent_percent: i32,
    lamp: bool,
}

impl Greenhouse {
    fn act(&mut self, event: Event) {
        match event {
            Event::Found { line, position } => hprintln!("{} is {:?}", line, position),
            Event::Changed { line, change } => hprintln!("{}: {:?}", line, change),
            Event::Lamp(GestureEvent::Taps(taps)) => {
                self.lamp = taps == 1 && !self.lamp;
                hprintln!("lamp key tapped {} times: lamp {}", taps, if self.lamp { "on" } else { "off" });
            }
            Event::Lamp(event) => hprintln!("lamp key: {:?}", event),
            Event::Clicked(turn) => {
                self.vent_percent += if turn == Turn::Forward { 10 } else { -10 };
                hprintln!("knob {:?}: vent at {} %", turn, self.vent_percent);
            }
            Event::StepsLost => hprintln!("the knob turned faster than it was read"),
            Event::Pressed { row, column } => hprintln!("keypad: row {} column {}", row, column),
            Event::Doubt => hprintln!("keypad: keys that may be ghosts are held back"),
            Event::End => {
                hprintln!("the end");
                debug::exit(debug::EXIT_SUCCESS);
            }
        }
    }
}

/// Nothing of `debounce-core` comes here; printing may.
#[panic_handler]
fn panic(info: &PanicInfo<'_>) -> ! {
    hprintln!("{}", info);
    loop {
        debug::exit(debug::EXIT_FAILURE);
    }
}
