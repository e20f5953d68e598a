//! From the line to the law.

mod polarity;

#[cfg(feature = "embedded-hal")]
mod pin;

#[cfg(feature = "embedded-hal")]
pub use pin::DebouncedPin;
pub use polarity::Polarity;
