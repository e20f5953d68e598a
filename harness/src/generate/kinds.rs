//! The presets themselves.
//!
//! A range of all parts of a kind cannot be read off one data sheet. Where a source gives an upper limit, the model
//! stays below it; where it gives measured parts, the range holds them; what lies between is the trade's usual
//! experience, or our choice, and says so.

use debounce_core::PerChange;

use super::preset::{Measured, Preset, Source, Standing, bounce, chatter, part, us};
use super::{Between, Bounce, SecondBurst};

const fn source(says: &'static str, by: &'static str, standing: Standing) -> Source {
    Source { says, by, standing }
}

const fn ms(make: u64, break_: u64) -> PerChange<u64> {
    PerChange { make: make * 1_000_000, break_: break_ * 1_000_000 }
}

const fn measured(part: &'static str, make_us: u64, break_us: u64) -> Measured {
    Measured { part, longest_ns: PerChange { make: make_us * 1_000, break_: break_us * 1_000 } }
}

/// A bounce that may show a second burst.
const fn twice(bounce: Bounce, permille: u32, after_us: (u64, u64), first_us: (u64, u64)) -> Bounce {
    let second = SecondBurst { permille, after_ns: us(after_us), first_flight_ns: us(first_us) };
    Bounce { second: Some(second), ..bounce }
}

const PLOTS: &str = "G. Suberland, switch_bouncing (public domain): 32 makes and 32 breaks a part, 5 V over 10 kOhm, \
                     read off the plots at 0.8 V (make) and 2.0 V (break)";
const SECOND: Source = source(
    "several closures show a burst, a gap of 0.2 to 0.5 ms, and a second burst",
    PLOTS,
    Standing::Read,
);
const SNAP: Source = source(
    "a snap mechanism sets the speed of impact by itself, whatever the speed of actuation",
    "how snap-action switches work",
    Standing::Practice,
);
const CHATTER: Source = source(
    "how often and how long contact resistance chatters, and what it leaves on the line",
    "our choice",
    Standing::Practice,
);
const GROWTH: Source =
    source("how flights grow over the rated life, and that life", "our choice", Standing::Practice);

