//! The network against ngspice, a general-purpose circuit simulator: times from the change of the contact to the
//! change of the reading, and the contact's current, on networks from a bare resistor to a diode behind a cable.
//!
//! The circuit is written anew for each network, node by node, with the contact as a switch and, where the input is a
//! Schmitt trigger, the input as a switch with hysteresis: none of the formulas of `harness::network` takes part.

use std::fs;
use std::process::Command;

use debounce_core::Position;
use harness::network::{Diode, Input, InputClass, Network, SCHOTTKY, SILICON, Thresholds, Unit};
use harness::quantity::Spread;
use harness::requirement::Level;

/// One network, and what it is called in a message.
struct Case {
    name: &'static str,
    network: Network,
}

fn class(name: &str) -> Input {
    Input::Class(InputClass::named(name).unwrap_or_else(|| panic!("no class {name}")))
}

fn base() -> Network {
    Network {
        closed: Level::Low,
        input: class("schmitt-pin"),
        supply: Spread::fixed(3.3),
        pull: Some(Spread::fixed(10e3)),
        discharge: Spread::fixed(0.0),
        series: Spread::fixed(0.0),
        capacitor: Spread::fixed(100e-9),
        pin_capacitance: 5e-12,
        cable: Spread::fixed(0.0),
        cable_leakage: None,
        pin_leakage: 0.0,
        contact: 0.1,
        diode: None,
    }
}

fn ohms(value: f64) -> Spread {
    Spread::fixed(value)
}

fn own(falling: f64, rising: f64) -> Input {
    Input::Own(Thresholds { rising: Spread::fixed(rising), falling: Spread::fixed(falling) })
}

fn diode(figures: harness::network::DiodeFigures, quickens_break: bool) -> Option<Diode> {
    Some(Diode { figures, quickens_break })
}

fn cases() -> Vec<Case> {
    let filter = Network { series: ohms(10e3), capacitor: ohms(10e-9), ..base() };
    let five = Network { supply: ohms(4.5), input: class("schmitt-hc"), ..filter };
    let cable = Network { cable: ohms(2.2e-9), discharge: ohms(1e3), ..filter };
    let slow = Network { series: ohms(4.7e3), capacitor: ohms(1e-6), ..base() };
    let plant = Network {
        closed: Level::High,
        input: class("industrial-3"),
        supply: ohms(24.0),
        pull: None,
        series: ohms(1e3),
        capacitor: ohms(100e-9),
        ..base()
    };
    let case = |name, network| Case { name, network };
    vec![
        case("capacitor on the contact", base()),
        case("no capacitor but the pin's", Network { capacitor: ohms(0.0), contact: 100.0, ..base() }),
        case("filter for an encoder", filter),
        case("the same at 4.5 V, Schmitt gate", five),
        case("Schmitt gate of six", Network { input: class("schmitt-hc-hex"), ..filter }),
        case("TTL Schmitt gate", Network { input: class("schmitt-hct"), ..five }),
        case("plain 3.3 V", Network { input: class("lvcmos-3.3"), ..filter }),
        case("plain 1.8 V", Network { input: class("lvcmos-1.8"), supply: ohms(1.8), ..filter }),
        case("plain 5 V", Network { input: class("lvcmos-5"), ..five }),
        case("TTL levels", Network { input: class("ttl"), ..five }),
        case("own thresholds", Network { input: own(0.9, 1.1), ..filter }),
        case("contact to the supply", Network { closed: Level::High, ..filter }),
        case("contact to the supply, Schmitt gate", Network { closed: Level::High, ..five }),
        case("cable and discharge resistor", cable),
        case("long cable, large discharge", Network { cable: ohms(22e-9), discharge: ohms(4.7e3), ..cable }),
        case("dirty contact", Network { cable_leakage: Some(100e3), ..cable }),
        case("pin that leaks", Network { pin_leakage: 10e-6, ..filter }),
        case("carbon contact", Network { contact: 220.0, ..cable }),
        case("slow microfarad", slow),
        case("silicon diode, break", Network { diode: diode(SILICON, true), ..slow }),
        case("silicon diode, make", Network { diode: diode(SILICON, false), ..slow }),
        case("Schottky diode, break", Network { diode: diode(SCHOTTKY, true), ..five }),
        case("Schottky diode, make", Network { diode: diode(SCHOTTKY, false), ..five }),
        case("diode and cable", Network { diode: diode(SILICON, true), ..cable }),
        case(
            "diode at 1.8 V",
            Network { diode: diode(SILICON, true), input: class("lvcmos-1.8"), supply: ohms(1.8), ..filter },
        ),
        case(
            "diode, contact to the supply",
            Network { closed: Level::High, diode: diode(SCHOTTKY, false), ..five },
        ),
        case("24 V input, type 3", plant),
        case("24 V input, type 1", Network { input: class("industrial-1"), cable: ohms(10e-9), ..plant }),
    ]
}

