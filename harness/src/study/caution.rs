//! What a person should know before leaning on what recordings show.

use std::fmt;

use debounce_core::{Change, Position};

use super::{Claims, Extreme, ExtremeOf, Observed};
use crate::characterise::{GapOrigin, Independence, independence, resting};
use crate::quantity::{Share, Time};
use crate::report::words;
use crate::requirement::{ContactKind, Level, Origin, Resolved};

/// Something that weakens what the recordings show. It ends with what to do.
#[derive(Clone, PartialEq, Debug)]
#[non_exhaustive]
pub enum Caution {
    /// The line rests where the contact is declared to be closed.
    RestsClosed {
        /// The recording.
        recording: String,
        /// The share of the time.
        share: f64,
        /// The level declared as closed.
        closed: Level,
    },
    /// The gap that ends a burst does not stand out.
    GapUnclear {
        /// The recording.
        recording: String,
        /// The gap that was taken.
        gap_ns: u64,
    },
    /// Recordings with different sample periods are summed up together.
    DifferentResolutions {
        /// The shortest.
        finest_ns: u64,
        /// The longest.
        coarsest_ns: u64,
    },
    /// Too few operations for the wanted claim.
    TooFew {
        /// The kind of change.
        change: Change,
        /// How many were recorded.
        operations: u64,
        /// How many are needed.
        needed: u64,
        /// The wanted coverage.
        coverage: Share,
        /// The wanted confidence.
        confidence: Share,
    },
    /// Too few of something else for what it is taken as.
    FewSeen {
        /// What, as far as nobody stated it.
        extremes: Vec<Extreme>,
        /// The wanted coverage.
        coverage: Share,
        /// The wanted confidence.
        confidence: Share,
    },
    /// The bounces drift or depend on one another.
    NotIndependent {
        /// The recording, or all of them.
        recording: String,
        /// The kind of change.
        change: Change,
        /// What the tests found.
        found: Independence,
    },
    /// Bursts so near each other that several changes may be one operation, or the other way round.
    ChangesInDoubt {
        /// The recording.
        recording: String,
        /// How many.
        count: usize,
    },
}

impl Caution {
    /// Everything that is to be said of the recordings.
    #[must_use]
    pub fn all(observed: &[Observed], resolved: &Resolved, claims: &Claims) -> Vec<Self> {
        let mut found: Vec<Self> = observed.iter().flat_map(|one| Self::of_one(one, resolved)).collect();
        let periods = || observed.iter().map(|one| one.figures.resolution_ns);
        if let (Some(finest_ns), Some(coarsest_ns)) = (periods().min(), periods().max())
            && finest_ns < coarsest_ns
        {
            found.push(Self::DifferentResolutions { finest_ns, coarsest_ns });
        }
        for change in [Change::Make, Change::Break] {
            if let Some(claim) = claims.bounce.at(change).filter(|claim| claim.limit.is_none()) {
                let (coverage, confidence) = (claims.coverage, claims.confidence);
                let (operations, needed) = (claim.operations, claim.needed);
                found.push(Self::TooFew { change, operations, needed, coverage, confidence });
            }
        }
        found.extend(Self::few_seen(claims));
        for change in [Change::Make, Change::Break] {
            let mut named: Vec<(String, Independence)> = observed
                .iter()
                .map(|one| (one.name.clone(), one.figures.changes.of(change).independence))
                .collect();
            if observed.len() > 1 {
                let all = "all recordings in the order given".to_owned();
                named.push((all, claims.pooled.changes.of(change).independence));
            }
            let doubtful = named.into_iter().filter(|(_, found)| found.is_doubtful());
            found.extend(doubtful.map(|(recording, found)| Self::NotIndependent {
                recording,
                change,
                found,
            }));
        }
        found
    }

    /// Times in a position apart from disturbances, for they are stated and recorded in different ways. What was not
    /// recorded at all is no reason for doubt in a recording, unless something in doubt was taken all the same.
    fn few_seen(claims: &Claims) -> Vec<Self> {
        let is_stay = |extreme: &Extreme| matches!(extreme.of, ExtremeOf::Stay(_));
        let (stays, disturbed): (Vec<Extreme>, Vec<Extreme>) =
            claims.extremes.iter().partition(|e| is_stay(e));
        let few = |extremes: Vec<Extreme>| {
            let is_recorded = extremes.iter().any(|extreme| extreme.count > 0);
            let unsupported: Vec<Extreme> = extremes.into_iter().filter(Extreme::is_unsupported).collect();
            let is_taken = unsupported.iter().any(|extreme| extreme.taken.origin == Origin::Measured);
            (is_taken || is_recorded && !unsupported.is_empty()).then_some(Self::FewSeen {
                extremes: unsupported,
                coverage: claims.coverage,
                confidence: claims.confidence,
            })
        };
        [few(stays), few(disturbed)].into_iter().flatten().collect()
    }

