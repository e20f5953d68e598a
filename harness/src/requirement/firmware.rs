//! What was shipped for the contact: `[firmware]` of the requirement file.

use std::path::PathBuf;

use super::resolve::default_jitter;
use super::section::{Reader, Section};
use super::{Requirement, Sourced, TickChoice, folder_of};
use crate::law_text::LawParameters;
use crate::quantity::TickPeriod;

/// The configuration in the firmware tree.
#[derive(Clone, PartialEq, Debug)]
pub struct Firmware {
    /// The generated module, with the folder of the requirement file before a relative path.
    pub module: Sourced<PathBuf>,
    /// The law that was shipped; without it the best candidate is meant.
    pub law: Option<Sourced<LawParameters>>,
    /// The tick period that was shipped; without it the best of those to choose from is meant.
    pub tick: Option<Sourced<TickPeriod>>,
}

impl Requirement {
    /// The requirement with the clock narrowed to the tick period that was shipped, and the law that was shipped;
    /// where neither is stated, as it is.
    #[must_use]
    pub fn as_shipped(&self) -> (Self, Option<LawParameters>) {
        let mut narrowed = self.clone();
        let Some(firmware) = &self.firmware else { return (narrowed, None) };
        if let Some(tick) = firmware.tick {
            // The tick was chosen among others, and judged with the jitter that all of them had by default.
            let others = self.tick_periods().value;
            let shortest = others.iter().chain([&tick.value]).map(|tick| tick.nearest_ns()).min();
            narrowed.clock.jitter = self.clock.jitter.or(shortest.map(default_jitter));
            narrowed.clock.ticks = Some(tick.map(|tick| TickChoice::OneOf(vec![tick])));
        }
        (narrowed, firmware.law.map(|law| law.value))
    }
}

impl TickChoice {
    /// Whether this tick period may be chosen.
    #[must_use]
    pub fn allows(&self, tick: TickPeriod) -> bool {
        match self {
            Self::OneOf(periods) => periods.contains(&tick),
            Self::Range(from, to) => (*from..=*to).contains(&tick),
        }
    }
}

pub(super) fn read(reader: &mut Reader, mut section: Section<'_>) -> Option<Firmware> {
    let missing = reader.source.text().len();
    let has_module = section.take("module").is_some();
    let module = reader.text(&mut section, "module", "src/gate_input.rs");
    let law = law(reader, &mut section);
    let tick = reader.quantity(&mut section, "tick");
    if !has_module {
        let near = law.as_ref().and_then(|law| law.origin.span()).unwrap_or(missing..missing);
        reader.problem(
            near,
            "the firmware has no module",
            "write module = \"src/gate_input.rs\" under [firmware]",
        );
    }
    reader.finish(section);
    let folder = folder_of(&reader.source);
    Some(Firmware { module: module?.map(|path| folder.join(path)), law, tick })
}

fn law(reader: &mut Reader, section: &mut Section<'_>) -> Option<Sourced<LawParameters>> {
    let text = reader.text(section, "law", "state-machine confirm=2 patience=2 lockout=2/1")?;
    match text.value.parse::<LawParameters>() {
        Ok(law) => Some(Sourced::new(law, text.origin)),
        Err(error) => {
            let told = error.to_string();
            let (message, help) = told.split_once("; ").unwrap_or((&told, "write a law and its parameters"));
            reader.problem(text.origin.span().unwrap_or_default(), message, help);
            None
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::{Measured, Requirement, parse};
    use crate::problem::SourceText;
    use crate::quantity::Time;

    const SHIPPED: &str = "[clock]\ntick = [\"1 ms\", \"2 ms\"]\n[firmware]\nmodule = \"src/gate.rs\"\n";

    fn parsed(text: &str) -> Requirement {
        parse(SourceText::new("gate/contact.toml", text)).unwrap_or_else(|problems| panic!("{problems}"))
    }

    #[test]
    fn firmware_module_lies_beside_the_requirement() {
        let requirement = parsed(SHIPPED);
        let module = requirement.firmware.as_ref().expect("firmware").module.value.clone();
        assert_eq!(module, std::path::Path::new("gate/src/gate.rs"));
        assert_eq!(requirement.as_written(&module), std::path::Path::new("src/gate.rs"));
    }

    #[test]
    fn as_shipped_narrows_clock_and_law_to_what_is_stated() {
        let (all, law) = parsed(SHIPPED).as_shipped();
        assert_eq!((all.tick_periods().value.len(), law), (2, None));
        let stated = format!("{SHIPPED}law = \"integrator 5\"\ntick = \"2 ms\"\n");
        let (narrowed, law) = parsed(&stated).as_shipped();
        let ticks: Vec<String> = narrowed.tick_periods().value.iter().map(ToString::to_string).collect();
        assert_eq!((ticks, law), (vec!["2 ms".to_owned()], Some("integrator 5".parse().expect("a law"))));
        let jitter = |requirement: &Requirement| {
            requirement.resolve(&Measured::default()).expect("complete").jitter.value
        };
        let usual = parsed("[firmware]\nmodule = \"gate.rs\"\ntick = \"8 ms\"\n");
        assert_eq!(jitter(&usual), jitter(&usual.as_shipped().0), "what was studied is what is shipped");
        let faster = parsed("[firmware]\nmodule = \"gate.rs\"\ntick = \"10 us\"\n");
        assert_eq!(jitter(&faster.as_shipped().0), Time::from_ns(200));
    }

    #[test]
    fn tick_is_allowed_by_a_list_or_a_range_that_holds_it() {
        let allows = |text: &str, tick: &str| {
            let clock = parsed(&format!("[clock]\ntick = {text}\n")).clock;
            clock.ticks.expect("ticks").value.allows(tick.parse().expect("a tick"))
        };
        assert!(allows("[\"1 ms\", \"2 ms\"]", "2 ms") && !allows("[\"1 ms\", \"2 ms\"]", "1500 us"));
        let range = "{ from = \"1 ms\", to = \"2 ms\" }";
        assert!(allows(range, "1 ms") && allows(range, "1500 us") && allows(range, "2 ms"));
        assert!(!allows(range, "999 us") && !allows(range, "2001 us"));
    }
}
