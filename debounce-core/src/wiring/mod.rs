//! From the line to the law, and from there to the program.

mod belief;
mod bursts;
mod heartbeat;
mod monitor;
mod polarity;
mod port;
mod recorder;
mod recorder_text;
mod settling;
mod tally;
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
pub use heartbeat::{Heartbeat, TickFault};
#[cfg(feature = "mailbox")]
pub use mailbox::{Delivery, Mailbox};
pub use monitor::{Monitor, MonitorState, Outside};
#[cfg(feature = "embedded-hal")]
pub use pin::DebouncedPin;
#[cfg(feature = "embedded-hal")]
pub use pin_port::PinPort;
#[cfg(feature = "embedded-hal")]
pub use pins::DebouncedPins;
pub use polarity::{Level, Polarity};
pub use port::{DebouncedPort, PortReader};
pub use recorder::{Recorded, RecordedRun, Recorder, RecorderMode};
pub use recorder_text::RecorderText;
pub use settling::Settling;
pub use tally::Tally;
pub use wear::Wear;
