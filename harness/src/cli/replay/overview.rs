//! One line for each tick period, where there are too many for all their figures.

use std::io;

use debounce_core::Change;

use super::{Replayed, at_pin};
use crate::cli::lines::Lines;
use crate::replay::{ClockMeasurement, Measurement};
use crate::report::words;

impl Replayed {
    pub(super) fn overview(&self, lines: &mut Lines<'_>, ticks: usize) -> io::Result<()> {
        for (index, one) in self.observed.iter().enumerate() {
            lines.item("Replayed", &format!("{} at {ticks} tick periods over {}", self.law, one.name))?;
            if let Some(text) = at_pin(one) {
                lines.more(&text)?;
            }
            for run in self.runs.iter().filter(|run| run.recording == index) {
                lines.item(&run.tick.to_string(), &summary(&run.measured))?;
            }
        }
        lines.item(
            "In all",
            "missed operations and places with a false edge, at any phase and at both ends of the tolerance; --tick with \
             one period shows where they are, and the slowest make",
        )
    }
}

/// What a law does at one tick period.
fn summary(measured: &ClockMeasurement) -> String {
    let worst = |change| match measured.worst_delay_ns(change) {
        Some(worst) => format!("{} < {}", words::change(change), words::at_most(worst)),
        None => format!("no {}", words::change(change)),
    };
    let exact = || {
        [Some(&measured.nominal), measured.shortest.as_ref(), measured.longest.as_ref()].into_iter().flatten()
    };
    let most = |count: fn(&Measurement) -> usize| match exact().map(count).max().unwrap_or(0) {
        0 => "none".to_owned(),
        number => number.to_string(),
    };
    let drawn = measured.drawn.as_ref().filter(|drawn| drawn.unfaithful > 0);
    let drawn =
        drawn.map(|drawn| format!("; unfaithful in {} of {} drawn", drawn.unfaithful, drawn.draws.count));
    format!(
        "{}, {}; {} missed, {} false{}",
        worst(Change::Make),
        worst(Change::Break),
        most(|exact| exact.missed.len()),
        most(|exact| exact.false_edges.places.len()),
        drawn.unwrap_or_default()
    )
}
