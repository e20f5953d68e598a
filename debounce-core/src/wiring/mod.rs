//! From the line to the law, and from there to the program.

mod polarity;
mod port;
mod settling;

#[cfg(feature = "mailbox")]
mod mailbox;
#[cfg(feature = "embedded-hal")]
mod pin;
#[cfg(feature = "embedded-hal-async")]
mod pin_async;
#[cfg(feature = "embedded-hal")]
mod pin_row;
#[cfg(feature = "embedded-hal")]
mod pins;

#[cfg(feature = "mailbox")]
pub use mailbox::{Delivery, Mailbox};
#[cfg(feature = "embedded-hal")]
pub use pin::DebouncedPin;
#[cfg(feature = "embedded-hal")]
pub use pin_row::PinRow;
#[cfg(feature = "embedded-hal")]
pub use pins::DebouncedPins;
pub use polarity::{Level, Polarity};
pub use port::{DebouncedPort, PortReader};
pub use settling::Settling;
