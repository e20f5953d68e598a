//! From the line to the law, and from there to the program.

mod bursts;
mod polarity;
mod port;
mod settling;
mod wear;

#[cfg(feature = "mailbox")]
mod mailbox;
#[cfg(feature = "embedded-hal")]
mod pin;
#[cfg(feature = "embedded-hal-async")]
mod pin_async;
#[cfg(feature = "embedded-hal")]
mod pin_port;
#[cfg(feature = "embedded-hal")]
mod pins;

pub use bursts::{Burst, Bursts, BurstsState};
#[cfg(feature = "mailbox")]
pub use mailbox::{Delivery, Mailbox};
#[cfg(feature = "embedded-hal")]
pub use pin::DebouncedPin;
#[cfg(feature = "embedded-hal")]
pub use pin_port::PinPort;
#[cfg(feature = "embedded-hal")]
pub use pins::DebouncedPins;
pub use polarity::{Level, Polarity};
pub use port::{DebouncedPort, PortReader};
pub use settling::Settling;
pub use wear::Wear;
