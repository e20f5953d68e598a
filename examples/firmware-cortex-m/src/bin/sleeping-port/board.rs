//! The board: its contacts move by a timer of the part that runs all the time, as the world does.
//!
//! What the emulated part cannot do is to have its pins moved; so this asks for the interrupt of the pins itself, when
//! armed pins would. On a real part `arm` and `disarm` are writes to the registers of the port.

use cortex_m::interrupt::InterruptNumber;
use cortex_m::peripheral::NVIC;

/// A millisecond at the clock of the emulated LM3S6965 after reset.
pub(crate) const CYCLES_PER_TICK: u32 = 12_500;

/// The milliseconds that the show takes.
pub(crate) const END: u32 = 4_000;

/// Contacts on the port.
pub(crate) const LINES: usize = 2;

/// An interrupt of the part, by its number.
#[derive(Clone, Copy)]
pub(crate) struct Interrupt(u16);

// SAFETY: these are numbers of interrupts of the part.
unsafe impl InterruptNumber for Interrupt {
    fn number(self) -> u16 {
        self.0
    }
}

/// Port A.
pub(crate) const PINS: Interrupt = Interrupt(0);
pub(crate) const PINS_NUMBER: i16 = 0;
/// Timer 0.
pub(crate) const WORLD: Interrupt = Interrupt(19);

/// How a contact reads in the first milliseconds after a change: 1 the new position, 0 the old one.
const BOUNCE: u32 = 0b101;
const BOUNCE_MS: u32 = 3;

/// One contact.
#[derive(Clone, Copy)]
struct Contact {
    is_closed: bool,
    moved_at: u32,
    operated: u32,
}

impl Contact {
    fn reads_closed(&self, now: u32) -> bool {
        let since = now - self.moved_at;
        let arrived = self.operated == 0 || since >= BOUNCE_MS || BOUNCE >> since & 1 == 1;
        self.is_closed == arrived
    }

    fn operate(&mut self, now: u32) {
        *self = Self { is_closed: !self.is_closed, moved_at: now, operated: self.operated + 1 };
    }
}

pub(crate) struct Board {
    now: u32,
    contacts: [Contact; LINES],
    /// What the port must read for the pins to stay silent, while they are armed.
    armed: Option<u8>,
}

impl Board {
    pub(crate) fn start() -> Self {
        const TIMER_0: usize = 0x4003_0000;
        let write = |offset, value: u32| {
            // SAFETY: a register of a timer that nothing else uses.
            unsafe { core::ptr::with_exposed_provenance_mut::<u32>(TIMER_0 + offset).write_volatile(value) };
        };
        // 32 bits wide, over and over, with its interrupt.
        write(0x00, 0);
        write(0x04, 2);
        write(0x28, CYCLES_PER_TICK - 1);
        write(0x18, 1);
        write(0x0c, 1);
        let contact = Contact { is_closed: false, moved_at: 0, operated: 0 };
        Self { now: 0, contacts: [contact; LINES], armed: None }
    }

    /// The timer's interrupt: a millisecond goes by.
    pub(crate) fn pass(&mut self) {
        // SAFETY: tells the timer that its interrupt was seen.
        unsafe { core::ptr::with_exposed_provenance_mut::<u32>(0x4003_0024).write_volatile(1) };
        if self.is_over() {
            return;
        }
        self.now += 1;
        // The first contact is operated at its own times, never twice within 40 ms.
        if [0, 41].contains(&(self.now % 97)) {
            self.contacts[0].operate(self.now);
        }
        self.ask();
    }

    pub(crate) fn is_over(&self) -> bool {
        self.now >= END
    }

    /// How often each contact was operated.
    pub(crate) fn operated(&self) -> [u32; LINES] {
        self.contacts.map(|contact| contact.operated)
    }

    /// The port, closed contacts as 1.
    pub(crate) fn read(&self) -> u8 {
        let bits = self.contacts.iter().enumerate();
        bits.fold(0, |port, (line, contact)| port | u8::from(contact.reads_closed(self.now)) << line)
    }

    /// Asks for the interrupt of the pins as soon and as long as the port reads anything but `settled`.
    pub(crate) fn arm(&mut self, settled: u8) {
        // The worst moment: the port was read, and the pins are not armed yet. The second contact always chooses it.
        let second = &mut self.contacts[1];
        if self.now >= second.moved_at + 50 && self.now + 50 < END {
            second.operate(self.now);
        }
        self.armed = Some(settled);
        self.ask();
    }

    pub(crate) fn disarm(&mut self) {
        self.armed = None;
    }

    fn ask(&self) {
        if self.armed.is_some_and(|settled| settled != self.read()) {
            NVIC::pend(PINS);
        }
    }
}
