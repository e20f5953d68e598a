//! A network that was worked out, as JSON. Times are in seconds, voltages in volts: these are calculations, not counts.

use debounce_core::{PerChange, PerPosition};
use serde_json::{Value, json};

use crate::network::{Analysis, Delay, Review, Waveform};
use crate::quantity::Spread;
use crate::requirement::ResolvedNetwork;

/// A network with what it does, what is to be said about it, and its waveforms as points to draw.
#[must_use]
pub fn network(
    resolved: &ResolvedNetwork,
    analysis: &Analysis,
    review: &Review,
    waveforms: &PerChange<Waveform>,
) -> Value {
    let delay = |delay: &Delay| json!({ "min": number(delay.min), "typ": number(delay.typ), "max": number(delay.max) });
    json!({
        "parts": resolved.rows.iter().map(|row| json!({
            "key": row.key, "value": row.text, "origin": row.origin.word(), "because": row.origin.to_string(),
        })).collect::<Value>(),
        "method": if resolved.network.diode.is_some() { "implicit steps, error of each below 1e-6 of the supply" } else { "exact" },
        "rest_volts": per_position(&analysis.rest, spread),
        "delay_seconds": { "make": delay(&analysis.delay.make), "break": delay(&analysis.delay.break_) },
        "slowest_edge_seconds_a_volt": {
            "make": number(analysis.slowest_edge.make), "break": number(analysis.slowest_edge.break_),
        },
        "contact_current_amperes": { "inrush": spread(&analysis.inrush), "steady": spread(&analysis.steady),
            "cable_at_most": analysis.cable_inrush },
        "inrush_lasts_seconds": number(analysis.inrush_lasts),
        "energy_at_make_joules": analysis.energy,
        "power_while_held_watts": spread(&analysis.held_power),
        "recovery_seconds": number(analysis.recovery),
        "lone_pulse_rejected_seconds": per_position(&analysis.lone_pulse, |value| number(*value)),
        "bursts": analysis.bursts.iter().map(|(burst, limit)| json!({
            "burst": burst.name,
            "pulses": burst.pulses,
            "period_seconds": burst.period,
            "widest_rejected_seconds": per_position(limit, |limit| number(limit.widest)),
        })).collect::<Value>(),
        "mean_seconds_between_synchroniser_failures":
            resolved.synchroniser.map(|one| number(one.mean_time_between_failures())),
        "troubles": review.troubles.iter().map(|one| json!({ "what": one.what, "help": one.help })).collect::<Value>(),
        "notes": review.notes,
        "waveforms": { "make": waveform(&waveforms.make), "break": waveform(&waveforms.break_) },
    })
}

/// What never happens has no number.
fn number(value: f64) -> Value {
    if value.is_finite() { json!(value) } else { Value::Null }
}

fn spread(spread: &Spread) -> Value {
    json!({ "min": number(spread.min), "typ": number(spread.typ), "max": number(spread.max) })
}

fn per_position<T>(values: &PerPosition<T>, f: impl Fn(&T) -> Value) -> Value {
    json!({ "open": f(&values.open), "closed": f(&values.closed) })
}

fn waveform(waveform: &Waveform) -> Value {
    let lane = |f: fn(&crate::network::Point) -> f64| waveform.points.iter().map(f).collect::<Vec<_>>();
    json!({
        "seconds": lane(|point| point.seconds),
        "lowest_volts": lane(|point| point.lowest),
        "typical_volts": lane(|point| point.typical),
        "highest_volts": lane(|point| point.highest),
        "threshold_volts": {
            "first": waveform.thresholds.first,
            "typical": waveform.thresholds.typical,
            "surely": waveform.thresholds.surely,
        },
    })
}
