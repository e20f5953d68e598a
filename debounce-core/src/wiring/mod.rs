//! Between the line and the program: hand-over, recording, and what the field shows.

mod bursts;
#[cfg(feature = "mailbox")]
mod mailbox;
mod monitor;
#[cfg(feature = "embedded-hal")]
mod pin;
#[cfg(feature = "embedded-hal-async")]
mod pin_async;
mod polarity;
mod port;
mod recorder;
mod wear;

pub use bursts::{Burst, Bursts, BurstsState};
#[cfg(feature = "mailbox")]
pub use mailbox::{Delivery, Mailbox};
pub use monitor::{Monitor, MonitorLimits, MonitorState, Outside};
#[cfg(feature = "embedded-hal")]
pub use pin::DebouncedPin;
#[cfg(feature = "embedded-hal-async")]
pub use pin_async::AsyncPin;
pub use polarity::Polarity;
#[cfg(feature = "embedded-hal")]
pub use port::PinPort;
pub use port::ReadPort;
pub use recorder::{Recorder, RecorderMode};
pub use wear::Wear;
