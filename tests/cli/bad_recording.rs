//! Recordings that are none, or not the ones that were meant.

use crate::bench::Bench;

const HEADER: &str = "$timescale 1 us $end\n$scope module top $end\n$var wire 1 ! gate $end\n\
                      $var wire 1 \" lamp $end\n$upscope $end\n$enddefinitions $end\n";

fn vcd(changes: &str) -> String {
    format!("{HEADER}{changes}")
}

#[test]
fn recording_that_is_missing_is_named_with_its_neighbour() {
    let told = ("gaet.vcd", "there is no such file", &["did you mean gate.vcd?"][..]);
    Bench::with("gate.vcd", vcd("#0\n")).refuses(&["study", "gaet.vcd"], &[told]);
    // A name that only ends alike was not meant.
    let told = ("other.vcd", "there is no such file", &["check the path"][..]);
    Bench::with("gate.vcd", vcd("#0\n")).refuses(&["characterise", "other.vcd"], &[told]);
}

#[test]
fn recording_that_is_a_folder_is_refused() {
    let told = (".", "is a folder, not a recording", &["name a file in it"][..]);
    Bench::new().refuses(&["study", "."], &[told]);
}

#[test]
fn recording_that_is_empty_is_refused() {
    let told = ("gate.vcd", "is empty", &["export the recording again, as VCD or CSV"][..]);
    Bench::with("gate.vcd", "").refuses(&["study", "gate.vcd"], &[told]);
}

#[test]
fn recording_of_binary_rubbish_is_refused() {
    let rubbish: Vec<u8> = (0..4096_u32).map(|n| (n.wrapping_mul(2_654_435_761) >> 13) as u8).collect();
    let told = ("gate.vcd", "is no text", &["export the recording as VCD or CSV"][..]);
    Bench::with("gate.vcd", rubbish).refuses(&["study", "gate.vcd"], &[told]);
}

#[test]
fn recording_with_an_undeclared_code_is_refused_at_each_place() {
    let told = [
        ("gate.vcd:10:1", "identifier code \"?\" was not declared", &["declare it with $var"][..]),
        ("gate.vcd:12:1", "identifier code \"%%\" was not declared", &[]),
    ];
    Bench::with("gate.vcd", vcd("#0\n0!\n#100\n1?\n#200\n0%%\n1!\n"))
        .refuses(&["study", "gate.vcd", "--channel", "gate"], &told);
}

#[test]
fn recording_with_time_running_backwards_is_refused() {
    let told = ("gate.vcd:11:1", "time goes back from 100 to 50", &["in the order of their times"][..]);
    Bench::with("gate.vcd", vcd("#0\n0!\n#100\n1!\n#50\n0!\n"))
        .refuses(&["characterise", "gate.vcd", "--channel", "gate"], &[told]);
    let told =
        ("gate.csv:4:1", "time 1 is not later than the 2 before it", &["put the rows in the order"][..]);
    Bench::with("gate.csv", "time [ms],gate\n0,0\n2,1\n1,0\n").refuses(&["study", "gate.csv"], &[told]);
}

#[test]
fn recording_without_that_channel_lists_those_it_has() {
    let bench = Bench::with("gate.vcd", vcd("#0\n0!\n0\"\n#100\n1!\n"));
    let helps =
        ["did you mean \"top.gate\"?", "the channels are: top.gate, top.lamp", "--channel \"top.gate\""];
    let told = ("gate.vcd", "has no channel \"top.gaet\"", &helps[..]);
    bench.refuses(&["study", "gate.vcd", "--channel", "top.gaet"], &[told]);
    let helps = ["choose one", "the channels are: top.gate, top.lamp", "--channel \"top.gate\""];
    bench.refuses(&["study", "gate.vcd"], &[("gate.vcd", "has 2 channels", &helps)]);
    let helps = ["did you mean \"gate\"?", "the columns are: time, gate, lamp"];
    let told = ("gate.csv", "has no channel \"gte\"", &helps[..]);
    Bench::with("gate.csv", "time [ms],gate,lamp\n0,0,1\n1,1,1\n")
        .refuses(&["study", "gate.csv", "--channel", "gte"], &[told]);
}

#[test]
fn recording_with_short_rows_is_refused_at_each_of_them() {
    let told = [
        ("gate.csv:3:2", "the row has 1 of the 2 fields that it needs", &["write what is missing"][..]),
        ("gate.csv:5:2", "the row has 1 of the 2 fields that it needs", &[]),
    ];
    Bench::with("gate.csv", "time [ms],gate\n0,0\n1\n2,1\n3\n4,0\n").refuses(&["study", "gate.csv"], &told);
}

