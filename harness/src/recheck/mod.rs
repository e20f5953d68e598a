//! Every claim of a requirement file, checked again: the recordings, the proof, the latency, the budget, and that
//! the configuration in the firmware tree is still the one that all of this was proved for.
//!
//! [`recheck`] judges what a study found; it reads no files, so what lies in the firmware tree is handed to it.

mod claims;
mod difference;
pub mod junit;
pub mod markdown;

#[cfg(test)]
mod tests;

use std::path::PathBuf;

use crate::emit::{NotHeld, rust_module};
use crate::requirement::Requirement;
use crate::study::Study;

use difference::differences;

/// What a claim is about.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Subject {
    /// A recording.
    Recording,
    /// That every operation is reported once and in order.
    Proof,
    /// How late a report can be.
    Latency,
    /// What it costs.
    Budget,
    /// The module in the firmware tree.
    Firmware,
}

impl Subject {
    /// One word, for tables, JUnit and JSON.
    #[must_use]
    pub const fn word(self) -> &'static str {
        match self {
            Self::Recording => "recording",
            Self::Proof => "proof",
            Self::Latency => "latency",
            Self::Budget => "budget",
            Self::Firmware => "firmware",
        }
    }
}

/// How a claim stands.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Standing {
    /// It holds; the text says what was found.
    Holds(String),
    /// It does not; each text says what was found and by how much it is off.
    Broken(Vec<String>),
    /// It could not be judged, because another claim is broken; the text says why.
    Open(String),
}

/// One claim of a requirement file.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Claim {
    /// What it is about.
    pub subject: Subject,
    /// The claim, as a sentence without a full stop.
    pub claimed: String,
    /// How it stands.
    pub standing: Standing,
}

impl Claim {
    fn new(subject: Subject, claimed: impl Into<String>, standing: Standing) -> Self {
        Self { subject, claimed: claimed.into(), standing }
    }

    /// Whether it was judged and does not hold.
    #[must_use]
    pub fn is_broken(&self) -> bool {
        matches!(self.standing, Standing::Broken(_))
    }

    /// Everything there is to say of how it stands.
    #[must_use]
    pub fn remarks(&self) -> &[String] {
        match &self.standing {
            Standing::Holds(remark) | Standing::Open(remark) => std::slice::from_ref(remark),
            Standing::Broken(remarks) => remarks,
        }
    }

    /// `holds`, `broken` or `open`.
    #[must_use]
    pub const fn word(&self) -> &'static str {
        match self.standing {
            Standing::Holds(_) => "holds",
            Standing::Broken(_) => "broken",
            Standing::Open(_) => "open",
        }
    }
}

/// A file, as it lies there.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct FileDigest {
    /// What the requirement file calls it.
    pub name: String,
    /// Its SHA-256 (FIPS 180-4), in hexadecimal.
    pub sha256: String,
}

/// The module in the firmware tree.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct ShippedModule {
    /// Where it lies.
    pub path: PathBuf,
    /// Its text.
    pub text: String,
}

/// The answer for one requirement file.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Recheck {
    /// The requirement file, as the user named it.
    pub requirement: String,
    /// What the contact is called.
    pub contact: String,
    /// Every claim, in the order of the requirement file.
    pub claims: Vec<Claim>,
    /// The recordings as they lie there.
    pub recordings: Vec<FileDigest>,
    /// What cannot be switched off for contacts that guard or meter.
    pub caution: Option<&'static str>,
}

impl Recheck {
    /// How many claims are broken.
    #[must_use]
    pub fn broken(&self) -> usize {
        self.claims.iter().filter(|claim| claim.is_broken()).count()
    }

    /// Whether none is.
    #[must_use]
    pub fn holds(&self) -> bool {
        self.broken() == 0
    }
}

/// Judges every claim of `requirement` by a study of it [as shipped](Requirement::as_shipped).
#[must_use]
pub fn recheck(
    name: impl Into<String>,
    requirement: &Requirement,
    study: &Study,
    recordings: Vec<FileDigest>,
    module: Option<&ShippedModule>,
) -> Recheck {
    let mut claims = claims::recordings(requirement, study, &recordings);
    claims.extend(claims::coverage(requirement, study));
    // Of one law at one tick there is one candidate; of several the one that is recommended, or comes nearest.
    if let Some(candidate) = study.ranking.candidates.first() {
        claims.extend(claims::proof(study, candidate));
        claims.extend(claims::latency(study, candidate));
        claims.extend(claims::replayed(study, candidate));
        claims.extend(claims::budget(requirement, study, candidate));
    }
    claims.extend(module.map(|module| firmware(study, module)));
    Recheck {
        requirement: name.into(),
        contact: study.resolved.name.value.clone(),
        claims,
        recordings,
        caution: study.resolved.caution(),
    }
}

/// The module in the firmware tree against the one that the requirement gives.
fn firmware(study: &Study, module: &ShippedModule) -> Claim {
    let path = module.path.display();
    let claimed = format!("{path} is what the requirement gives");
    let made = study.configuration().map(|configuration| rust_module(&configuration));
    let standing = match made {
        None => Standing::Open("cannot be made again while a claim above is broken".to_owned()),
        Some(Err(error)) => Standing::Broken(vec![refused(&error)]),
        Some(Ok(made)) => match differences(&module.text, &made) {
            found if found.is_empty() => Standing::Holds(format!("all {} lines", made.lines().count())),
            found => Standing::Broken(found),
        },
    };
    Claim::new(Subject::Firmware, claimed, standing)
}

fn refused(error: &NotHeld) -> String {
    format!("the configuration does not keep the requirement: {error}")
}
