//! `[[disturbance]]` of a scenario file.

use super::For;
use super::values::{self, Count, between, choice, permille};
use crate::generate::dice::Between;
use crate::generate::disturbance::Disturbances;
use crate::generate::pickup::{BURST_PERIOD_NS, BurstRate, Disturber, Pickup, Timing};
use crate::quantity::{TickPeriod, Voltage};
use crate::requirement::section::{Reader, Section};

const KINDS: [&str; 6] = ["pulses", "vibration", "fast-transients", "discharge", "mains", "cross-talk"];

pub(super) fn disturbance(reader: &mut Reader, mut section: Section<'_>) -> Option<For<Disturber>> {
    let span = section.span();
    let name = values::name(reader, &mut section);
    let kind = choice(reader, &mut section, "kind", "a kind of disturbance", KINDS.into_iter());
    if !section.has("kind") {
        reader.problem(span, "a disturbance has no kind", "write kind = \"fast-transients\"");
    }
    let kind = kind?;
    let pickup = pickup(reader, &mut section, &kind);
    let timing = timing(reader, &mut section, &kind);
    reader.finish(section);
    Some((name, Disturber { pickup: pickup?, timing: timing? }))
}

fn pickup(reader: &mut Reader, section: &mut Section<'_>, kind: &str) -> Option<Pickup> {
    Some(match kind {
        "pulses" => Pickup::Pulses(pulses(reader, section)?),
        "vibration" => Pickup::Vibration(pulses(reader, section)?),
        "fast-transients" => {
            let rate = choice(reader, section, "rate", "a rate of a burst", ["5 kHz", "100 kHz"].into_iter());
            let rate = if rate.as_deref() == Some("100 kHz") { BurstRate::Khz100 } else { BurstRate::Khz5 };
            Pickup::FastTransients { rate, peak_uv: peak(reader, section)? }
        }
        "discharge" => Pickup::Discharge { peak_uv: peak(reader, section)? },
        "mains" => {
            let cycle = reader.quantity::<TickPeriod>(section, "frequency");
            let cycle_ns = cycle.as_ref().map_or(20_000_000, |cycle| cycle.value.nearest_ns());
            if let Some(place) = cycle.and_then(|cycle| cycle.origin.span())
                && !(1_000_000..=1_000_000_000).contains(&cycle_ns)
            {
                let help = "write frequency = \"50 Hz\", or any from 1 Hz to 1 kHz";
                reader.problem(place, "this is no frequency of a supply", help);
            }
            let cycles = count(reader, section, "cycles", Between(2, 10));
            Pickup::Mains { cycle_ns, cycles, peak_uv: peak(reader, section)? }
        }
        _ => {
            let width_ns = between(reader, section, "width").unwrap_or(Between(1_000_000, 10_000_000));
            let tail_ns = between(reader, section, "tail").map_or(1_000, |range| range.1.max(1));
            Pickup::CrossTalk { width_ns, tail_ns, peak_uv: peak(reader, section)? }
        }
    })
}

/// The highest voltage that a disturbance may bring to a line: the highest level of IEC 61000-4-2, from memory.
const MOST_UV: i64 = 15_000_000_000;

fn peak(reader: &mut Reader, section: &mut Section<'_>) -> Option<i64> {
    let span = section.span();
    let Some(peak) = reader.quantity::<Voltage>(section, "peak") else {
        if !section.has("peak") {
            reader.problem(
                span,
                "this disturbance has no peak",
                "write peak = \"4 V\": what reaches the line",
            );
        }
        return None;
    };
    let uv = peak.value.microvolts();
    if uv <= 0 || uv > MOST_UV {
        let span = peak.origin.span().unwrap_or(span);
        let message = format!("a peak of {} is no disturbance", peak.value);
        reader.problem(span, message, "write a voltage above 0 V and up to 15 kV, such as \"4 V\"");
        return None;
    }
    Some(uv)
}

fn pulses(reader: &mut Reader, section: &mut Section<'_>) -> Option<Disturbances> {
    let span = section.span();
    let number = count(reader, section, "pulses", Between(1, 1));
    let pulse = between(reader, section, "pulse");
    let rest = between(reader, section, "rest").unwrap_or(Between(50_000, 50_000));
    if pulse.is_none() && !section.has("pulse") {
        reader.problem(span, "this disturbance has no pulse", "write pulse = [\"20 us\", \"200 us\"]");
    }
    Some(Disturbances { pulses: number, pulse_ns: pulse?, rest_ns: rest })
}

/// A whole number, or a range of them as a list of two.
fn count(reader: &mut Reader, section: &mut Section<'_>, key: &'static str, default: Between) -> Between {
    const ALLOWED: Count = Count { least: 1, most: 1_000 };
    let Some(toml::de::DeValue::Array(items)) = section.get(key).map(|value| value.get_ref()) else {
        return values::integer(reader, section, key, ALLOWED)
            .map_or(default, |number| Between(number, number));
    };
    let span = section.take(key).map(|value| value.span()).unwrap_or_default();
    let ends: Vec<u64> = items
        .iter()
        .filter_map(|item| reader.raw(item.span()).parse().ok())
        .filter(|number| (ALLOWED.least..=ALLOWED.most).contains(number))
        .collect();
    match ends.as_slice() {
        [least, greatest] if items.len() == 2 && least <= greatest => Between(*least, *greatest),
        _ => {
            let help = format!("write {key} = [1, 4], each from {} to {}", ALLOWED.least, ALLOWED.most);
            reader.problem(span, format!("{key} is no range of whole numbers, the least first"), help);
            default
        }
    }
}

/// Disturbances that come more often than this would fill the memory before they fill a recording.
const SHORTEST_PERIOD_NS: u64 = 1_000_000;

fn timing(reader: &mut Reader, section: &mut Section<'_>, kind: &str) -> Option<Timing> {
    let span = section.span();
    let every = between(reader, section, "every");
    let share = permille(reader, section, "share", (1000, "100 %"));
    let after_ns = between(reader, section, "after");
    let clear_ns = between(reader, section, "clear").map_or(10_000_000, |range| range.1);
    if every.is_some() && (share.is_some() || after_ns.is_some()) {
        let help = "write every for a clock of its own, or share for a share of the dwells, not both";
        reader.problem(span, "this disturbance comes at two different times", help);
        return None;
    }
    if let Some(Between(least, _)) = every
        && least < SHORTEST_PERIOD_NS
    {
        let place = section.get("every").map_or(span, |value| value.span());
        let message = "a disturbance more often than once a millisecond never lets the line rest";
        reader.problem(place, message, "write every = \"1 ms\" or longer");
        return None;
    }
    match (every, share) {
        (Some(period_ns), _) => Some(Timing::Every { period_ns }),
        // In thousandths, at most a thousand.
        (None, Some(share)) => Some(match after_ns {
            Some(after_ns) => Timing::AfterBounce { permille: share.1 as u32, after_ns },
            None => Timing::Resting { permille: share.1 as u32, clear_ns },
        }),
        (None, None) if kind == "fast-transients" && !section.has("every") && !section.has("share") => {
            Some(Timing::Every { period_ns: Between(BURST_PERIOD_NS, BURST_PERIOD_NS) })
        }
        (None, None) => {
            if !section.has("every") && !section.has("share") {
                let help = "write every = [\"1 s\", \"3 s\"], or share = \"25 %\" of the dwells";
                reader.problem(span, "nothing says when this disturbance comes", help);
            }
            None
        }
    }
}