pub(super) const KINDS: [Preset; 9] = [
    Preset {
        name: "tactile",
        about: "tactile dome: a push-button for a circuit board",
        part: part(
            [bounce((0, 1_300), (200, 500), (1, 40), 2), bounce((200, 1_300), (400, 650), (2, 40), 5)],
            [Some(chatter(200, (5, 100), (2, 20), (50, 700))), Some(chatter(200, (1, 1), (1, 1), (50, 500)))],
            (900, 1_050),
            (100_000, 3_000),
        ),
        longest_ns: ms(5, 5),
        longest_worn_ns: ms(20, 20),
        detent_ns: None,
        measured: &[measured("TC-1103-B-A", 6, 1_219)],
        sources: &[
            source("bounce 5 ms at most", "Omron B3F data sheet", Standing::Read),
            source("bounce 10 ms at most, make and break", "Panasonic EVPBF data sheet", Standing::Read),
            source(
                "bounce 20 ms at most after 100 000 operations",
                "Namae JTP-1136C specification",
                Standing::Read,
            ),
            source("longest of 32: make 5.5 us, break 1 219 us (TC-1103-B-A)", PLOTS, Standing::Read),
            CHATTER,
        ],
    },
    Preset {
        name: "push-button",
        about: "push-button for a panel",
        part: part(
            [
                twice(bounce((80, 600), (300, 600), (5, 50), 5), 300, (200, 500), (40, 150)),
                twice(bounce((60, 1_500), (300, 600), (5, 40), 5), 300, (200, 500), (40, 150)),
            ],
            [
                Some(chatter(300, (10, 300), (5, 50), (50, 700))),
                Some(chatter(300, (1, 1), (1, 1), (50, 500))),
            ],
            (800, 1_100),
            (1_000_000, 2_500),
        ),
        longest_ns: PerChange { make: 6_200_000, break_: 6_200_000 },
        longest_worn_ns: ms(20, 20),
        detent_ns: None,
        measured: &[
            measured("KPB22, normally closed throw", 1_191, 1_378),
            measured("KPB22, normally open throw", 1_652, 863),
            measured("MPS22-A03FP", 750, 277),
            measured("XB2-BW31B1C", 638, 3_940),
        ],
        sources: &[
            source(
                "16 switches: mean 1.557 ms, longest 6.2 ms (two outliers left out, one of them about 157 ms)",
                "J. Ganssle, A Guide to Debouncing",
                Standing::SecondHand,
            ),
            source(
                "longest of 32, make and break: 1 191 and 1 378 us, 1 652 and 863 us (KPB22, both throws), 750 and \
                 277 us (MPS22-A03FP), 638 and 3 940 us (XB2-BW31B1C)",
                PLOTS,
                Standing::Read,
            ),
            SECOND,
            CHATTER,
            GROWTH,
        ],
    },
    Preset {
        name: "snap-action",
        about: "snap-action switch: a limit or basic switch with a tripping spring",
        part: part(
            [bounce((200, 1_500), (300, 600), (5, 60), 5), bounce((30, 500), (300, 500), (3, 30), 5)],
            [Some(chatter(150, (5, 100), (2, 20), (50, 500))), None],
            (1_000, 1_000),
            (1_000_000, 2_000),
        ),
        longest_ns: ms(5, 2),
        longest_worn_ns: ms(10, 5),
        detent_ns: None,
        measured: &[],
        sources: &[
            source("bounce of a few milliseconds", "data sheets of basic switches", Standing::Practice),
            source(
                "the endurance test at logic level looks at the contact from 10 ms after the first closure, to \
                 exclude bounce",
                "MIL-PRF-22885/71C (EIA RS-448 method 17)",
                Standing::Read,
            ),
            source(
                "ordinary switches: a fraction of 1 ms to 50 ms",
                "Pico Technology, Measuring switch bounce",
                Standing::Read,
            ),
            SNAP,
            CHATTER,
            GROWTH,
        ],
    },
    Preset {
        name: "reed",
        about: "dry reed and its magnet",
        part: part(
            [bounce((15, 150), (400, 750), (1, 12), 1), bounce((1, 20), (200, 400), (1, 5), 1)],
            [Some(chatter(100, (5, 60), (2, 10), (50, 400))), None],
            (1_000, 1_000),
            (10_000_000, 2_000),
        ),
        longest_ns: PerChange { make: 1_000_000, break_: 70_000 },
        longest_worn_ns: PerChange { make: 2_000_000, break_: 150_000 },
        detent_ns: None,
        measured: &[],
        sources: &[
            source(
                "bounce 0.10 ms typically, released within 70 us, resonance 10.8 kHz (half a swing: 46 us)",
                "Coto RI-02 data sheet",
                Standing::Read,
            ),
            source("dry reeds in general: 0.5 to 1 ms", "reed-sensor.com glossary", Standing::Read),
            source("bounce near zero above about 100 mA", "Coto FR2024 technical notes", Standing::Read),
            SNAP,
            GROWTH,
        ],
    },
    Preset {
        name: "relay",
        about: "contact of a power relay",
        part: part(
            [
                twice(bounce((800, 4_300), (300, 600), (30, 230), 50), 300, (200, 500), (100, 500)),
                bounce((50, 800), (200, 450), (10, 80), 10),
            ],
            [Some(chatter(200, (20, 400), (10, 80), (50, 500))), None],
            (1_000, 1_000),
            (100_000, 2_000),
        ),
        longest_ns: ms(16, 3),
        longest_worn_ns: ms(32, 5),
        detent_ns: None,
        measured: &[measured("a power relay closing, its bounce over within", 16_000, 0)],
        sources: &[
            source(
                "a power relay closing: 4 openings inside 16 ms",
                "blog.bogpeople.com, Relay Bounce, 9 October 2012",
                Standing::Read,
            ),
            source(
                "operate and release times exclude bounce, which counts from the first closure",
                "Panasonic relay terminology",
                Standing::Read,
            ),
            source("re-closures at a release are short", "our choice", Standing::Practice),
            GROWTH,
        ],
    },
    Preset {
        name: "rocker",
        about: "rocker or toggle switch, moved by hand without a snap",
        part: part(
            [
                twice(bounce((100, 450), (300, 550), (5, 60), 5), 300, (200, 500), (40, 150)),
                bounce((8, 50), (200, 450), (1, 8), 1),
            ],
            [
                Some(chatter(400, (20, 400), (5, 50), (50, 700))),
                Some(chatter(300, (1, 1), (1, 1), (50, 600))),
            ],
            (500, 1_800),
            (50_000, 2_500),
        ),
        longest_ns: PerChange { make: 5_000_000, break_: 300_000 },
        longest_worn_ns: PerChange { make: 12_000_000, break_: 700_000 },
        detent_ns: None,
        measured: &[measured("1301.9206", 791, 68), measured("MC3813-011-01", 780, 76)],
        sources: &[
            source(
                "longest of 32, make and break: 791 and 68 us (1301.9206), 780 and 76 us (MC3813-011-01)",
                PLOTS,
                Standing::Read,
            ),
            SECOND,
            source(
                "slow hands halve the speed of impact, quick ones all but double it",
                "our choice",
                Standing::Practice,
            ),
            CHATTER,
            GROWTH,
        ],
    },
    Preset {
        name: "key-switch",
        about: "switch that a key turns",
        part: part(
            [bounce((2, 40), (200, 450), (1, 8), 1), bounce((300, 1_200), (400, 650), (2, 40), 5)],
            [Some(chatter(200, (2, 30), (1, 8), (50, 600))), Some(chatter(300, (1, 1), (1, 1), (50, 500)))],
            (600, 1_200),
            (25_000, 2_500),
        ),
        longest_ns: PerChange { make: 200_000, break_: 5_000_000 },
        longest_worn_ns: PerChange { make: 500_000, break_: 15_000_000 },
        detent_ns: None,
        measured: &[measured("IRL-5-M-D-2", 31, 2_250)],
        sources: &[
            source("longest of 32: make 31 us, break 2 250 us (IRL-5-M-D-2)", PLOTS, Standing::Read),
            source("what the speed of the hand does", "our choice", Standing::Practice),
            CHATTER,
            GROWTH,
        ],
    },
    Preset {
        name: "encoder",
        about: "detented rotary encoder: two sliding contacts a quarter cycle apart, one cycle a detent",
        part: part(
            [bounce((30, 550), (300, 600), (2, 25), 5), bounce((30, 450), (300, 600), (2, 25), 5)],
            [
                Some(chatter(400, (10, 200), (5, 40), (50, 800))),
                Some(chatter(400, (1, 1), (1, 1), (50, 700))),
            ],
            (900, 1_000),
            (30_000, 2_000),
        ),
        longest_ns: ms(2, 2),
        longest_worn_ns: ms(4, 4),
        // 24 detents a turn at 60 and at 15 turns a minute.
        detent_ns: Some(Between(41_666_667, 166_666_667)),
        measured: &[],
        sources: &[
            source(
                "bounce 2.0 ms at most at 15 turns a minute, 60 turns a minute at most",
                "Bourns PEC11R and PEC11S data sheets",
                Standing::Read,
            ),
            source("24 detents a turn", "the usual knob", Standing::Practice),
            source(
                "each quarter of a cycle lasts a quarter of it, within a fifth",
                "our choice",
                Standing::Practice,
            ),
            CHATTER,
            GROWTH,
        ],
    },
    Preset {
        name: "membrane",
        about: "membrane key: printed conductors pressed together",
        part: part(
            [bounce((50, 1_000), (200, 500), (10, 200), 10), bounce((50, 1_500), (200, 500), (10, 200), 10)],
            [
                Some(chatter(600, (200, 3_000), (20, 300), (50, 750))),
                Some(chatter(600, (1, 1), (1, 1), (50, 700))),
            ],
            (700, 1_200),
            (1_000_000, 2_000),
        ),
        longest_ns: ms(10, 6),
        longest_worn_ns: ms(20, 12),
        detent_ns: None,
        measured: &[],
        sources: &[
            source("bounce of 5 to 10 ms", "data sheets of membrane keyboards", Standing::Practice),
            source(
                "printed conductors have a resistance of their own, and settle while they are pressed",
                "how membrane keys work",
                Standing::Practice,
            ),
            CHATTER,
            GROWTH,
        ],
    },
];

