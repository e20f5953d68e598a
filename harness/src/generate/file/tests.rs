use super::*;
use crate::generate::{BurstRate, Pickup, Timing};

const FULL: &str = r#"
[scenario]
seed = 7
resolution = "1 us"

[input]
supply = "5 V"
thresholds = { low = "0.8 V", high = "2.0 V" }
time_constant = { open = "200 us", closed = "100 us" }

[[contact]]
name = "vent"
preset = "tactile"
specimen = 3
worn = "20 %"
make = { first_flight = ["200 us", "240 us"], restitution = ["30 %", "50 %"] }

[[contact]]
name = "knob"
preset = "encoder"

[[operation]]
contact = "vent"
habit = "double-taps"
count = 60
actuation = "slow"

[[operation]]
habit = "presses"
count = 5
open = "300 ms"

[[disturbance]]
kind = "fast-transients"
rate = "100 kHz"
peak = "4 V"

[[disturbance]]
contact = "vent"
kind = "pulses"
pulses = [1, 3]
pulse = ["20 us", "200 us"]
share = "25 %"
clear = "20 ms"
"#;

fn parsed(text: &str) -> Result<Panel, Problems> {
    parse(SourceText::new("panel.toml", text), None)
}

#[track_caller]
fn refused(text: &str, told: &[&str]) {
    let problems = parsed(text).expect_err(text).to_string();
    let lines: Vec<&str> = problems.lines().collect();
    assert_eq!(lines, told, "for {text}");
}

#[test]
fn scenario_with_everything_is_read() {
    let panel = parsed(FULL).unwrap();
    assert_eq!((panel.seed, panel.resolution_ns, panel.contacts.len()), (7, 1_000, 2));
    let vent = &panel.contacts[0];
    assert_eq!((vent.done, vent.routines.len(), vent.disturbers.len()), (20_000, 2, 2));
    assert_eq!((vent.stage.supply_uv, vent.stage.apart_ns), (5_000_000, 200_000));
    assert_eq!(vent.routines[1].pause_ns.0, 300_000_000);
    assert_eq!(vent.part.model.bounce.make.restitution_permille.1, 500);
    let burst = vent.disturbers[0];
    assert!(matches!(burst.pickup, Pickup::FastTransients { rate: BurstRate::Khz100, peak_uv: 4_000_000 }));
    assert!(matches!(burst.timing, Timing::Every { period_ns } if period_ns.0 == 300_000_000));
    let knob = &panel.contacts[1];
    assert_eq!((knob.routines.len(), knob.disturbers.len()), (1, 1));
    assert!(knob.detent_ns.is_some());
    let made = panel.generate(false).unwrap();
    assert_eq!(made.lines.iter().map(|line| line.truth.len()).collect::<Vec<_>>(), [130, 10, 10]);
}

#[test]
fn scenario_seed_that_is_given_stands_over_the_file() {
    let source = SourceText::new("panel.toml", FULL);
    assert_eq!(parse(source, Some(9)).unwrap().seed, 9);
}

#[test]
fn scenario_problems_are_all_told_with_their_place_and_what_to_write() {
    refused(
        "[[contact]]\nname = \"a\"\npreset = \"tactil\"\n\n[[operation]]\ncontact = \"b\"\nhabit = \"tap\"\ncount = \"60\"\n",
        &[
            "panel.toml:3:10: \"tactil\" is not a preset; write \"tactile\"",
            "panel.toml:6:11: no contact is called \"b\"; name one of the contacts of this file, or leave contact out to mean all",
            "panel.toml:7:9: \"tap\" is not a habit; write \"taps\"",
            "panel.toml:8:9: \"60\" is not a number for count; write a whole number from 1 to 2000000, without quotation marks",
        ],
    );
    refused(
        "[[contact]]\nname = \"a\"\npreset = \"reed\"\n[[operation]]\ncount = 3\nclosed = [\"3 ms\", \"2 ms\"]\n[[disturbance]]\nkind = \"mains\"\npaek = \"3 V\"\n",
        &[
            "panel.toml:6:10: the least of a range stands first; exchange the two",
            "panel.toml:8:1: this disturbance has no peak; write peak = \"4 V\": what reaches the line",
            "panel.toml:8:1: nothing says when this disturbance comes; write every = [\"1 s\", \"3 s\"], or share = \"25 %\" of the dwells",
            "panel.toml:9:1: unknown key \"paek\" in [[disturbance]]; write peak",
        ],
    );
    refused(
        "[[contact]]\nname = \"a\"\npreset = \"reed\"\n[[operation]]\ncount = 3\n[[disturbance]]\nkind = \"mains\"\nfrequency = \"0.1 Hz\"\npeak = \"3 V\"\nevery = \"0 ms\"\n",
        &[
            "panel.toml:8:13: this is no frequency of a supply; write frequency = \"50 Hz\", or any from 1 Hz to 1 kHz",
            "panel.toml:10:9: a disturbance more often than once a millisecond never lets the line rest; write every = \"1 ms\" or longer",
        ],
    );
    refused(
        "[input]\nsupply = \"1.8 V\"\n[[contact]]\nname = \"a\"\npreset = \"reed\"\nmake = { restitution = \"95 %\" }\n",
        &[
            "panel.toml:2:1: thresholds of 0.8 V and 2 V do not lie between 0 V and the supply of 1.8 V, the low one below the high one; write supply = \"3.3 V\" and thresholds = { low = \"0.8 V\", high = \"2.0 V\" }",
            "panel.toml:6:24: restitution of more than 90 % is none of a contact; write such as restitution = \"10 %\"",
            "panel.toml:7:1: there is no operation; write [[operation]] with habit = \"presses\" and count = 60",
        ],
    );
    refused(
        "[contcat]\n",
        &[
            "panel.toml:1:2: unknown key \"contcat\" in the file; write [[contact]]",
            "panel.toml:2:1: there is no contact; write [[contact]] with name = \"vent\" and preset = \"tactile\"",
            "panel.toml:2:1: there is no operation; write [[operation]] with habit = \"presses\" and count = 60",
        ],
    );
}
