//! Requirements that cannot be read or contradict themselves, from a file or by options.

use crate::bench::{Bench, Told};

/// `choose` with the file refuses it so.
#[track_caller]
fn refuses(text: &str, told: &[Told<'_>]) {
    Bench::with("contact.toml", text).refuses(&["choose", "--requirement", "contact.toml"], told);
}

#[test]
fn requirement_without_units_is_refused_at_each_value() {
    refuses(
        "[required]\nlatency = \"20\"\nquiet = 5\n[clock]\ntick = [\"1 ms\", \"2\"]\n",
        &[
            ("contact.toml:2:11", "\"20\" has no unit", &["write \"20 ms\" or \"20 us\""]),
            ("contact.toml:3:9", "\"5\" has no unit", &["write \"5 ms\" or \"5 us\""]),
            ("contact.toml:5:17", "\"2\" has no unit", &["write \"2 ms\""]),
        ],
    );
}

#[test]
fn requirement_with_unknown_keys_suggests_those_that_were_meant() {
    refuses(
        "[required]\nlatancy = \"20 ms\"\n[clok]\ntick = \"1 ms\"\n",
        &[
            ("contact.toml:2:1", "unknown key \"latancy\" in [required]", &["write latency"]),
            ("contact.toml:3:2", "unknown key \"clok\" in the file", &["write [clock]"]),
        ],
    );
}

#[test]
fn requirement_that_is_no_toml_is_refused_at_its_place() {
    let told = ("contact.toml:2:17", "invalid basic string", &["every line is a section"][..]);
    refuses("[required]\nlatency = \"20 ms\n", &[told]);
}

#[test]
fn requirement_whose_shortest_operation_is_shorter_than_the_bounce_is_refused() {
    let message = "the shortest closed time of 5 ms is not longer than the bounce of 6 ms after a make";
    let help = "ask for a shortest closed time above 6 ms";
    refuses(
        "[required]\nshortest_closed = \"5 ms\"\nbounce = \"6 ms\"\n",
        &[("contact.toml:2:19", message, &[help])],
    );
    let options = ["choose", "--shortest-closed", "5 ms", "--bounce", "make=6 ms"];
    Bench::new().refuses(&options, &[("", message, &[help, "from the option --shortest-closed"])]);
}

#[test]
fn requirement_whose_quiet_is_below_the_disturbance_is_refused() {
    let message = "the quiet of 100 us is not longer than the disturbances of 200 us around it";
    refuses(
        "[required]\nquiet = \"100 us\"\ndisturbance = \"200 us\"\n",
        &[("contact.toml:2:9", message, &["write a quiet above 200 us"])],
    );
    let options = ["choose", "--quiet-time", "100 us", "--disturbance", "200 us"];
    Bench::new().refuses(&options, &[("", message, &["write a quiet above 200 us", "--quiet-time"])]);
}

#[test]
fn requirement_too_quick_for_every_tick_names_the_options() {
    let helps = ["--tick or under [clock]"];
    let told = ("", "no tick period serves the requirement: disturbances", &helps[..]);
    let options = ["--bounce", "5 ms", "--disturbance", "1 ms", "--quiet-time", "2 ms", "--tick", "10 ms"];
    Bench::new().refuses(&[&["choose"][..], &options].concat(), &[told]);
}

#[test]
fn requirement_that_is_not_there_or_not_text_is_refused() {
    let bench = Bench::with("empty.toml", "").and("gate.bin", b"\x00\xff\xfe").and("contact.toml", "");
    let refuses = |file: &str, told: Told<'_>| bench.refuses(&["choose", "-r", file], &[told]);
    refuses("none.toml", ("none.toml", "the requirement cannot be read: no such file", &["check the path"]));
    refuses(".", (".", "the requirement cannot be read: is a directory", &["in this folder"]));
    refuses("empty.toml", ("empty.toml", "the requirement file is empty", &["latency = \"20 ms\""]));
    refuses("gate.bin", ("gate.bin:1:2", "the requirement is not text in UTF-8", &["begins with [contact]"]));
    let told =
        ("contact.toml", "this is a requirement file, not a recording", &["--requirement contact.toml"][..]);
    bench.refuses(&["study", "contact.toml"], &[told]);
}

#[test]
fn requirement_without_a_recording_says_where_to_name_one() {
    let bench = Bench::with("contact.toml", "[required]\nlatency = \"20 ms\"\n");
    let told = ("contact.toml", "no recording is given", &["under [[recording]]"][..]);
    bench.refuses(&["study", "-r", "contact.toml"], &[told]);
    bench.refuses(&["study", "--latency", "20 ms"], &[("", "no recording is given", &["name one"])]);
}

#[test]
fn requirement_whose_recording_lies_elsewhere_is_named_beside_the_file() {
    let bench = Bench::with("contact.toml", "[[recording]]\npath = \"gate.vcd\"\n");
    bench.refuses(&["study", "-r", "contact.toml"], &[("gate.vcd", "there is no such file", &[])]);
}