    fn of_one(one: &Observed, resolved: &Resolved) -> Vec<Self> {
        let mut found = Vec::new();
        let recording = || one.name.clone();
        // A switch that stays where it is put has no position of rest.
        let rests =
            (resolved.kind.value != ContactKind::Toggle).then(|| resting(&one.recording.trace)).flatten();
        if let Some(rests) = rests.filter(|rests| rests.position == Position::Closed) {
            let closed = one.closed.unwrap_or(resolved.closed.value);
            found.push(Self::RestsClosed { recording: recording(), share: rests.share, closed });
        }
        if matches!(one.segmentation.gap.origin, GapOrigin::Unclear { .. }) {
            found.push(Self::GapUnclear { recording: recording(), gap_ns: one.segmentation.gap.ns });
        }
        let count = one.segmentation.changes_in_doubt();
        if count > 0 {
            found.push(Self::ChangesInDoubt { recording: recording(), count });
        }
        found
    }
}

/// The opposite level, as an option spells it.
fn other(level: Level) -> &'static str {
    match level {
        Level::Low => "high",
        Level::High => "low",
    }
}

/// The options that state these figures.
fn options(extremes: &[Extreme]) -> String {
    let mut names: Vec<&str> = extremes
        .iter()
        .map(|extreme| match extreme.of {
            ExtremeOf::Disturbance(_) => "--disturbance",
            ExtremeOf::Rest => "--quiet-time",
            ExtremeOf::Stay(Position::Open) => "--shortest-open",
            ExtremeOf::Stay(Position::Closed) => "--shortest-closed",
        })
        .collect();
    names.dedup();
    names.join(" and ")
}

impl fmt::Display for Caution {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::RestsClosed { recording, share, closed } => write!(
                f,
                "{recording}: the line rests closed, {:.0} % of the time, at the beginning and at the end; if this \
                 contact rests open, the polarity is inverted: give --closed {other}, or closed = \"{other}\" under \
                 [contact]",
                share * 100.0,
                other = other(*closed),
            ),
            Self::GapUnclear { recording, gap_ns } => write!(
                f,
                "{recording}: no length of rest stands out as the end of a burst, {} was taken; state it with --gap",
                words::about(*gap_ns)
            ),
            Self::DifferentResolutions { finest_ns, coarsest_ns } => write!(
                f,
                "the recordings have sample periods from {} to {}: pulses shorter than the longest of them are \
                 missing from some; record all with the shortest for figures that can be compared",
                Time::from_ns(*finest_ns),
                Time::from_ns(*coarsest_ns)
            ),
            Self::TooFew { change, operations, needed, coverage, confidence } => write!(
                f,
                "{} are too few to claim anything of {coverage} of all {}s with {confidence} confidence: \
                 {needed} are needed; record {} more, or ask for less with --coverage or --confidence",
                words::count(usize::try_from(*operations).unwrap_or(usize::MAX), words::change(*change)),
                words::change(*change),
                needed - operations,
            ),
            Self::FewSeen { extremes, coverage, confidence } => {
                let needed = extremes.first().map_or(0, |extreme| extreme.needed);
                let listed: Vec<String> = extremes.iter().map(ToString::to_string).collect();
                write!(
                    f,
                    "too few to claim anything of {coverage} of all with {confidence} confidence, which takes {needed} \
                     of each: {}; state what you know with {}, or record more",
                    listed.join(", "),
                    options(extremes)
                )
            }
            Self::NotIndependent { recording, change, found } => {
                write!(f, "{recording}: the bounces of the {}s", words::change(*change))?;
                if let Some(trend) = found.trend.filter(|t| t.p_value < independence::SIGNIFICANT) {
                    let way = if trend.s > 0 { "longer" } else { "shorter" };
                    write!(f, " grow {way} (trend test: chance {})", words::chance(trend.p_value))?;
                }
                if let Some(runs) = found.runs.filter(|t| t.p_value < independence::SIGNIFICANT) {
                    let way = if (runs.runs as f64) < runs.expected { "resemble" } else { "differ from" };
                    write!(f, " {way} their neighbours (runs test: chance {})", words::chance(runs.p_value))?;
                }
                f.write_str(
                    "; a claim takes operations as independent and alike: look for the cause, and record again \
                     under the conditions of use",
                )
            }
            Self::ChangesInDoubt { recording, count } => write!(
                f,
                "{recording}: {} that may be one operation with a long bounce or several quick ones; the claims \
                 count each burst as one operation, and take the shortest times from the runs in doubt; state the \
                 rest that ends a burst with --gap",
                words::count(*count, "burst")
            ),
        }
    }
}
