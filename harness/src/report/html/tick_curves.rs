//! The best law of each kind over the whole range of tick periods, as lines to draw.

use crate::clock_range::{ClockRange, Curve};
use crate::report::plot::{Scale, px};

/// The line of one kind of law: tick periods with the worst delay there, in nanoseconds.
pub(super) struct Line {
    /// The kind of law.
    pub(super) family: &'static str,
    /// Stretches without a gap.
    stretches: Vec<Vec<(f64, f64)>>,
}

/// Places at which a straight piece is drawn; on a logarithmic scale it is bent.
const PLACES: u64 = 6;

/// Pieces of one curve that are drawn; more could not be told apart.
const MOST_PIECES: usize = 600;

/// The lines of all kinds that work at any tick period.
pub(super) fn lines(range: &ClockRange) -> Vec<Line> {
    let line = |curve: &Curve| {
        let mut stretches: Vec<Vec<(f64, f64)>> = Vec::new();
        let mut reached = None;
        let every = curve.pieces.len().div_ceil(MOST_PIECES).max(1);
        for piece in curve.pieces.iter().step_by(every) {
            if reached != Some(piece.span.from_ns) || stretches.is_empty() {
                stretches.push(Vec::new());
            }
            let length = piece.span.until_ns - piece.span.from_ns;
            let points = (0..PLACES).map(|place| {
                let period_ns = piece.span.from_ns
                    + (u128::from(length) * u128::from(place) / u128::from(PLACES - 1)) as u64;
                let below = piece.below_at(&range.clock, period_ns);
                (period_ns as f64, below.make.max(below.break_) as f64)
            });
            stretches.last_mut().expect("there is one by now").extend(points);
            reached = Some(piece.span.until_ns.saturating_add(1)).filter(|_| every == 1);
        }
        Line { family: curve.family, stretches }
    };
    range.curves.iter().map(line).filter(|line| !line.stretches.is_empty()).collect()
}

impl Line {
    /// The longest tick period at which this kind works.
    pub(super) fn until_ns(&self) -> f64 {
        self.stretches.last().and_then(|stretch| stretch.last()).map_or(0.0, |point| point.0)
    }

    /// The longest worst delay that is not beyond `allowed`.
    pub(super) fn highest_ns(&self, allowed: f64) -> Option<f64> {
        let all = self.stretches.iter().flatten().map(|point| point.1);
        all.filter(|&below| below <= allowed).max_by(f64::total_cmp)
    }

    /// The worst delay at the end of the longest stretch that is drawn: where its name belongs.
    pub(super) fn last_ns(&self, highest: f64) -> Option<f64> {
        let longest = self.stretches.iter().max_by_key(|stretch| stretch.len())?;
        longest.iter().rfind(|point| point.1 <= highest).map(|point| point.1)
    }

    /// The path, without what lies above the plane.
    pub(super) fn path(&self, x: &Scale, y: &Scale) -> String {
        let (_, highest) = y.values();
        let mut path = String::new();
        for stretch in &self.stretches {
            let mut letter = 'M';
            for &(period, below) in stretch {
                if below > highest {
                    letter = 'M';
                    continue;
                }
                path.push_str(&format!("{letter}{} {}", px(x.within(period)), px(y.at(below))));
                letter = 'L';
            }
        }
        path
    }
}
