//! Takes values out of a table of the requirement file and notes everything that is wrong with them.
//!
//! The tables are walked by hand and not through derived code, because a reader deserves every problem of
//! the file at once, and a derived reader stops at the first.

use std::ops::Range;
use std::sync::Arc;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::words::{Word, either, parse_word};
use super::{Origin, Sourced};
use crate::nearest::nearest;
use crate::network::{ClassName, ClassNameError};
use crate::problem::{Problem, SourceText};
use crate::quantity::Quantity;

/// A value of the file.
pub(crate) type Value<'t> = Spanned<DeValue<'t>>;

/// The file and what has been found wrong with it so far.
pub(crate) struct Reader {
    pub(crate) source: Arc<SourceText>,
    pub(crate) problems: Vec<Problem>,
}

/// One table of the file, and the keys that have been asked for.
pub(crate) struct Section<'t> {
    /// How the table is written in messages: `[required]`.
    title: String,
    table: &'t DeTable<'t>,
    asked: Vec<&'static str>,
    /// Those of them that may stand several times, with two brackets.
    repeated: Vec<&'static str>,
}

impl<'t> Section<'t> {
    pub(crate) fn new(title: impl Into<String>, table: &'t DeTable<'t>) -> Self {
        Self { title: title.into(), table, asked: Vec::new(), repeated: Vec::new() }
    }

    /// Whether `key` stands in the table.
    pub(crate) fn has(&self, key: &str) -> bool {
        self.table.contains_key(key)
    }

    /// The value of `key`, which does not become a known key by that.
    pub(crate) fn get(&self, key: &str) -> Option<&'t Value<'t>> {
        self.table.get(key)
    }

    /// Where to point when something of the table is missing: at its first key, else at nothing.
    pub(crate) fn span(&self) -> Range<usize> {
        self.table.keys().map(Spanned::span).min_by_key(|span| span.start).unwrap_or_default()
    }

    /// The value of `key`, which becomes a known key.
    pub(crate) fn take(&mut self, key: &'static str) -> Option<&'t Value<'t>> {
        self.asked.push(key);
        self.table.get(key)
    }
}

impl Reader {
    pub(crate) fn origin(&self, span: Range<usize>) -> Origin {
        Origin::Given { line: self.source.line_column(span.start).0, from: span.start, until: span.end }
    }

    fn sourced<T>(&self, value: T, span: Range<usize>) -> Sourced<T> {
        Sourced::new(value, self.origin(span))
    }

    pub(crate) fn problem(
        &mut self,
        span: Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        self.problems.push(Problem::new(message).mark(&self.source, span, "").help(help));
    }

    /// How the value is written in the file.
    pub(crate) fn raw(&self, span: Range<usize>) -> &str {
        self.source.text().get(span).unwrap_or_default()
    }

    /// The table behind `key`.
    pub(crate) fn section<'t>(&mut self, parent: &mut Section<'t>, key: &'static str) -> Option<Section<'t>> {
        let value = parent.take(key)?;
        match value.get_ref() {
            DeValue::Table(table) => Some(Section::new(format!("[{key}]"), table)),
            _ => {
                let message = format!("{key} is a section, not a value");
                self.problem(value.span(), message, format!("write [{key}] on a line of its own"));
                None
            }
        }
    }

    /// The tables behind `[[key]]`.
    pub(crate) fn sections<'t>(&mut self, parent: &mut Section<'t>, key: &'static str) -> Vec<Section<'t>> {
        parent.repeated.push(key);
        let Some(value) = parent.take(key) else { return Vec::new() };
        let tables: Option<Vec<_>> = match value.get_ref() {
            DeValue::Array(items) => items.iter().map(|item| item.get_ref().as_table()).collect(),
            _ => None,
        };
        match tables {
            Some(tables) => {
                tables.into_iter().map(|table| Section::new(format!("[[{key}]]"), table)).collect()
            }
            None => {
                let message = format!("there may be several {key}s, so each is a section with two brackets");
                self.problem(value.span(), message, format!("write [[{key}]] on a line of its own"));
                Vec::new()
            }
        }
    }

    /// A text that is not empty.
    pub(crate) fn text(
        &mut self,
        section: &mut Section<'_>,
        key: &'static str,
        example: &str,
    ) -> Option<Sourced<String>> {
        let value = section.take(key)?;
        match value.get_ref().as_str() {
            Some(text) if !text.trim().is_empty() => Some(self.sourced(text.to_owned(), value.span())),
            _ => {
                let message = format!("{} is not a text for {key}", self.raw(value.span()));
                self.problem(value.span(), message, format!("write {key} = \"{example}\""));
                None
            }
        }
    }

