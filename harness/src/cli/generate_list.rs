//! `harness generate --list`: the presets and habits with their numbers and sources.

use std::io::{self, Write};

use debounce_core::Change;
use serde_json::{Value, json};

use super::lines::{Lines, grouped};
use super::{Answer, Outcome};
use crate::generate::{Between, Habit, Preset};
use crate::quantity::Time;

/// All presets and habits.
pub(super) struct Presets;

fn time(ns: u64) -> String {
    Time::from_ns(ns).to_string()
}

fn range(range: Between) -> String {
    format!("{} to {}", time(range.0), time(range.1))
}

fn percent(permille: u64) -> String {
    format!("{} %", permille / 10)
}

impl Answer for Presets {
    fn outcome(&self) -> Outcome {
        Outcome::Holds
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        lines.title("Presets")?;
        for preset in Preset::all() {
            one(&mut lines, preset)?;
            lines.plain("\n")?;
        }
        lines.title("Habits")?;
        for habit in Habit::ALL {
            lines.item(
                habit.name,
                &format!(
                    "closed for {}, open for {}; between groups {}",
                    range(habit.closed_ns),
                    range(habit.open_ns),
                    range(habit.pause_ns)
                ),
            )?;
            lines.more(&format!("{} [{}]", habit.says, habit.standing.words()))?;
        }
        Ok(())
    }

    fn to_json(&self) -> Value {
        json!({
            "presets": Preset::all().iter().map(preset_json).collect::<Value>(),
            "habits": Habit::ALL.iter().map(habit_json).collect::<Value>(),
        })
    }
}

fn one(lines: &mut Lines<'_>, preset: &Preset) -> io::Result<()> {
    lines.item(preset.name, preset.about)?;
    for change in [Change::Make, Change::Break] {
        let bounce = preset.part.model.bounce.at(change);
        let second = bounce.second.map_or(String::new(), |second| {
            format!(", some with a second burst after {}", range(second.after_ns))
        });
        lines.item(
            if change == Change::Make { "  make" } else { "  break" },
            &format!(
                "over within {}, worn within {}; first flight {}, each next {} to {} of it, touches {}{second}",
                time(preset.longest_ns.at(change)),
                time(preset.longest_worn_ns.at(change)),
                range(bounce.first_flight_ns),
                percent(bounce.restitution_permille.0),
                percent(bounce.restitution_permille.1),
                range(bounce.touch_ns),
            ),
        )?;
    }
    let (speed, wear) = (preset.part.speed, preset.part.wear);
    lines.item(
        "  moved",
        &format!(
            "slowly {}, fast {} of these flights; at the end of {} operations {}",
            percent(speed.slow_permille),
            percent(speed.fast_permille),
            grouped(wear.life),
            percent(wear.worn_permille)
        ),
    )?;
    for (index, source) in preset.sources.iter().enumerate() {
        let text = format!("{} ({}) [{}]", source.says, source.by, source.standing.words());
        if index == 0 { lines.item("  sources", &text)? } else { lines.more(&text)? }
    }
    Ok(())
}

fn range_json(range: Between) -> Value {
    json!([range.0, range.1])
}

fn preset_json(preset: &Preset) -> Value {
    let change = |change: Change| {
        let bounce = preset.part.model.bounce.at(change);
        json!({
            "longest_ns": preset.longest_ns.at(change),
            "longest_worn_ns": preset.longest_worn_ns.at(change),
            "first_flight_ns": range_json(bounce.first_flight_ns),
            "restitution_permille": range_json(bounce.restitution_permille),
            "touch_ns": range_json(bounce.touch_ns),
        })
    };
    let source = |source: &crate::generate::Source| json!({ "says": source.says, "by": source.by, "standing": source.standing.words() });
    json!({
        "name": preset.name,
        "about": preset.about,
        "make": change(Change::Make),
        "break": change(Change::Break),
        "life": preset.part.wear.life,
        "sources": preset.sources.iter().map(source).collect::<Value>(),
    })
}

fn habit_json(habit: &Habit) -> Value {
    json!({
        "name": habit.name,
        "closed_ns": range_json(habit.closed_ns),
        "open_ns": range_json(habit.open_ns),
        "pause_ns": range_json(habit.pause_ns),
        "says": habit.says,
        "standing": habit.standing.words(),
    })
}
