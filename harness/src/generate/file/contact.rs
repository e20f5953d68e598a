//! `[[contact]]` of a scenario file.

use debounce_core::{Change, PerChange};
use toml::de::DeValue;

use super::values::{Count, between, choice, integer, permille};
use crate::generate::contact::Bounce;
use crate::generate::panel::PanelContact;
use crate::generate::preset::Preset;
use crate::generate::stage::InputStage;
use crate::quantity::Share;
use crate::requirement::section::{Reader, Section};

pub(super) fn contact(
    reader: &mut Reader,
    mut section: Section<'_>,
    (seed, index): (u64, usize),
    stage: InputStage,
    before: &[PanelContact],
) -> Option<PanelContact> {
    let span = section.span();
    let name = reader.text(&mut section, "name", "vent");
    if !section.has("name") {
        reader.problem(span.clone(), "a contact has no name", "write name = \"vent\"");
    }
    if let Some(name) = &name
        && let Some(span) = name.origin.span()
        && before.iter().any(|other| other.name == name.value)
    {
        let message = format!("two contacts are called \"{}\"", name.value);
        reader.problem(span, message, "give each a name of its own");
    }
    let kinds = Preset::all().iter().map(|preset| preset.name);
    let preset = choice(reader, &mut section, "preset", "a preset", kinds);
    if !section.has("preset") {
        let help = "write preset = \"tactile\"; harness generate --list shows them all";
        reader.problem(span, "a contact has no preset", help);
    }
    let specimen = integer(reader, &mut section, "specimen", Count { least: 0, most: u64::from(u32::MAX) });
    let worn = worn(reader, &mut section);
    let make = bounce(reader, &mut section, "make");
    let break_ = bounce(reader, &mut section, "break");
    let detent = between(reader, &mut section, "detent");
    reader.finish(section);
    let preset = Preset::find(&preset?)?;
    // Without a number each contact is a part of its own.
    let mut part = preset.specimen(specimen.unwrap_or_else(|| seed.wrapping_add(index as u64)));
    let own = |change: Change, given: &Given| given.over(part.model.bounce.at(change));
    part.model.bounce = PerChange { make: own(Change::Make, &make), break_: own(Change::Break, &break_) };
    Some(PanelContact {
        detent_ns: detent.filter(|_| preset.detent_ns.is_some()).or(preset.detent_ns),
        done: u64::try_from(u128::from(part.wear.life) * u128::from(worn.ppm()) / 1_000_000)
            .unwrap_or(u64::MAX),
        stage,
        ..PanelContact::new(name?.value, part)
    })
}

fn worn(reader: &mut Reader, section: &mut Section<'_>) -> Share {
    match reader.quantity::<Share>(section, "worn") {
        Some(share) if share.value.ppm() > 1_000_000 => {
            if let Some(span) = share.origin.span() {
                reader.problem(
                    span,
                    "a contact cannot be worn by more than its rated life",
                    "write 100 % at most",
                );
            }
            Share::default()
        }
        share => share.map_or(Share::default(), |share| share.value),
    }
}

/// What is given of a bounce.
#[derive(Default)]
struct Given {
    first_flight: Option<super::super::Between>,
    restitution: Option<super::super::Between>,
    touch: Option<super::super::Between>,
    shortest: Option<super::super::Between>,
}

impl Given {
    fn over(&self, bounce: Bounce) -> Bounce {
        Bounce {
            first_flight_ns: self.first_flight.unwrap_or(bounce.first_flight_ns),
            restitution_permille: self.restitution.unwrap_or(bounce.restitution_permille),
            touch_ns: self.touch.unwrap_or(bounce.touch_ns),
            shortest_flight_ns: self.shortest.map_or(bounce.shortest_flight_ns, |range| range.1.max(1)),
            ..bounce
        }
    }
}

fn bounce(reader: &mut Reader, section: &mut Section<'_>, key: &'static str) -> Given {
    let Some(value) = section.take(key) else { return Given::default() };
    let DeValue::Table(table) = value.get_ref() else {
        let help = format!("write {key} = {{ first_flight = \"200 us\", restitution = \"40 %\" }}");
        reader.problem(value.span(), format!("{key} is a table"), help);
        return Given::default();
    };
    let mut inner = Section::new(key, table);
    let given = Given {
        first_flight: between(reader, &mut inner, "first_flight"),
        restitution: permille(reader, &mut inner, "restitution", (900, "90 %")),
        touch: between(reader, &mut inner, "touch"),
        shortest: between(reader, &mut inner, "shortest_flight"),
    };
    reader.finish(inner);
    given
}