#[test]
fn recording_with_text_in_a_number_column_is_refused_at_each_place() {
    let told = [
        ("gate.csv:3:3", "\"up\" is not a level", &["use 0 or 1, or low or high"][..]),
        ("gate.csv:5:1", "\"soon\" is not a time", &["a time is a number"]),
    ];
    Bench::with("gate.csv", "time [ms],gate\n0,0\n1,up\n2,1\nsoon,1\n4,0\n")
        .refuses(&["study", "gate.csv"], &told);
    let told = ("gate.csv:3:3", "\"high-ish\" is not a voltage", &["a voltage is a number such as 3.3"][..]);
    let thresholds = ["--threshold-low", "1 V", "--threshold-high", "2 V"];
    Bench::with("gate.csv", "time [ms],gate [V]\n0,0.1\n1,high-ish\n2,3.1\n")
        .refuses(&[&["study", "gate.csv"][..], &thresholds].concat(), &[told]);
}

#[test]
fn recording_with_very_many_bad_lines_lists_the_first_and_says_so() {
    let bad = "x y z\n".repeat(30);
    let run = Bench::with("gate.vcd", vcd(&bad)).run(&["study", "gate.vcd", "--channel", "gate"]).ends(2);
    assert_eq!(run.stderr.matches("error: gate.vcd:").count(), 21, "{}", run.stderr);
    assert!(run.stderr.contains("more bad lines follow"), "{}", run.stderr);
}

#[test]
fn recording_in_volts_without_thresholds_proposes_some_that_work() {
    let volts = |ms: u32| if (200..400).contains(&(ms % 500)) { "3.0" } else { "0.0" };
    let rows: String = (0..1_000).map(|ms| format!("{ms},{}\n", volts(ms))).collect();
    let bench = Bench::with("gate.csv", format!("time [ms],gate [V]\n{rows}"));
    let helps = [
        "--threshold-low \"0.9 V\" --threshold-high \"2.1 V\"",
        "thresholds = { low = \"0.9 V\", high = \"2.1 V\" } under [[recording]]",
    ];
    let told = ("gate.csv:2:3", "channel gate holds voltages, from 0 V to 3 V", &helps[..]);
    bench.refuses(&["characterise", "gate.csv"], &[told]);
    // Both spellings, as they were proposed, are taken.
    let options = ["--threshold-low", "0.9 V", "--threshold-high", "2.1 V", "--closed", "high"];
    let by_options = bench.run(&[&["characterise", "gate.csv"][..], &options].concat()).ends(0);
    assert!(by_options.flowing().contains("2 makes, 2 breaks"), "{}", by_options.stdout);
    let file = "[contact]\nclosed = \"high\"\n[[recording]]\npath = \"gate.csv\"\n\
                thresholds = { low = \"0.9 V\", high = \"2.1 V\" }\n";
    let by_file = bench.and("contact.toml", file).run(&["characterise", "-r", "contact.toml"]).ends(0);
    assert_eq!(by_file.stdout, by_options.stdout);
}

/// Everything about how a file is read may stand in the requirement file, and an option stands over it.
#[test]
fn recording_is_read_as_the_requirement_file_says() {
    let level = |n: u32| u32::from((200..400).contains(&(n % 500)));
    let rows: String = (0..1_000).map(|n| format!("{n};{}\n", level(n))).collect();
    let key =
        |key: &str| format!("[contact]\nclosed = \"high\"\n[[recording]]\npath = \"gate.csv\"\n{key}\n");
    let bench = Bench::with("gate.csv", format!("n;gate\n{rows}"))
        .and("period.toml", key("sample_period = \"200 us\"\nresolution = \"1 ms\"\ngap = \"5 ms\""))
        .and("unit.toml", key("time_unit = \"ms\"\ndelimiter = \"semicolon\"\ntime_column = \"n\""))
        .and("wrong.toml", key("delimiter = \"comma\""));
    let by_option = [
        "gate.csv",
        "--closed",
        "high",
        "--sample-period",
        "200 us",
        "--resolution",
        "1 ms",
        "--gap",
        "5 ms",
    ];
    let by_option = bench.run(&[&["characterise"][..], &by_option].concat()).ends(0);
    assert!(by_option.flowing().contains("200 ms: 2 makes, 2 breaks"), "{}", by_option.stdout);
    assert!(
        by_option.flowing().contains("a burst ends after 5 ms of rest, as stated"),
        "{}",
        by_option.stdout
    );
    let by_file = bench.run(&["characterise", "-r", "period.toml"]).ends(0);
    assert_eq!(by_file.stdout, by_option.stdout);
    let run = bench.run(&["characterise", "-r", "unit.toml"]).ends(0);
    assert!(run.flowing().contains("1 s: 2 makes, 2 breaks"), "{}", run.stdout);
    let run = bench
        .run(&["characterise", "-r", "unit.toml", "--sample-period", "10 us", "--gap", "500 us"])
        .ends(0);
    assert!(run.flowing().contains("10 ms: 2 makes, 2 breaks"), "{}", run.stdout);
    let told = ("gate.csv", "holds no row of a time and a level", &["delimiter under [[recording]]"][..]);
    bench.refuses(&["replay", "integrator 3", "-r", "wrong.toml"], &[told]);
    let told = ("bad.toml:5:13", "\"hours\" is not a unit of time", &["write \"s\""][..]);
    bench.and("bad.toml", key("time_unit = \"hours\"")).refuses(&["study", "-r", "bad.toml"], &[told]);
}