    /// One word of a list.
    pub(crate) fn word<W: Word>(
        &mut self,
        section: &mut Section<'_>,
        key: &'static str,
    ) -> Option<Sourced<W>> {
        let value = section.take(key)?;
        let raw = self.raw(value.span()).to_owned();
        match parse_word(value.get_ref().as_str().unwrap_or(&raw)) {
            Ok(word) => Some(self.sourced(word, value.span())),
            Err(error) => {
                self.problem(value.span(), error.message, error.help);
                None
            }
        }
    }

    /// The name of an input class.
    pub(super) fn class(
        &mut self,
        section: &mut Section<'_>,
        key: &'static str,
    ) -> Option<Sourced<ClassName>> {
        let value = section.take(key)?;
        let raw = self.raw(value.span()).to_owned();
        match value.get_ref().as_str().unwrap_or(&raw).parse() {
            Ok(class) => Some(self.sourced(class, value.span())),
            Err(ClassNameError { message, help }) => {
                self.problem(value.span(), message, help);
                None
            }
        }
    }

    /// The table that is the value of `key`.
    pub(super) fn inner<'t>(&mut self, section: &mut Section<'t>, key: &'static str) -> Option<Section<'t>> {
        let value = section.take(key)?;
        match value.get_ref() {
            DeValue::Table(table) => Some(Section::new(key, table)),
            other => {
                let message = format!("{} is not what {key} is: several values", describe(other));
                self.problem(value.span(), message, format!("write {key} = {{ .. }} with its values"));
                None
            }
        }
    }

    /// A quantity with its unit.
    pub(crate) fn quantity<T: Quantity>(
        &mut self,
        section: &mut Section<'_>,
        key: &'static str,
    ) -> Option<Sourced<T>> {
        let value = section.take(key)?;
        self.quantity_of(value)
    }

    pub(crate) fn quantity_of<T: Quantity>(&mut self, value: &Value<'_>) -> Option<Sourced<T>> {
        let span = value.span();
        let text = match value.get_ref() {
            DeValue::String(text) => text.to_string(),
            // A bare number gets the same message as a text without a unit.
            DeValue::Integer(_) | DeValue::Float(_) => self.raw(span.clone()).replace('_', ""),
            other => {
                let message = format!("{} is not {}", describe(other), T::NAME);
                self.problem(span, message, format!("write \"{}\"", T::EXAMPLE));
                return None;
            }
        };
        match text.parse::<T>() {
            Ok(quantity) => Some(self.sourced(quantity, span)),
            Err(error) => {
                self.problem(span, error.message(), error.help());
                None
            }
        }
    }

    /// A quantity for two cases: one for both, or a table of either.
    pub(crate) fn pair<T: Quantity>(
        &mut self,
        section: &mut Section<'_>,
        key: &'static str,
        cases: [&'static str; 2],
    ) -> [Option<Sourced<T>>; 2] {
        let Some(value) = section.take(key) else { return [None, None] };
        let DeValue::Table(table) = value.get_ref() else {
            let both = self.quantity_of(value);
            return [both.clone(), both];
        };
        let mut inner = Section::new(key, table);
        let found = cases.map(|case| self.quantity(&mut inner, case));
        if table.is_empty() {
            let help = format!("write {key} = \"{0}\" or {key} = {{ {1} = \"{0}\" }}", T::EXAMPLE, cases[0]);
            self.problem(value.span(), format!("{key} is empty"), help);
        }
        self.finish(inner);
        found
    }

    /// Notes every key of the table that nobody asked for.
    pub(crate) fn finish(&mut self, section: Section<'_>) {
        for (key, _) in section.table {
            let name = key.get_ref().as_ref();
            if section.asked.contains(&name) {
                continue;
            }
            let place = if section.title.is_empty() { "the file" } else { &section.title };
            let help = match nearest(name, section.asked.iter().copied()) {
                Some(known) if section.repeated.contains(&known) => format!("write [[{known}]]"),
                // What stands at the top of the file is a section.
                Some(known) if section.title.is_empty() => format!("write [{known}]"),
                Some(known) => format!("write {known}"),
                None => {
                    let known: Vec<String> = section.asked.iter().map(|&key| key.to_owned()).collect();
                    format!("{place} knows {}", either(&known).replace(" or ", " and "))
                }
            };
            let message = format!("unknown key \"{name}\" in {place}");
            self.problem(key.span(), message, help);
        }
    }
}

/// What a value is, for a message that says what it is not.
pub(crate) fn describe(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
