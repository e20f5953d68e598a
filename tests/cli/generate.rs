//! `harness generate` from outside.

use crate::bench::Bench;

const PANEL: &str = r#"[scenario]
seed = 3

[input]
time_constant = { open = "200 us", closed = "100 us" }

[[contact]]
name = "vent"
preset = "tactile"

[[contact]]
name = "knob"
preset = "encoder"

[[operation]]
habit = "presses"
count = 30

[[disturbance]]
contact = "vent"
kind = "fast-transients"
rate = "100 kHz"
peak = "40 V"
"#;

#[test]
fn generate_of_a_preset_writes_a_recording_that_the_other_commands_read() {
    let bench = Bench::new();
    let run = bench
        .run(&["generate", "push-button", "--operations", "40", "--seed", "7", "--output", "button.vcd"])
        .ends(0);
    assert!(run.flowing().contains("push-button (invented, seed 7)"), "{}", run.stdout);
    assert!(run.flowing().contains("80 changes"), "{}", run.stdout);
    assert_eq!(bench.listing().into_keys().collect::<Vec<_>>(), ["button.truth.csv", "button.vcd"]);

    // The command that the answer proposes works as it stands.
    let flowing = run.flowing();
    let next = flowing.split("Next harness ").nth(1).expect("a proposal");
    let next: Vec<&str> = next
        .split('"')
        .enumerate()
        .flat_map(|(index, part)| if index % 2 == 1 { vec![part] } else { part.split_whitespace().collect() })
        .collect();
    let characterised = bench.run(&next).ends(0);
    assert!(characterised.flowing().contains("40 makes, 40 breaks"), "{}", characterised.stdout);

    let replay = ["replay", "shift-register 8", "button.vcd", "--closed", "high", "--tick", "1 ms"];
    let replayed = bench.run(&[&replay[..], &["--truth", "button.truth.csv"]].concat()).ends(0);
    assert!(replayed.flowing().contains("40 changes"), "{}", replayed.stdout);
    bench.refuses(
        &[&replay[..], &["--truth", "button.vcd"]].concat(),
        &[("button.vcd:1:1", "this is no truth file", &["its first line reads channel,event"])],
    );
}

#[test]
fn generate_gives_the_same_bytes_for_the_same_seed_and_others_for_another() {
    let files = |seed: &str| {
        let bench = Bench::with("panel.toml", PANEL);
        let run = bench.run(&["generate", "panel.toml", "--seed", seed, "--output", "p.csv", "--volts"]);
        run.ends(0);
        bench.listing()
    };
    let first = files("3");
    assert_eq!(
        first.keys().map(String::as_str).collect::<Vec<_>>(),
        ["p.csv", "p.truth.csv", "p.volts.csv", "panel.toml"]
    );
    assert!(first == files("3"));
    assert!(first["p.csv"] != files("4")["p.csv"]);
}

/// These bytes hold on every platform: a change here is a change of what every seed gives.
#[test]
fn generate_gives_pinned_bytes() {
    let bench = Bench::with("panel.toml", PANEL);
    bench.run(&["generate", "panel.toml", "--output", "p.csv", "--volts"]).ends(0);
    let sums = ["p.csv", "p.truth.csv", "p.volts.csv"].map(|name| {
        let bytes = bench.listing()[name].clone().expect("a file");
        // FNV-1a with 64 bits, offset and prime as its authors publish them.
        bytes.iter().fold(0xcbf2_9ce4_8422_2325_u64, |sum, &byte| {
            (sum ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3)
        })
    });
    assert_eq!(sums, PINNED, "{sums:#x?}");
}

const PINNED: [u64; 3] = [0xff80_2bbe_c4fb_dda1, 0xcfe4_78af_fce5_b483, 0x934f_3c48_bff2_28ab];

#[test]
fn generate_lists_every_preset_with_its_sources() {
    let run = Bench::new().run(&["generate", "--list"]).ends(0);
    for part in [
        "tactile",
        "snap-action",
        "reed",
        "relay",
        "rocker",
        "encoder",
        "membrane",
        "Omron B3F data sheet",
        "[as published]",
        "[common practice]",
        "[second-hand]",
        "[from memory]",
        "double-taps",
    ] {
        assert!(run.stdout.contains(part), "{part} is not in {}", run.stdout);
    }
    assert!(run.stdout.is_ascii());
    let json = Bench::new().run(&["generate", "--list", "--json"]).ends(0).json();
    assert_eq!(json["result"]["presets"].as_array().map(Vec::len), Some(9));
}

#[test]
fn generate_without_an_output_says_what_it_would_be_and_writes_nothing() {
    let bench = Bench::new();
    let run = bench.run(&["generate", "encoder", "--operations", "12"]).ends(0);
    assert!(run.flowing().contains("by 12 detents") && run.stderr.contains("nothing is written"), "{run:?}");
    assert!(bench.listing().is_empty());
    let json = bench.run(&["generate", "encoder", "--operations", "12", "--json", "--quiet"]).ends(0).json();
    assert_eq!(json["result"]["detents"], 12);
    assert_eq!(json["result"]["channels"][1]["channel"], "encoder.b");
}

#[test]
fn generate_from_bad_input_is_refused_and_writes_nothing() {
    let bench = Bench::with(
        "bad.toml",
        "[[contact]]\nname = \"a\"\npreset = \"ree\"\n[[operation]]\nhabit = \"taps\"\n",
    );
    bench.refuses(
        &["generate", "bad.toml", "--output", "a.vcd"],
        &[
            ("bad.toml:3:10", "\"ree\" is not a preset", &["write \"reed\""]),
            ("bad.toml:5:1", "an operation has no count", &["write count = 60"]),
        ],
    );
    bench.refuses(
        &["generate", "tactil"],
        &[("", "\"tactil\" is not a preset, and a scenario file ends in .toml", &["write tactile"])],
    );
    bench
        .refuses(&["generate", "reed", "--habit", "tap"], &[("", "\"tap\" is not a habit", &["write taps"])]);
    bench.refuses(
        &["generate", "reed", "--output", "a.txt"],
        &[("a.txt", "a recording is written as VCD or as CSV", &["ends in .vcd or .csv"])],
    );
    bench.refuses(
        &["generate", "bad.toml", "--operations", "5"],
        &[("bad.toml", "--operations is for a preset", &["write count under [[operation]]"])],
    );
    bench.refuses(
        &["generate", "reed", "--resolution", "0 us"],
        &[("", "a sample period of 0 is none", &["--resolution \"1 us\""])],
    );
    bench.refuses(
        &["generate", "none.toml"],
        &[("none.toml", "the scenario cannot be read: no such file", &["harness generate --list"])],
    );
    Bench::new().refuses_usage(
        &["generate", "reed", "--operations", "0"],
        ("", "invalid value '0' for '--operations <COUNT>'", &[]),
    );
}

#[cfg(unix)]
#[test]
fn generate_on_a_full_disk_leaves_nothing() {
    let bench = Bench::new();
    let run = bench.run_without_room(&["generate", "relay", "--output", "a.vcd"]);
    assert_eq!(run.code, Some(2), "{run:?}");
    assert!(run.stderr.contains("the file cannot be written"), "{run:?}");
    assert!(bench.listing().is_empty());
}
