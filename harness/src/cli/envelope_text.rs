//! An envelope in ticks as one option: "dwell=20 bounce=5/3 glitch=1/1 quiet=10".

use std::fmt;
use std::str::FromStr;

use debounce_core::Envelope;

use crate::nearest::nearest;

/// An envelope in ticks.
///
/// Written as keys and whole numbers of ticks; two numbers around a stroke are for open and closed (dwell,
/// glitch) or for make and break (bounce).
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct EnvelopeText(pub Envelope);

/// Why a text is no envelope.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("{0}")]
pub struct EnvelopeTextError(String);

const KEYS: [&str; 6] = ["dwell", "bounce", "glitch", "quiet", "calm", "lost"];
const EXAMPLE: &str = "\"dwell=20 bounce=5/3 glitch=1/1 quiet=10 calm=0 lost=0\"";

impl fmt::Display for EnvelopeText {
    /// In full, so that it reads back as the same envelope.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Envelope { dwell, bounce, glitch, quiet, calm, lost, .. } = self.0;
        write!(
            f,
            "dwell={}/{} bounce={}/{} glitch={}/{} quiet={quiet} calm={calm} lost={lost}",
            dwell.open, dwell.closed, bounce.make, bounce.break_, glitch.open, glitch.closed
        )
    }
}

impl FromStr for EnvelopeText {
    type Err = EnvelopeTextError;

    fn from_str(text: &str) -> Result<Self, EnvelopeTextError> {
        let mut values: [Option<(u32, u32)>; KEYS.len()] = [None; KEYS.len()];
        for word in text.split_whitespace() {
            let (key, value) = word.split_once('=').unwrap_or((word, ""));
            let Some(index) = KEYS.iter().position(|known| *known == key) else {
                let help = match nearest(key, KEYS) {
                    Some(known) => format!("write {known}="),
                    None => format!("write {EXAMPLE}"),
                };
                return Err(EnvelopeTextError(format!("\"{key}\" is no part of an envelope; {help}")));
            };
            let pair = match value.split_once('/') {
                // The last three are one number by their nature.
                Some((first, second)) if index < 3 => first.parse().ok().zip(second.parse().ok()),
                _ => value.parse().ok().map(|both| (both, both)),
            };
            let pair = pair.ok_or_else(|| {
                EnvelopeTextError(format!("\"{value}\" is not a number of ticks for {key}; write {EXAMPLE}"))
            })?;
            if values[index].replace(pair).is_some() {
                return Err(EnvelopeTextError(format!("{key} is given twice; write it once")));
            }
        }
        let Some(dwell) = values[0].filter(|dwell| dwell.0 > 0 && dwell.1 > 0) else {
            return Err(EnvelopeTextError(format!(
                "an envelope needs a dwell of at least 1 tick; write {EXAMPLE}"
            )));
        };
        let pair = |index: usize| values[index].unwrap_or((0, 0));
        let ((make, break_), (open, closed)) = (pair(1), pair(2));
        let envelope = Envelope::clean(dwell.0, dwell.1)
            .bounce(make, break_)
            .glitch(open, closed)
            .quiet(values[3].map_or(1, |quiet| quiet.0))
            .calm(pair(4).0)
            .lost(pair(5).0);
        if envelope.quiet == 0 {
            return Err(EnvelopeTextError(
                "a quiet of 0 ticks lets one disturbance run into the next; write at least quiet=1"
                    .to_owned(),
            ));
        }
        Ok(Self(envelope))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn envelope_text_is_read() {
        let read = |text: &str| text.parse::<EnvelopeText>().map(|EnvelopeText(envelope)| envelope);
        assert_eq!(read("dwell=20"), Ok(Envelope::clean(20, 20)));
        let full = Envelope::clean(20, 30).bounce(5, 3).glitch(1, 2).quiet(10).calm(4).lost(1);
        let text = "dwell=20/30 bounce=5/3 glitch=1/2 quiet=10 calm=4 lost=1";
        assert_eq!(read(text), Ok(full));
        assert_eq!(EnvelopeText(full).to_string(), text);
    }

    #[test]
    fn envelope_text_that_is_none_is_refused() {
        let refuses = |text: &str| text.parse::<EnvelopeText>().expect_err(text).to_string();
        assert_eq!(refuses("dwel=20"), "\"dwel\" is no part of an envelope; write dwell=");
        assert_eq!(
            refuses("bounce=5"),
            format!("an envelope needs a dwell of at least 1 tick; write {EXAMPLE}")
        );
        assert_eq!(
            refuses("dwell=0"),
            format!("an envelope needs a dwell of at least 1 tick; write {EXAMPLE}")
        );
        assert_eq!(
            refuses("dwell=2 quiet=1/2"),
            format!("\"1/2\" is not a number of ticks for quiet; write {EXAMPLE}")
        );
        assert_eq!(refuses("dwell=2 dwell=3"), "dwell is given twice; write it once");
        assert!(refuses("dwell=2 quiet=0").contains("write at least quiet=1"));
    }
}
