//! TOML texts with the place of every value. In: text. Out: keys and values in the order of the text. Numbers stay text, so that
//! none of them ever becomes a float. Imports nothing outside `case`.

use super::fault::{Fault, Place};
use super::problem::Problem;
use super::record::{Spot, Written};
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// The faults of a TOML text while it is read.
pub(super) struct TomlText<'t> {
    pub(super) file: &'t str,
    text: &'t str,
    pub(super) faults: Vec<Fault>,
}

/// One key with its value.
pub(super) struct Entry<'t> {
    pub(super) key: String,
    pub(super) key_span: Range<usize>,
    pub(super) value: &'t Spanned<DeValue<'t>>,
}

impl<'t> TomlText<'t> {
    pub(super) fn new(file: &'t str, text: &'t str) -> TomlText<'t> {
        TomlText {
            file,
            text: text.strip_prefix('\u{feff}').unwrap_or(text),
            faults: vec![],
        }
    }

    /// The whole text as a table; none where it is not TOML, with a fault for each place that is not.
    pub(super) fn parse(&mut self) -> Option<Spanned<DeTable<'t>>> {
        let (table, errors) = DeTable::parse_recoverable(self.text);
        if errors.is_empty() {
            return Some(table);
        }
        for error in errors.into_iter().take(20) {
            let message = error.message().trim().replace('\n', ", ");
            self.fault(
                error.span().unwrap_or(0..0),
                "",
                "",
                Problem::Syntax(message),
            );
        }
        None
    }

    /// Line and character of a byte, both counted from 1.
    pub(super) fn spot(&self, span: &Range<usize>, written: Written) -> Spot {
        let mut at = span.start.min(self.text.len());
        while !self.text.is_char_boundary(at) {
            at -= 1;
        }
        let before = &self.text[..at];
        let start = before.rfind('\n').map_or(0, |end| end + 1);
        Spot {
            line: before.bytes().filter(|byte| *byte == b'\n').count() + 1,
            column: before[start..].chars().count() + 1,
            written,
        }
    }

    /// Notes a fault at a place of the text.
    pub(super) fn fault(&mut self, span: Range<usize>, key: &str, value: &str, problem: Problem) {
        let spot = self.spot(&span, Written::AsToml);
        self.faults.push(Fault {
            file: self.file.into(),
            place: Place::Text {
                line: spot.line,
                column: spot.column,
                key: key.into(),
            },
            reference: String::new(),
            value: value.into(),
            problem,
        });
    }

    /// Notes that a value has the wrong shape.
    pub(super) fn wrong_shape(&mut self, key: &str, value: &Spanned<DeValue<'_>>, expected: &str) {
        let found = match value.get_ref() {
            DeValue::Array(_) | DeValue::Table(_) => value.get_ref().type_str().to_string(),
            other => scalar(other).map(|(text, _)| text).unwrap_or_default(),
        };
        self.fault(
            value.span(),
            key,
            &found,
            Problem::WrongShape(expected.into()),
        );
    }
}

/// The entries of a table in the order of the text.
pub(super) fn entries<'t>(table: &'t DeTable<'t>) -> Vec<Entry<'t>> {
    let mut all: Vec<Entry<'t>> = table
        .iter()
        .map(|(key, value)| Entry {
            key: key.get_ref().to_string(),
            key_span: key.span(),
            value,
        })
        .collect();
    all.sort_by_key(|entry| entry.key_span.start);
    all
}

/// A single value as text, and whether its writing is TOML's own; none for arrays and tables.
pub(super) fn scalar(value: &DeValue<'_>) -> Option<(String, Written)> {
    match value {
        DeValue::String(text) => Some((text.trim().to_string(), Written::AsDeclared)),
        DeValue::Integer(number) => Some((number.to_string(), Written::AsToml)),
        DeValue::Float(number) => Some((number.as_str().to_string(), Written::AsToml)),
        DeValue::Boolean(true) => Some(("yes".into(), Written::AsToml)),
        DeValue::Boolean(false) => Some(("no".into(), Written::AsToml)),
        DeValue::Datetime(day) => Some((day.to_string(), Written::AsToml)),
        DeValue::Array(_) | DeValue::Table(_) => None,
    }
}
