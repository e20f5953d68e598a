//! The guide: from a contact on the bench to firmware with a proven input, and on to the check that keeps it so.
//!
//! Its pages are the files of `harness/guide`, to be read there as well. Every command in them is run by the tests.

/// Where the links of the pages lead here. In the files they lead to files; of two definitions the first counts.
macro_rules! links {
    () => {
        "[contents]: crate::guide::contents
[record]: crate::guide::record
[figures]: crate::guide::figures
[choose]: crate::guide::choose
[prove]: crate::guide::prove
[ship]: crate::guide::ship
[keep]: crate::guide::keep
[own]: crate::guide::own
[others]: crate::guide::others
[network]: crate::guide::network
[invent]: crate::guide::invent
[case_panel]: crate::guide::case_panel
[case_reed]: crate::guide::case_reed
[case_limit_switch]: crate::guide::case_limit_switch
[case_encoder]: crate::guide::case_encoder
[case_remote]: crate::guide::case_remote
[ContactPair]: debounce_core::ContactPair
[Detents]: debounce_core::Detents
[Monitor]: debounce_core::Monitor
[Polarity]: debounce_core::Polarity
[PulseCounter]: debounce_core::PulseCounter
[Quadrature]: debounce_core::Quadrature
[Recorder]: debounce_core::Recorder
[Settling]: debounce_core::Settling
[Starting]: debounce_core::Starting
[Wear]: debounce_core::Wear

"
    };
}

/// A module for each page.
macro_rules! pages {
    ($($page:ident = $file:literal,)+) => {
        $(
            #[doc = links!()]
            #[doc = include_str!($file)]
            pub mod $page {}
        )+
    };
}

#[doc = links!()]
#[doc = include_str!("../guide/README.md")]
pub mod contents {}

pages! {
    record = "../guide/record.md",
    figures = "../guide/figures.md",
    choose = "../guide/choose.md",
    prove = "../guide/prove.md",
    ship = "../guide/ship.md",
    keep = "../guide/keep.md",
    own = "../guide/own.md",
    others = "../guide/others.md",
    network = "../guide/network.md",
    invent = "../guide/invent.md",
    case_panel = "../guide/case_panel.md",
    case_reed = "../guide/case_reed.md",
    case_limit_switch = "../guide/case_limit_switch.md",
    case_encoder = "../guide/case_encoder.md",
    case_remote = "../guide/case_remote.md",
}
