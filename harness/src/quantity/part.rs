//! A part as it is ordered: a value, its tolerance and, of a capacitor, its temperature characteristic.

use std::fmt;
use std::str::FromStr;

use super::{Quantity, QuantityError, Share, Voltage};

/// Least, typical and greatest value of something that varies from unit to unit.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Spread {
    /// The least.
    pub min: f64,
    /// The typical one.
    pub typ: f64,
    /// The greatest.
    pub max: f64,
}

impl Spread {
    /// Three values.
    #[must_use]
    pub const fn new(min: f64, typ: f64, max: f64) -> Self {
        Self { min, typ, max }
    }

    /// A value that does not vary.
    #[must_use]
    pub const fn fixed(value: f64) -> Self {
        Self::new(value, value, value)
    }

    /// All three through `f`, which must not turn their order.
    #[must_use]
    pub fn map(self, f: impl Fn(f64) -> f64) -> Self {
        Self::new(f(self.min), f(self.typ), f(self.max))
    }

    /// Whether it varies at all.
    #[must_use]
    pub fn varies(self) -> bool {
        self.min < self.max
    }
}

/// The class 2 temperature characteristic of a ceramic capacitor, such as X7R, after EIA RS-198 (IEC 60384 has the
/// same classes); C0G and NP0, which are class 1, are known as well.
///
/// It bounds how far the capacitance may change over the temperatures of the code. What a voltage across the capacitor
/// takes away, and what age does, is outside it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct TemperatureCode {
    text: [u8; 3],
    minus_ppm: u32,
    plus_ppm: u32,
    coldest: i16,
    hottest: i16,
}

impl TemperatureCode {
    /// The code as it is written.
    #[must_use]
    pub fn text(&self) -> &str {
        std::str::from_utf8(&self.text).unwrap_or_default()
    }

    /// The greatest loss and gain, as fractions of the value at 25 degrees.
    #[must_use]
    pub fn change(&self) -> (f64, f64) {
        (f64::from(self.minus_ppm) / 1e6, f64::from(self.plus_ppm) / 1e6)
    }

    /// The temperatures it holds for, in degrees Celsius.
    #[must_use]
    pub const fn temperatures(&self) -> (i16, i16) {
        (self.coldest, self.hottest)
    }

    /// Whether a voltage across the part takes capacitance away: all but class 1.
    #[must_use]
    pub fn loses_under_voltage(&self) -> bool {
        !matches!(&self.text, b"C0G" | b"NP0")
    }

    fn parse(text: &str) -> Option<Self> {
        let upper = text.to_ascii_uppercase();
        let bytes: [u8; 3] = upper.as_bytes().try_into().ok()?;
        if matches!(&bytes, b"C0G" | b"NP0") {
            // 30 ppm a kelvin over the 100 K from 25 to 125 degrees (EIA RS-198, from memory).
            return Some(Self { text: bytes, minus_ppm: 3_000, plus_ppm: 3_000, coldest: -55, hottest: 125 });
        }
        let coldest = match bytes[0] {
            b'X' => -55,
            b'Y' => -30,
            b'Z' => 10,
            _ => return None,
        };
        let hottest = match bytes[1] {
            b'4' => 65,
            b'5' => 85,
            b'6' => 105,
            b'7' => 125,
            b'8' => 150,
            _ => return None,
        };
        let (minus, plus) = match bytes[2] {
            b'P' => (10, 10),
            b'R' => (15, 15),
            b'S' => (22, 22),
            b'T' => (33, 22),
            b'U' => (56, 22),
            b'V' => (82, 22),
            _ => return None,
        };
        Some(Self { text: bytes, minus_ppm: minus * 10_000, plus_ppm: plus * 10_000, coldest, hottest })
    }
}

/// A value with its tolerance: "10 kohm 1 %", "100 nF K X7R". A letter stands for a tolerance as usual (EIA): F 1 %,
/// G 2 %, J 5 %, K 10 %, M 20 %, Z +80/-20 %.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Part<Q> {
    /// The value on the order.
    pub value: Q,
    /// Its tolerance, down and up, in parts per million, where it is given.
    pub tolerance_ppm: Option<(u32, u32)>,
    /// The temperature characteristic of a ceramic capacitor.
    pub code: Option<TemperatureCode>,
}

impl<Q> Part<Q> {
    /// A part of which nothing but the value is known.
    #[must_use]
    pub const fn of(value: Q) -> Self {
        Self { value, tolerance_ppm: None, code: None }
    }

    /// The same with a tolerance either way, where none was given.
    #[must_use]
    pub fn or_tolerance(mut self, share: Share) -> Self {
        self.tolerance_ppm = self.tolerance_ppm.or(Some((share.ppm(), share.ppm())));
        self
    }

