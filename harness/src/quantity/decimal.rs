//! A decimal number exactly as written, and the unit after it.

use super::QuantityError;

/// A number exactly as written: `digits / 10^scale`, never rounded.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Decimal {
    pub(super) negative: bool,
    pub(super) digits: u64,
    pub(super) scale: u32,
}

/// One unit: how it is written, and how many of the finest unit it holds.
pub(super) type Unit = (&'static str, u64);

/// A number and its unit, before anything is multiplied out.
#[derive(Clone, Copy)]
pub(super) struct Written<'a> {
    pub(super) text: &'a str,
    pub(super) number: Decimal,
    pub(super) number_text: &'a str,
    pub(super) unit: &'a str,
}

/// What is needed to say in a message how such a quantity is written.
pub(super) struct Manner {
    /// With its article: "a time".
    pub(super) name: &'static str,
    /// The units worth naming, the usual ones first.
    pub(super) units: &'static [&'static str],
}

impl Manner {
    /// `"12 ms" or "12 us"`, for the number that was given.
    fn examples(&self, number: &str) -> String {
        let shown: Vec<String> =
            self.units.iter().take(2).map(|unit| format!("\"{number} {unit}\"")).collect();
        shown.join(" or ")
    }

    fn units_listed(&self) -> String {
        match self.units {
            [all @ .., last] if !all.is_empty() => format!("{} or {last}", all.join(", ")),
            _ => self.units.concat(),
        }
    }
}

/// Splits `12 ms` into number and unit.
pub(super) fn split<'a>(text: &'a str, manner: &Manner) -> Result<Written<'a>, QuantityError> {
    let trimmed = text.trim();
    let unsigned = trimmed.strip_prefix(['-', '+']).unwrap_or(trimmed);
    let sign = trimmed.len() - unsigned.len();
    let end = unsigned.find(|c: char| !c.is_ascii_digit() && c != '.').unwrap_or(unsigned.len());
    let (number_text, unit) = (&trimmed[..sign + end], unsigned[end..].trim());
    if end == 0 {
        return Err(QuantityError::new(
            format!("\"{text}\" is not {}", manner.name),
            format!("write a number and a unit, {}", manner.examples("12")),
        ));
    }
    if let Some(rest) = unit.strip_prefix(',') {
        let decimals: String = rest.chars().take_while(char::is_ascii_digit).collect();
        return Err(QuantityError::new(
            format!("\"{text}\" has a comma in its number"),
            format!("write a point, {}", manner.examples(&format!("{number_text}.{decimals}"))),
        ));
    }
    let number = parse_number(number_text).ok_or_else(|| {
        QuantityError::new(
            format!("\"{number_text}\" is not a number"),
            format!("write up to 18 digits with one point, {}", manner.examples("1.5")),
        )
    })?;
    if unit.is_empty() {
        return Err(QuantityError::new(
            format!("\"{trimmed}\" has no unit"),
            format!("write {}", manner.examples(number_text)),
        ));
    }
    Ok(Written { text: trimmed, number, number_text, unit })
}

fn parse_number(text: &str) -> Option<Decimal> {
    let (negative, unsigned) = match text.strip_prefix('-') {
        Some(rest) => (true, rest),
        None => (false, text.strip_prefix('+').unwrap_or(text)),
    };
    let (whole, decimals) = unsigned.split_once('.').unwrap_or((unsigned, ""));
    // "5." and ".5" are slips more often than not, and "." is nothing at all.
    if whole.is_empty() || (decimals.is_empty() && unsigned.contains('.')) || decimals.contains('.') {
        return None;
    }
    let decimals = decimals.trim_end_matches('0');
    if whole.trim_start_matches('0').len() + decimals.len() > 18 {
        return None;
    }
    let digits = format!("{whole}{decimals}").parse().ok()?;
    Some(Decimal { negative, digits, scale: u32::try_from(decimals.len()).ok()? })
}

impl Written<'_> {
    /// The size of the unit, from those that are known.
    pub(super) fn unit_size(&self, units: &[Unit], manner: &Manner) -> Result<u64, QuantityError> {
        if let Some((_, size)) = units.iter().find(|(name, _)| *name == self.unit) {
            return Ok(*size);
        }
        let same = |name: &str| name.eq_ignore_ascii_case(self.unit);
        let help = match units.iter().find(|(name, _)| same(name)) {
            Some((name, _)) => format!("write \"{} {name}\"", self.number_text),
            None => format!("the unit of {} is {}", manner.name, manner.units_listed()),
        };
        Err(QuantityError::new(format!("\"{}\" has an unknown unit \"{}\"", self.text, self.unit), help))
    }

    /// The number times `size`, exactly; `finest` names what it must be a whole number of.
    pub(super) fn whole(&self, size: u64, finest: &str, manner: &Manner) -> Result<u64, QuantityError> {
        if self.number.negative && self.number.digits != 0 {
            return Err(QuantityError::new(
                format!("\"{}\" is below zero", self.text),
                format!("{} is zero or more", manner.name),
            ));
        }
        self.magnitude(size, finest)
    }

    /// The number times `size` without its sign.
    pub(super) fn magnitude(&self, size: u64, finest: &str) -> Result<u64, QuantityError> {
        let product = u128::from(self.number.digits) * u128::from(size);
        let divisor = 10_u128.pow(self.number.scale);
        if product % divisor != 0 {
            return Err(QuantityError::new(
                format!("\"{}\" is finer than {finest}", self.text),
                format!("write a multiple of {finest}"),
            ));
        }
        u64::try_from(product / divisor).map_err(|_| {
            QuantityError::new(
                format!("\"{}\" is too large", self.text),
                format!("the most is {} times {finest}", u64::MAX),
            )
        })
    }
}
