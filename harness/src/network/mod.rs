//! The network between the contact and the pin.