/// Seconds until the pin reads a position, by the harness.
fn time(network: &Network, unit: &Unit, position: Position) -> f64 {
    let level = network.levels_to_read(unit, position).typical;
    unit.time_to(position, unit.steady(!position), level).expect("reached")
}

/// The circuit on the board, with supply and ground where they are, at rest in the other position until `start`, when
/// the contact goes to `position`; simulated until `end` in steps of `step`.
fn deck(network: &Network, unit: &Unit, position: Position, [start, end, step]: [f64; 3]) -> String {
    let Unit { supply, .. } = *unit;
    let is_low = network.closed == Level::Low;
    let (contact_side, pull_side) = if is_low { ("0", "vcc") } else { ("vcc", "0") };
    let Thresholds { rising, falling } = network.input.thresholds(supply);
    let (middle, half) = ((rising.typ + falling.typ) / 2.0, (rising.typ - falling.typ) / 2.0);
    let mut deck = format!("network\nvcc vcc 0 {supply:e}\n");
    let mut part = |line: String| {
        deck.push_str(&line);
        deck.push('\n');
    };
    // The contact's control crosses the middle at the start, within a hundredth of a step.
    let (before, after) = if position == Position::Closed { (0, 1) } else { (1, 0) };
    let (from, until) = (start - step / 200.0, start + step / 200.0);
    part(format!("vctl ctl 0 pwl(0 {before} {from:e} {before} {until:e} {after} {end:e} {after})"));
    part("vsense k s 0".to_owned());
    part(format!("scontact s {contact_side} ctl 0 contact"));
    part(format!(".model contact sw(vt=0.5 vh=0 ron={:e} roff=1e13)", unit.contact));
    part(format!("cable k 0 {:e}", unit.cable));
    part(format!("rdirt k {contact_side} {:e}", 1.0 / unit.dirt));
    part(format!("rdis k l {:e}", unit.discharge));
    if unit.pull > 0.0 {
        part(format!("rpull l {pull_side} {:e}", 1.0 / unit.pull));
    }
    part(format!("rser l p {:e}", unit.series));
    part(format!("cpin p 0 {:e}", unit.capacitance));
    if unit.load > 0.0 {
        part(format!("rload p {pull_side} {:e}", 1.0 / unit.load));
    }
    if unit.leakage != 0.0 {
        // Towards the level of the closed contact.
        let (from, to) = if is_low { ("p", "0") } else { ("0", "p") };
        part(format!("ileak {from} {to} {:e}", unit.leakage));
    }
    if let Some(junction) = unit.diode {
        // After a break the capacitor fills from the line with the contact to ground, and empties with it to the supply.
        let (anode, cathode) = if junction.charges == is_low { ("l", "p") } else { ("p", "l") };
        let emission = junction.slope / 0.025_69;
        part(format!("dser {anode} {cathode} shunt"));
        part(format!(".model shunt d(is={:e} n={emission:e})", junction.saturation));
    }
    part("sinput out vcc p 0 input".to_owned());
    part(format!(".model input sw(vt={middle:e} vh={half:e} ron=1 roff=1e12)"));
    part("rout out 0 1e6".to_owned());
    // 25.69 mV of thermal voltage, as the harness has it, is 24.97 degrees.
    part(".options reltol=1e-5 abstol=1e-14 vntol=1e-7 temp=24.97 tnom=24.97".to_owned());
    part(format!(".tran {step:e} {end:e} 0 {step:e}"));
    let middle = supply / 2.0;
    let edge = if is_low == (position == Position::Closed) { "fall" } else { "rise" };
    part(".control".to_owned());
    part("run".to_owned());
    part(format!("meas tran seen when v(out)={middle:e} {edge}=1"));
    part(format!("meas tran rest find i(vsense) at={:e}", start / 2.0));
    part("echo found $&seen $&rest".to_owned());
    part("quit".to_owned());
    part(".endc".to_owned());
    part(".end".to_owned());
    deck
}