#[cfg(test)]
mod tests {
    use debounce_core::{Change, Position};

    use super::*;
    use crate::generate::{Actuation, Contact, Dice};

    const CHANGES: [Change; 2] = [Change::Make, Change::Break];

    #[test]
    fn preset_can_never_bounce_longer_than_it_states_and_comes_near_it() {
        for preset in &KINDS {
            for change in CHANGES {
                for (done, stated) in
                    [(0, preset.longest_ns.at(change)), (u64::MAX, preset.longest_worn_ns.at(change))]
                {
                    let bound = preset.bound_ns(change, done);
                    let shown = format!("{} {change:?} {done}: {bound} of {stated}", preset.name);
                    assert!(bound <= stated, "{shown}");
                    // A range that is far too wide would hold anything.
                    assert!(bound * 3 > stated, "{shown}");
                }
            }
        }
    }

    /// The longest bounce of 32 operations by levels at 0.8 V and 2.0 V of 5 V, as the plots were read.
    fn longest_of_32(contact: &Contact, change: Change, seed: u64) -> u64 {
        let last = |operation| {
            let mut dice = Dice::new(seed, operation);
            let touches = contact.touches(change, 0, Actuation::Usual, 0, &mut dice);
            let still = match change {
                // A make is over when the line stays below 0.8 V, a break when it stays above 2.0 V.
                Change::Make => touches.iter().rposition(|touch| touch.apart_permille > 160),
                Change::Break => touches.iter().rposition(|touch| touch.apart_permille < 400),
            };
            still.map_or(0, |index| touches.get(index + 1).map_or(0, |touch| touch.at_ns))
        };
        (0..32).map(last).max().unwrap_or(0)
    }