    /// Least, typical and greatest factor on the value: tolerance times temperature characteristic.
    #[must_use]
    pub fn factor(&self) -> Spread {
        let (minus, plus) = self.tolerance_ppm.unwrap_or((0, 0));
        let (loss, gain) = self.code.as_ref().map_or((0.0, 0.0), TemperatureCode::change);
        let fraction = |ppm: u32| f64::from(ppm) / 1e6;
        Spread::new((1.0 - fraction(minus)) * (1.0 - loss), 1.0, (1.0 + fraction(plus)) * (1.0 + gain))
    }
}

const LETTERS: [(&str, u32, u32); 6] = [
    ("F", 10_000, 10_000),
    ("G", 20_000, 20_000),
    ("J", 50_000, 50_000),
    ("K", 100_000, 100_000),
    ("M", 200_000, 200_000),
    ("Z", 200_000, 800_000),
];

impl<Q: Quantity> Quantity for Part<Q> {
    const NAME: &'static str = Q::NAME;
    const EXAMPLE: &'static str = Q::EXAMPLE;
}

impl<Q: Quantity> FromStr for Part<Q> {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let words: Vec<&str> = text.split_whitespace().collect();
        // "10kohm 5 %" and "10 kohm 5 %" are the same.
        let first = words.first().copied().unwrap_or_default();
        let taken = if first.ends_with(|letter: char| letter.is_ascii_digit()) { 2 } else { 1 };
        let taken = taken.min(words.len());
        let mut part = Self::of(words[..taken].join(" ").parse::<Q>()?);
        let mut rest = &words[taken..];
        while let [word, after @ ..] = rest {
            let joined = after.first().map(|next| format!("{word} {next}"));
            if let Some(share) = joined.filter(|_| word.ends_with(|letter: char| letter.is_ascii_digit())) {
                part.tolerance(text, share.parse::<Share>()?)?;
                rest = &after[1..];
                continue;
            }
            part.word(text, word)?;
            rest = after;
        }
        Ok(part)
    }
}

impl<Q: Quantity> Part<Q> {
    fn tolerance(&mut self, text: &str, share: Share) -> Result<(), QuantityError> {
        if share.ppm() >= 1_000_000 {
            return Err(QuantityError::new(
                format!("a tolerance of {share} lets the part in \"{}\" shrink to nothing", text.trim()),
                "write a tolerance below 100 %, such as \"5 %\"",
            ));
        }
        self.set_tolerance(text, (share.ppm(), share.ppm()))
    }

    fn set_tolerance(&mut self, text: &str, ppm: (u32, u32)) -> Result<(), QuantityError> {
        match self.tolerance_ppm.replace(ppm) {
            None => Ok(()),
            Some(_) => Err(QuantityError::new(
                format!("\"{}\" has two tolerances", text.trim()),
                format!("write one, such as \"{} 5 %\"", Q::EXAMPLE),
            )),
        }
    }

    fn word(&mut self, text: &str, word: &str) -> Result<(), QuantityError> {
        if let Some((_, minus, plus)) = LETTERS.iter().find(|(letter, ..)| *letter == word) {
            return self.set_tolerance(text, (*minus, *plus));
        }
        if word.ends_with(['%', 'm']) {
            return self.tolerance(text, word.parse::<Share>()?);
        }
        let code = TemperatureCode::parse(word).filter(|_| Q::NAME == super::Capacitance::NAME);
        if self.code.is_none() && code.is_some() {
            self.code = code;
            return Ok(());
        }
        let more = if Q::NAME == super::Capacitance::NAME {
            ", and a temperature characteristic such as X7R"
        } else {
            ""
        };
        Err(QuantityError::new(
            format!("\"{word}\" in \"{}\" is no tolerance", text.trim()),
            format!("write the value, then \"5 %\" or a letter (F, G, J, K, M, Z){more}"),
        ))
    }
}

impl<Q: fmt::Display> fmt::Display for Part<Q> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.value.fmt(f)?;
        match self.tolerance_ppm {
            None | Some((0, 0)) => {}
            Some((minus, plus)) if minus == plus => write!(f, " +-{}", Share::from_ppm(plus))?,
            Some((minus, plus)) => {
                write!(f, " +{}/-{}", Share::from_ppm(plus), Share::from_ppm(minus))?;
            }
        }
        match &self.code {
            Some(code) => write!(f, " {}", code.text()),
            None => Ok(()),
        }
    }
}

/// Two voltages between which something lies: "0.9 V to 2.0 V".
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct VoltageRange {
    /// The lower end.
    pub low: Voltage,
    /// The upper end.
    pub high: Voltage,
}

impl Quantity for VoltageRange {
    const NAME: &'static str = "a range of voltages";
    const EXAMPLE: &'static str = "0.9 V to 2.0 V";
}