const MISSING: &str =
    "ngspice is missing: this check compares with it; get it with `apt-get install ngspice`";

/// What ngspice says: time until the pin reads `position`, and the contact's current at rest before that.
fn simulate(network: &Network, unit: &Unit, position: Position) -> [f64; 2] {
    let expected = time(network, unit, position);
    let step = expected / 500.0;
    let start = 10.0 * step;
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("network.cir");
    fs::write(&path, deck(network, unit, position, [start, start + 1.5 * expected, step])).expect("a file");
    let output =
        Command::new("ngspice").arg("-b").arg(&path).output().unwrap_or_else(|_| panic!("{MISSING}"));
    let said =
        String::from_utf8_lossy(&output.stdout).into_owned() + &String::from_utf8_lossy(&output.stderr);
    let found = said.lines().find_map(|line| line.strip_prefix("found "));
    let found = found.unwrap_or_else(|| panic!("ngspice measured nothing:\n{said}"));
    let numbers: Vec<f64> = found.split_whitespace().filter_map(|word| word.parse().ok()).collect();
    let [seen, rest] = numbers[..] else { panic!("not two numbers: {found}\n{said}") };
    [seen - start, rest.abs()]
}

#[track_caller]
fn within(share: f64, name: &str, what: &str, ours: f64, theirs: f64) {
    let off = ours / theirs - 1.0;
    assert!(
        off.abs() < share,
        "{name}, {what}: {ours:e} here, {theirs:e} by ngspice, off by {:.3} %",
        off * 100.0
    );
}

/// On each network both times within 1 %, and the contact's current at rest too.
#[test]
fn network_times_agree_with_a_circuit_simulator() {
    let cases = cases();
    assert!(cases.len() >= 20);
    for Case { name, network } in &cases {
        // Leakage is what the worst unit has; typically there is none.
        let leaks = network.pin_leakage > 0.0 || network.cable_leakage.is_some();
        let slowest = || network.greatest(|unit| time(network, unit, Position::Open)).unit;
        let unit = if leaks { slowest() } else { network.typical() };
        assert_eq!(leaks, unit.leakage != 0.0 || unit.dirt > 1e-9, "{name}");
        for position in [Position::Closed, Position::Open] {
            let [seen, rest] = simulate(network, &unit, position);
            within(0.01, name, &format!("to {position:?}"), time(network, &unit, position), seen);
            if position == Position::Open {
                let steady = unit.steady(Position::Closed).contact / unit.contact;
                within(0.01, name, "current at rest", steady, rest);
            }
        }
    }
}

/// At the slowest and the quickest unit over the tolerances, with a diode and without.
#[test]
fn network_extremes_agree_with_a_circuit_simulator() {
    let off = |value: f64, share: f64| Spread::new(value * (1.0 - share), value, value * (1.0 + share));
    let plain = Network {
        supply: off(3.3, 0.05),
        pull: Some(off(10e3, 0.05)),
        discharge: off(100.0, 0.05),
        series: off(4.7e3, 0.05),
        capacitor: off(100e-9, 0.25),
        cable: off(1e-9, 0.2),
        ..base()
    };
    let name = "tolerances";
    for network in [plain, Network { diode: diode(SILICON, true), ..plain }] {
        for position in [Position::Closed, Position::Open] {
            let time = |unit: &Unit| time(&network, unit, position);
            for extreme in [network.greatest(time), network.least(time)] {
                let [seen, _] = simulate(&network, &extreme.unit, position);
                within(0.01, name, &format!("to {position:?}"), extreme.value, seen);
            }
        }
    }
}
