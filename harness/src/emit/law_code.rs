//! How each law and its parameters are written in Rust.

use super::layout::{chain, grouped};
use crate::law_text::LawParameters;

/// A law as it is written in Rust.
pub(super) struct LawCode {
    /// What has to be imported for it.
    pub(super) imports: &'static [&'static str],
    /// `StateMachine<u8>`.
    pub(super) type_: String,
    /// Documented constants that hold the parameters.
    pub(super) parameters: String,
    /// The expression that makes the law of them.
    pub(super) new: String,
    /// Conditions that hold for these parameters and no others.
    pub(super) pins: Vec<String>,
}

/// The narrowest count that holds every one of the values.
fn width(values: &[u16]) -> &'static str {
    if values.iter().all(|&value| value <= u16::from(u8::MAX)) { "u8" } else { "u16" }
}

/// A documented constant.
pub(super) fn constant(doc: &str, name: &str, type_: &str, value: u64) -> String {
    format!("/// {doc}\npub const {name}: {type_} = {};\n", grouped(value))
}

/// How a law is written in Rust.
pub(super) fn law_code(law: &LawParameters) -> LawCode {
    let pin = |what: &str, value: u64| format!("{what} == {}", grouped(value));
    match *law {
        LawParameters::Integrator { full_scale, up, down } => {
            let width = width(&[full_scale, up, down]);
            LawCode {
                imports: &["Integrator"],
                type_: format!("Integrator<{width}>"),
                parameters: [
                    constant(
                        "Upper end of the count; the lower end is 0.",
                        "FULL_SCALE",
                        width,
                        full_scale.into(),
                    ),
                    constant("Counted up for a closed sample.", "UP", width, up.into()),
                    constant("Counted down for an open sample.", "DOWN", width, down.into()),
                ]
                .join("\n"),
                new: format!("Integrator::<{width}>::with_steps(FULL_SCALE, UP, DOWN)"),
                pins: vec![
                    pin("LAW.full_scale()", full_scale.into()),
                    pin("LAW.up()", up.into()),
                    pin("LAW.down()", down.into()),
                ],
            }
        }
        LawParameters::ShiftRegister { window } => LawCode {
            imports: &["ShiftRegister"],
            type_: "ShiftRegister".to_owned(),
            parameters: constant("Samples that must all be alike.", "WINDOW", "u8", window.into()),
            new: "ShiftRegister::new(WINDOW)".to_owned(),
            pins: vec![pin("LAW.window()", window.into())],
        },
        LawParameters::MajorityRegister { majority, window } => {
            let word = match window {
                0..=8 => "u8",
                9..=16 => "u16",
                _ => "u32",
            };
            LawCode {
                imports: &["MajorityRegister"],
                type_: format!("MajorityRegister<{word}>"),
                parameters: [
                    constant("So many of the last samples must be alike.", "MAJORITY", "u8", majority.into()),
                    constant("So many of the last samples are looked at.", "WINDOW", "u8", window.into()),
                ]
                .join("\n"),
                new: format!("MajorityRegister::<{word}>::new(MAJORITY, WINDOW)"),
                // `window()` counts bits and is no constant function: its parameter is pinned instead.
                pins: vec![pin("LAW.majority()", majority.into()), pin("WINDOW", window.into())],
            }
        }
        LawParameters::StateMachine { confirm, patience, lockout } => {
            let all = [confirm, patience, lockout].map(|pair| [pair.make, pair.break_]).concat();
            let width = width(&all);
            let two =
                |make: u16, break_: u16| format!("({}, {})", grouped(make.into()), grouped(break_.into()));
            let parameters = chain(
                &format!("pub const PARAMETERS: StateMachineParameters<{width}>"),
                &format!("StateMachineParameters::confirm{}", two(confirm.make, confirm.break_)),
                &[
                    format!(".patience{}", two(patience.make, patience.break_)),
                    format!(".lockout{}", two(lockout.make, lockout.break_)),
                ],
            );
            let names = ["confirm", "patience", "lockout"];
            let pins = names.iter().zip([confirm, patience, lockout]).flat_map(|(name, pair)| {
                [("make", pair.make), ("break_", pair.break_)]
                    .map(|(edge, value)| pin(&format!("LAW.parameters().{name}.{edge}"), value.into()))
            });
            LawCode {
                imports: &["StateMachine", "StateMachineParameters"],
                type_: format!("StateMachine<{width}>"),
                parameters: format!("/// In ticks, each for a make and for a break.\n{parameters}"),
                new: format!("StateMachine::<{width}>::new(PARAMETERS)"),
                pins: pins.collect(),
            }
        }
    }
}