impl FromStr for VoltageRange {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let help = format!("write \"{}\"", Self::EXAMPLE);
        let (low, high) = match text.split_once(" to ") {
            Some((low, high)) => (low.parse::<Voltage>()?, high.parse::<Voltage>()?),
            None => {
                let both = text.parse::<Voltage>()?;
                (both, both)
            }
        };
        if low > high {
            return Err(QuantityError::new(format!("{low} to {high} runs downwards"), help));
        }
        Ok(Self { low, high })
    }
}

impl fmt::Display for VoltageRange {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} to {}", self.low, self.high)
    }
}

#[cfg(test)]
mod tests {
    use super::super::{Capacitance, Resistance};
    use super::*;

    fn part<Q: Quantity + fmt::Debug>(text: &str) -> Part<Q> {
        text.parse().unwrap_or_else(|error| panic!("{text}: {error}"))
    }

    #[track_caller]
    fn near(found: f64, expected: f64) {
        assert!((found - expected).abs() < 1e-9, "{found} {expected}");
    }

    #[test]
    fn part_with_tolerance_and_code_is_read_in_any_spelling() {
        let ten_k = Part { tolerance_ppm: Some((10_000, 10_000)), ..Part::of("10 kohm".parse().unwrap()) };
        for text in ["10 kohm 1 %", "10kohm 1%", "10 kohm F", " 10 kohm  10000 ppm "] {
            assert_eq!(part::<Resistance>(text), ten_k, "{text}");
        }
        assert_eq!(ten_k.to_string(), "10 kohm +-1 %");
        assert_eq!(part::<Capacitance>("100 nF K x7r").to_string(), "100 nF +-10 % X7R");
        assert_eq!(part::<Capacitance>("1 uF Z Y5V").to_string(), "1 uF +80 %/-20 % Y5V");
    }

    /// Worst factors on R C are products of the parts' own, EIA RS-198 letters and codes: 0.757 to 1.278 and 0.137 to
    /// 2.306, worked out by hand.
    #[test]
    fn part_factors_multiply_to_the_worst_time_constants() {
        let worst = |r: &str, c: &str| {
            let (r, c) = (part::<Resistance>(r).factor(), part::<Capacitance>(c).factor());
            (r.min * c.min, r.max * c.max)
        };
        let (least, most) = worst("10 kohm 1 %", "100 nF 10 % X7R");
        near(least, 0.99 * 0.9 * 0.85);
        near(most, 1.01 * 1.1 * 1.15);
        assert_eq!((format!("{least:.3}"), format!("{most:.3}")), ("0.757".into(), "1.278".into()));
        let (least, most) = worst("10 kohm J", "100 nF Z Y5V");
        assert_eq!((format!("{least:.3}"), format!("{most:.3}")), ("0.137".into(), "2.306".into()));
    }

    /// The codes as Texas Instruments application report SLAA701 lists them after EIA RS-198.
    #[test]
    fn temperature_codes_say_their_change_and_temperatures() {
        let code = |text: &str| {
            let code = TemperatureCode::parse(text).expect(text);
            (code.minus_ppm / 10_000, code.plus_ppm / 10_000, code.coldest, code.hottest)
        };
        assert_eq!(code("X7R"), (15, 15, -55, 125));
        assert_eq!(code("X5R"), (15, 15, -55, 85));
        assert_eq!(code("X8P"), (10, 10, -55, 150));
        assert_eq!(code("Y5V"), (82, 22, -30, 85));
        assert_eq!(code("Z5U"), (56, 22, 10, 85));
        assert_eq!(code("X6T"), (33, 22, -55, 105));
        assert_eq!(code("Y4S"), (22, 22, -30, 65));
        assert!(TemperatureCode::parse("X9R").is_none() && TemperatureCode::parse("R7X").is_none());
    }

    #[test]
    fn part_that_is_impossible_is_refused_with_what_to_write() {
        let refuses = |text: &str| text.parse::<Part<Resistance>>().expect_err(text).to_string();
        assert_eq!(
            refuses("10 kohm 100 %"),
            "a tolerance of 100 % lets the part in \"10 kohm 100 %\" shrink to nothing; \
             write a tolerance below 100 %, such as \"5 %\""
        );
        assert_eq!(
            refuses("10 kohm X7R"),
            "\"X7R\" in \"10 kohm X7R\" is no tolerance; write the value, then \"5 %\" or a letter (F, G, J, K, M, Z)"
        );
        assert!(refuses("10 kohm 1 % J").contains("two tolerances"));
        assert!(refuses("10").contains("has no unit"));
        assert!(refuses("").contains("is not a resistance"));
        let backwards = "2 V to 1 V".parse::<VoltageRange>().expect_err("backwards").to_string();
        assert_eq!(backwards, "2 V to 1 V runs downwards; write \"0.9 V to 2.0 V\"");
    }
}
