//! `harness network` from outside, and the same network in front of `choose`.

use crate::bench::{Bench, Told};

const FILTER: [&str; 9] = [
    "network",
    "--supply",
    "3.3 V 5 %",
    "--pull",
    "10 kohm 5 %",
    "--series",
    "1 kohm 5 %",
    "--capacitor",
    "100 nF 10 % X7R",
];

const TABLE: &str =
    "[network]\npull = \"10 kohm 5 %\"\nseries = \"1 kohm 5 %\"\ncapacitor = \"100 nF 10 % X7R\"\n";

#[test]
fn network_of_a_button_says_times_currents_and_what_it_rejects() {
    let run = Bench::new().run(&FILTER).ends(0);
    for part in [
        "the contact leads to ground",
        "Make read after",
        "Break read after",
        "a lone pulse up to",
        "75 pulses at 100 kHz (IEC 61000-4-4)",
        "from the supply while held closed",
        "the closed contact carries as little as",
        "a class 2 capacitor loses capacitance under voltage",
        "exact (one exponential for each of two capacitances)",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    assert!(run.stdout.is_ascii() && run.stderr.is_empty(), "{run:?}");
}

#[test]
fn network_at_80_columns_stays_within_them() {
    let bench = Bench::new();
    let output = bench.command().env("COLUMNS", "80").args(FILTER).output().expect("the command runs");
    let text = String::from_utf8(output.stdout).expect("UTF-8");
    let widest = text.lines().map(str::len).max().expect("lines");
    assert!(widest <= 80, "{widest} columns:\n{text}");
}

/// Filter suggested by the data sheet of Bourns PEC11H with a 74HC1G14 at 4.5 V (NXP, table 7): 107.881 us at a make,
/// 148.654 us at a break, typically.
#[test]
fn network_json_holds_the_worked_example_and_points_to_draw() {
    let line = [
        "network",
        "--input",
        "schmitt-hc",
        "--supply",
        "4.5 V 0 %",
        "--pull",
        "10 kohm",
        "--series",
        "10 kohm",
        "--capacitor",
        "10 nF",
        "--json",
    ];
    let json = Bench::new().run(&line).ends(0).json();
    let typical = |change: &str| json["result"]["delay_seconds"][change]["typ"].as_f64().expect("a number");
    // 5 pF of the pin stand beside the 10 nF.
    assert!((typical("make") / 107.881e-6 - 1.0).abs() < 2e-3, "{}", typical("make"));
    assert!((typical("break") / 148.654e-6 - 1.0).abs() < 2e-3, "{}", typical("break"));
    let edge = &json["result"]["waveforms"]["break"];
    let lane = |key: &str| {
        edge[key].as_array().expect("a list").iter().filter_map(serde_json::Value::as_f64).collect::<Vec<_>>()
    };
    let (low, typ, high) = (lane("lowest_volts"), lane("typical_volts"), lane("highest_volts"));
    assert!(low.len() > 50 && low.len() == typ.len() && typ.len() == high.len());
    assert!((0..low.len()).all(|at| low[at] <= typ[at] && typ[at] <= high[at]));
    assert_eq!(edge["threshold_volts"]["first"], 1.7);
}

#[test]
fn network_from_a_file_takes_an_option_over_it() {
    let bench = Bench::with("contact.toml", TABLE);
    let json = |arguments: &[&str]| bench.run(arguments).ends(0).json();
    let small = json(&["network", "-r", "contact.toml", "--capacitor", "10 nF J C0G", "--json"]);
    let large = json(&["network", "-r", "contact.toml", "--json"]);
    let slow =
        |json: &serde_json::Value| json["result"]["delay_seconds"]["break"]["max"].as_f64().expect("one");
    assert!(slow(&large) > 9.0 * slow(&small), "{} {}", slow(&large), slow(&small));
    let because = small["result"]["parts"].to_string();
    assert!(
        because.contains("option --capacitor") && because.contains("line 2 of the requirement"),
        "{because}"
    );
}

#[test]
fn network_that_cannot_work_ends_with_1_and_says_why() {
    let says = |arguments: &[&str], part: &str| {
        let run = Bench::new().run(&[&["network"], arguments].concat()).ends(1);
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    };
    says(&["--pull", "10 Mohm"], "some units never read it");
    says(&["--input", "lvcmos-3.3", "--capacitor", "100 nF"], "the plain input lvcmos-3.3 bears 10.0 ns/V");
    says(&["--least-current", "1 mA"], "needs 1 mA to stay clean");
    says(
        &["--capacitor", "1 uF", "--most-current", "100 mA"],
        "put a resistor between contact and capacitor",
    );
}

/// A cable at a pin holds some nanojoules: no peak of theirs is held against a contact, and none is told that the wires'
/// wave resistance forbids (50 ohm: at most 70 mA at 3.5 V, and what the pull resistor adds).
#[test]
fn network_without_a_capacitor_is_not_blamed_for_its_strays() {
    let line = ["network", "--cable", "1 nF", "--most-current", "10 mA", "--least-current", "100 uA"];
    let run = Bench::new().run(&line).ends(0);
    assert!(!run.stdout.contains("Wrong") && !run.flowing().contains("cable alone"), "{}", run.stdout);
    assert!(run.flowing().contains("a lone pulse of no width while open"), "{}", run.stdout);
    for tiny in [" ps", " fs", " ps/V", " nV", " uV", " pJ"] {
        assert!(!run.stdout.contains(tiny), "{tiny} in {}", run.stdout);
    }
    let json = Bench::new().run(&[&line[..], &["--json"]].concat()).ends(0).json();
    let most = json["result"]["contact_current_amperes"]["inrush"]["max"].as_f64().expect("a number");
    assert!(most < 0.0705, "{most}");
    // 100 nF hold a hundred times as much.
    let says = |arguments: &[&str], code: i32, part: &str| {
        let run = Bench::new().run(&[&["network"], arguments].concat()).ends(code);
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    };
    says(&["--capacitor", "100 nF"], 0, "which wears small contacts and can weld them");
    says(&["--capacitor", "100 nF", "--most-current", "1 A"], 1, "of energy), and bears 1.00 A");
    let plant = ["--input", "industrial-1", "--cable", "2 nF", "--most-current", "100 mA"];
    says(&plant, 0, "the cable alone can put 576 mA through the contact");
    says(&["--most-current", "100 uA"], 1, "the closed contact carries up to");
}

#[test]
fn network_report_is_named_in_json() {
    let bench = Bench::new();
    let line = ["network", "--pull", "10 kohm", "--report", "network.html", "--json"];
    assert_eq!(bench.run(&line).ends(0).json()["result"]["written"], serde_json::json!(["network.html"]));
    assert!(bench.path().join("network.html").is_file());
}

#[test]
fn network_of_a_controller_says_what_its_filter_is_not_part_of() {
    let run = Bench::new().run(&["network", "--input", "industrial-3", "--cable", "2 nF"]).ends(0);
    assert!(run.flowing().contains("a controller filters its inputs as well"), "{}", run.stdout);
    // A resistor as loose as one inside a chip is not compared with those in shops.
    let run = Bench::new().run(&["network", "--pull", "45 kohm 40 %"]).ends(0);
    assert!(!run.stdout.contains("preferred"), "{}", run.stdout);
}

/// 2.3 ns, 0.31 ns, 9.6 as, 100 MHz and 1 MHz: 20.1 days (blog.mbedded.ninja, "Metastability and synchronisation").
#[test]
fn network_synchroniser_fails_as_rarely_as_the_worked_example() {
    let figures = ["--settling", "2.3 ns", "--tau", "0.31 ns", "--window", "9.6 as"];
    let rates = ["--sample-rate", "100 MHz", "--edge-rate", "1 MHz"];
    let run = Bench::new().run(&[&["network"][..], &figures, &rates].concat()).ends(0);
    assert!(run.flowing().contains("fails once in 20.1 days"), "{}", run.stdout);
}

#[test]
fn network_at_24_v_and_one_that_guards_carry_their_cautions() {
    let run = Bench::new().run(&["network", "--input", "industrial-1", "--role", "guarding"]).ends(0);
    for part in ["the contact leads to the supply", "may carry mains", "debouncing makes no input safe"] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    let bench = Bench::with("contact.toml", format!("[contact]\nrole = \"metering\"\n{TABLE}"));
    let run = bench.run(&["network", "-r", "contact.toml", "--role", "control"]).ends(0);
    assert!(run.flowing().contains("fit for trade"), "{}", run.stdout);
}

#[track_caller]
fn refuses(text: &str, told: &[Told<'_>]) {
    let bench = Bench::with("contact.toml", text);
    bench.refuses(&["network", "--requirement", "contact.toml"], told);
    bench.refuses(&["choose", "--requirement", "contact.toml"], told);
}

#[test]
fn network_with_impossible_values_is_refused_at_each() {
    refuses(
        "[network]\npull = \"0 ohm\"\ncapacitor = \"2 F\"\ndiode = \"silicon\"\nsupply = \"230 V\"\n",
        &[
            ("contact.toml:2:8", "a resistor of 0 ohm cannot do this", &["write at least \"10 ohm\""]),
            ("contact.toml:3:13", "a capacitor of 2 F is none for an input", &["at most \"100 mF\""]),
            ("contact.toml:4:9", "the diode has nothing to bridge", &["write series"]),
            ("contact.toml:5:10", "a supply of 230 V is none for an input", &["mains"]),
        ],
    );
    refuses(
        "[network]\npull = \"10 kohm 120 %\"\nseries = \"1 k\"\ninput = \"schmit-pin\"\nquikens = \"make\"\n",
        &[
            ("contact.toml:2:8", "a tolerance of 120 % lets the part", &["below 100 %"]),
            ("contact.toml:3:10", "unknown unit \"k\"", &["the unit of a resistance is"]),
            ("contact.toml:4:9", "\"schmit-pin\" is no input class", &["write \"schmitt-pin\""]),
            ("contact.toml:5:1", "unknown key \"quikens\" in [network]", &["write quickens"]),
        ],
    );
    refuses(
        "[network]\nrising = \"2.0 V to 3.2 V\"\nfalling = \"2.5 V\"\nbias_loss = \"100 %\"\n",
        &[
            ("contact.toml:2:10", "lie outside what the line can show", &["below 3.13 V", "above 0 V"]),
            ("contact.toml:3:11", "lie above rising ones", &["write the lower pair as falling"]),
            ("contact.toml:4:13", "leaves no capacitance", &["below 100 %"]),
        ],
    );
}

#[test]
fn network_options_that_contradict_one_another_are_refused() {
    let refuses = |arguments: &[&str], told: Told<'_>| {
        Bench::new().refuses(&[&["network"], arguments].concat(), &[told]);
    };
    refuses(&[], ("", "nothing says what the network is", &["--pull"]));
    let mixed = ["--input", "ttl", "--rising", "1 V"];
    refuses(&mixed, ("", "has thresholds of its own", &["leave out either"]));
    refuses(&["--quickens", "make"], ("", "--quickens: there is no diode", &["diode = \"silicon\""]));
    refuses(
        &["--cable-leakage", "1 ohm"],
        ("", "a leakage of 1 ohm is a closed contact", &["at least \"1 kohm\""]),
    );
    refuses(&["--pin-leakage", "10 A"], ("", "no pin leaks 10 A", &["at most \"100 mA\""]));
    let rubber = ["--contact-resistance", "1 Mohm"];
    refuses(&rubber, ("", "a contact of 1 Mohm is not closed", &["conductive rubber"]));
    refuses(&["--tau", "1 ns"], ("", "a synchroniser has five figures", &["edge_rate"]));
    refuses(
        &["--input", "ttl", "--supply", "3.3 V"],
        ("", "leaves the range of the input ttl, 4.5 V to 5.5 V", &[]),
    );
    Bench::new().refuses_usage(
        &["network", "--pull", "10"],
        ("", "\"10\" has no unit", &["write \"10 kohm\" or \"10 ohm\""]),
    );
}

#[test]
fn choose_behind_a_network_proves_for_the_pin_and_says_what_the_network_does() {
    let figures =
        "[required]\nbounce = \"5 ms\"\ndisturbance = \"20 us\"\nquiet = \"9 ms\"\nlatency = \"40 ms\"\n";
    let bare = Bench::with("contact.toml", figures).run(&["choose", "-r", "contact.toml"]).ends(0);
    let bench = Bench::with("contact.toml", format!("{figures}{TABLE}"));
    let run = bench.run(&["choose", "-r", "contact.toml"]).ends(0);
    for part in [
        "Network delays a make by",
        "worked out from [network], over all tolerances",
        "at the pin a make may bounce for",
        "in place of 5 ms",
        "disturbances while open: rejected",
        "is never disturbed",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    assert!(!bare.stdout.contains("Network"));
    let json = bench.run(&["choose", "-r", "contact.toml", "--json"]).ends(0).json();
    let bounce = json["result"]["envelope"]["bounce_ns"]["make"].as_u64().expect("a number");
    assert!(bounce > 5_000_000, "{bounce}");
    let rows = json["result"]["requirement"].as_array().expect("a list");
    let delay = rows.iter().find(|row| row["key"] == "network.delay.break").expect("a row");
    assert_eq!(delay["origin"], "network");
}

#[test]
fn choose_behind_a_network_too_slow_for_its_operations_is_refused() {
    let text = TABLE.replace("100 nF", "10 uF");
    let bench = Bench::with("contact.toml", text);
    let help = ["less capacitance"];
    let told = ("contact.toml", "leaves nothing of the shortest", &help[..]);
    bench.refuses(&["choose", "-r", "contact.toml"], &[told]);
}

/// A recording of the contact goes through the network before the logic samples it, and is held against the contact's
/// own envelope.
#[test]
fn study_behind_a_network_measures_at_the_pin() {
    let mut csv = "time_us,gate\n0,1\n".to_owned();
    for operation in 0..30 {
        let make = 200_000 + operation * 400_000;
        for (at, level) in [(0, 0), (150, 1), (300, 0), (150_000, 1), (150_100, 0), (150_200, 1)] {
            csv.push_str(&format!("{},{level}\n", make + at));
        }
    }
    csv.push_str("12600000,1\n");
    let bench =
        Bench::with("gate.csv", csv).and("contact.toml", format!("[clock]\ntick = \"1 ms\"\n{TABLE}"));
    let run = bench.run(&["study", "gate.csv", "-r", "contact.toml", "--time-unit", "us"]).ends(0);
    for part in ["Network delays a make by", "lies inside the envelope of the contact that the network"] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
}

/// The bounds of this network lie on the wrong side of the nearest three digits: 793.24 us, 147.51 us and 16.23 us.
#[test]
fn network_bounds_are_rounded_to_the_safe_side() {
    let table = "[network]\nsupply = \"3.3 V 5 %\"\npull = \"47 kohm 5 %\"\nseries = \"1 kohm 5 %\"\n\
                 capacitor = \"10 nF 10 % X7R\"\n";
    let bench = Bench::with("contact.toml", table);
    let run = bench.run(&["network", "-r", "contact.toml"]).ends(0);
    let delays =
        bench.run(&["network", "-r", "contact.toml", "--json"]).ends(0).json()["result"]["delay_seconds"]
            .clone();
    let us = |change: &str, end: &str| delays[change][end].as_f64().expect("a number") * 1e6;
    assert!(
        (us("break", "max") - 793.24).abs() < 0.1 && (us("break", "min") - 147.51).abs() < 0.02,
        "{delays}"
    );
    assert!((us("make", "max") - 16.23).abs() < 0.01, "{delays}");
    for part in [
        "read after 147 us at least",
        "794 us at most",
        "16.3 us at most",
        "held for 794 us is seen",
        "up to 147 us while closed",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
}