#[test]
fn recording_with_thresholds_the_wrong_way_round_is_refused() {
    let told = ("", "--threshold-low 2 V is not below --threshold-high 1 V", &["give low below high"][..]);
    Bench::with("gate.csv", "time [ms],gate [V]\n0,0.1\n1,3.1\n")
        .refuses(&["study", "gate.csv", "--threshold-low", "2 V", "--threshold-high", "1 V"], &[told]);
}

#[test]
fn recording_whose_times_have_no_unit_asks_for_it_and_takes_it() {
    let bench = Bench::with("gate.csv", "t,gate\n0,0\n40,1\n90,0\n130,1\n200,1\n");
    let told = ("gate.csv", "has whole numbers as times", &["--time-unit us"][..]);
    bench.refuses(&["characterise", "gate.csv"], &[told]);
    let run = bench.run(&["characterise", "gate.csv", "--time-unit", "ms", "--closed", "high"]).ends(0);
    assert!(run.flowing().contains("200 ms: 2 makes, 1 break"), "{}", run.stdout);
}

#[test]
fn recording_without_an_operation_is_refused() {
    let told = ("gate.vcd", "holds no operation: the line stays closed", &["check the channel"][..]);
    let bench = Bench::with("gate.vcd", vcd("#0\n0!\n#100000\n"));
    for command in [&["study"][..], &["characterise"], &["replay", "integrator 5"], &["choose"]] {
        bench.refuses(&[command, &["gate.vcd", "--channel", "gate"]].concat(), &[told]);
    }
}

#[test]
fn recording_with_a_sample_period_of_nothing_is_refused() {
    let bench = Bench::with("gate.csv", "n,gate\n0,0\n1,1\n2,1\n3,0\n");
    for option in ["--resolution", "--sample-period"] {
        let message = format!("{option} of 0 is no time");
        let told = ("", message.as_str(), &["\"1 us\", or leave it out"][..]);
        bench.refuses(&["characterise", "gate.csv", option, "0 us"], &[told]);
    }
}

#[test]
fn recording_of_nothing_but_disturbances_is_refused_in_units_that_people_read() {
    let told = (
        "gate.vcd",
        "every burst of its 4 edges returns to where it began or is cut off (a burst ends after 14.1 ms of rest)",
        &["record a whole make or break"][..],
    );
    let spikes = "#0\n1!\n#200000\n0!\n#201000\n1!\n#500000\n0!\n#501000\n1!\n#900000\n";
    Bench::with("gate.vcd", vcd(spikes)).refuses(&["study", "gate.vcd", "--channel", "gate"], &[told]);
}

#[test]
fn recordings_of_which_two_are_bad_are_both_told_of() {
    let told = [
        ("b.csv:3:3", "\"up\" is not a level", &["use 0 or 1"][..]),
        ("b.csv:4:2", "the row has 1 of the 2 fields", &[]),
        ("a.vcd", "is empty", &["export the recording again"]),
    ];
    Bench::with("a.vcd", "")
        .and("b.csv", "time [ms],gate\n0,0\n1,up\n2\n3,1\n4,0\n")
        .refuses(&["study", "b.csv", "a.vcd"], &told);
}

#[test]
fn recording_that_begins_in_mid_bounce_is_replayed_all_the_same() {
    // The first make has no rest before it, so nobody knows where its bounce began; it is a change nevertheless.
    let changes = "#0\n1!\n#200\n0!\n#100000\n1!\n#200000\n0!\n#300000\n1!\n#400000\n";
    let bench = Bench::with("gate.vcd", vcd(changes));
    let law = ["replay", "shift-register 5", "gate.vcd", "--channel", "gate", "--tick", "1 ms"];
    let run = bench.run(&law).ends(0);
    assert!(
        run.flowing().contains("Makes 2 changes") && run.flowing().contains("Breaks 2 changes"),
        "{run:?}"
    );
}