    /// Every measured part lies inside what its preset states, and inside what parts drawn from the preset do when
    /// they are measured the same way.
    #[test]
    fn preset_holds_the_published_parts() {
        let mut checked = 0;
        for preset in &KINDS {
            for (change, one) in CHANGES.iter().flat_map(|&c| preset.measured.iter().map(move |one| (c, one)))
            {
                let published = one.longest_ns.at(change);
                if published == 0 {
                    continue;
                }
                checked += 1;
                assert!(published <= preset.longest_ns.at(change), "{} {}", preset.name, one.part);
                if preset.name == "relay" {
                    continue;
                }
                let drawn: Vec<u64> =
                    (0..400).map(|seed| longest_of_32(&preset.specimen(seed), change, seed)).collect();
                let (least, most) = (drawn.iter().min().unwrap(), drawn.iter().max().unwrap());
                assert!(
                    *least <= published && published <= *most,
                    "{} {change:?} {}: {published} is not within {least} to {most}",
                    preset.name,
                    one.part
                );
            }
        }
        assert_eq!(checked, 17, "every published figure");
    }

    /// A power relay closing: 4 openings inside 16 ms (blog.bogpeople.com, 9 October 2012).
    #[test]
    fn preset_relay_can_open_four_times_inside_16_ms() {
        let relay = Preset::find("relay").unwrap();
        let openings = |seed| {
            let touches =
                relay.specimen(seed).touches(Change::Make, 0, Actuation::Usual, 0, &mut Dice::new(seed, 1));
            assert!(touches.last().unwrap().at_ns <= 16_000_000);
            touches.iter().filter(|touch| touch.apart_permille == 1000).count()
        };
        let counts: Vec<usize> = (0..200).map(openings).collect();
        assert!(counts.contains(&4) && counts.iter().all(|&count| count >= 1), "{counts:?}");
    }

    /// The first flight of one part is nearly constant (J. McBride, IEEE Trans. CHMT 12 (1989) 82-90), that of
    /// different parts is not.
    #[test]
    fn preset_first_flight_is_nearly_constant_for_one_part_and_not_for_all() {
        let push = Preset::find("push-button").unwrap();
        let flight = |seed: u64, operation| {
            let part = push.specimen(seed);
            let edges = part.model.edges(Change::Make, 0, &mut Dice::new(seed, operation));
            assert_eq!(Position::Open.opposite(), Position::Closed);
            edges[2] - edges[1]
        };
        let spread = |flights: Vec<u64>| {
            let (least, most) = (*flights.iter().min().unwrap(), *flights.iter().max().unwrap());
            most as f64 / least as f64
        };
        assert!(spread((0..200).map(|operation| flight(3, operation)).collect()) <= 1.1 / 0.9);
        assert!(spread((0..200).map(|seed| flight(seed, 1)).collect()) > 4.0);
    }

    #[test]
    fn preset_names_are_words_of_their_own_and_have_sources() {
        for (index, preset) in KINDS.iter().enumerate() {
            assert!(KINDS[..index].iter().all(|other| other.name != preset.name));
            assert!(
                !preset.sources.is_empty() && preset.name.chars().all(|c| c.is_ascii_lowercase() || c == '-')
            );
            assert_eq!(Preset::find(preset.name), Some(preset));
        }
    }
}