#[test]
fn recording_that_contradicts_every_requirement_is_characterised_all_the_same() {
    // With this gap the make bounces for 120 ms and, less the margin, the contact is closed for only 124 ms.
    let edges: String = [100, 130, 160, 190, 220, 255]
        .iter()
        .enumerate()
        .map(|(n, ms)| format!("#{ms}000\n{}!\n", n % 2))
        .collect();
    let bench = Bench::with("gate.vcd", vcd(&format!("#0\n1!\n{edges}#500000\n")));
    let line = ["gate.vcd", "--channel", "gate", "--gap", "32 ms"];
    let run = bench.run(&[&["characterise"][..], &line].concat()).ends(0);
    assert!(run.flowing().contains("bounce at a make median 120 ms"), "{}", run.stdout);
    let study = bench.run(&[&["study"][..], &line].concat()).ends(2);
    assert!(
        study.stderr.contains("is not longer than the bounce of 150 ms after a make"),
        "{}",
        study.stderr
    );
}

#[test]
fn recording_with_two_rows_of_one_time_is_told_so() {
    let told = (
        "eq.csv:4:1",
        "time 0.5 is also that of the row before it",
        &["export more digits of the times, or leave one of the two rows out"][..],
    );
    Bench::with("eq.csv", "Time [s],A\n0.0,0\n0.5,1\n0.5,0\n0.9,1\n").refuses(&["study", "eq.csv"], &[told]);
}

#[test]
fn recording_of_a_dead_channel_names_the_others() {
    let rows: String = (0..40)
        .map(|row| format!("{row},{},{}\n", f64::from(row % 5) / 100.0, row % 2 * 5 + row % 3))
        .collect();
    let bench = Bench::with("scope.csv", format!("time [ms],gate [V],lamp [V],\n{rows}"));
    let told = (
        "scope.csv:2:3",
        "channel gate holds voltages, from 0 V to 0.04 V, which look like noise",
        &["is this the right channel? the others are: lamp (volts)", "give --channel \"lamp\""][..],
    );
    bench.refuses(&["study", "scope.csv", "--channel", "gate"], &[told]);
    // The same with thresholds that it misses; and the other channel gets thresholds.
    let line =
        ["study", "scope.csv", "--channel", "gate", "--threshold-low", "0.8 V", "--threshold-high", "2 V"];
    let told =
        ("scope.csv", "never reaches the upper threshold of 2 V", &["the others are: lamp (volts)"][..]);
    bench.refuses(&line, &[told]);
    let run = bench.run(&["study", "scope.csv", "--channel", "lamp"]).ends(2);
    assert!(run.told().contains("give --threshold-low \"2.1 V\""), "{}", run.stderr);
}

#[test]
fn recording_that_is_a_script_is_no_recording() {
    let script = "import random\nrandom.seed(5)\ndef bounces(t, n):\n    if n == 0: return [(t, 1)]\n    x = [1, 2, 3]\n\
                  0, 1\n    for x in ts:\n        c = 1 - c\n    return ev\nops(12)\nprint(out)\nprint(ev)\nprint(t)\n";
    let told = (
        "gen.py",
        "is no recording that this reads: of its first",
        &["a recording is a VCD, a CSV with a time"][..],
    );
    Bench::with("gen.py", script).refuses(&["characterise", "gen.py"], &[told]);
}

#[test]
fn recording_without_so_long_a_rest_as_stated_is_told_how_long_it_is() {
    let edges: String = (1..50).map(|edge| format!("#{}\n{}!\n", edge * 400_000, edge % 2)).collect();
    let told = (
        "gate.vcd",
        "the stated gap of 1 s ends no burst: of the 49 edges no two are further apart than 400 ms",
        &["state a shorter gap"][..],
    );
    Bench::with("gate.vcd", vcd(&format!("#0\n0!\n{edges}#20000000\n")))
        .refuses(&["characterise", "gate.vcd", "--channel", "gate", "--gap", "1 s"], &[told]);
}

#[test]
fn help_of_an_error_is_wrapped_and_quoted_text_is_not_broken() {
    let run = Bench::with("gate.csv", "t,gate\n0,0\n2,1\n5,0\n").run(&["study", "gate.csv"]).ends(2);
    assert!(
        run.stderr.lines().filter(|line| !line.starts_with("error")).all(|line| line.len() <= 100),
        "{}",
        run.stderr
    );
    assert!(run.stderr.contains("\n      ") && run.stderr.contains("\"10 us\""), "{}", run.stderr);
}
