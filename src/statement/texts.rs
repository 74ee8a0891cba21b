//! The fixed words of a statement, by key, in one language. In: a TOML file with `{name}` where a value
//! goes. Out: sentences. Refuses unknown keys, unknown names and characters that cannot be set.

use super::error::StatementError;
use super::fonts::first_unset;
use std::collections::BTreeMap;

/// A piece of a text.
#[derive(Clone, Debug, PartialEq, Eq)]
enum Piece {
    /// Words as they stand.
    Words(String),
    /// The name of a value.
    Slot(String),
}

/// All texts of one language.
#[derive(Clone, Debug)]
pub struct Texts {
    language: String,
    entries: BTreeMap<String, Vec<Piece>>,
}

impl Texts {
    /// Reads a text file; tables inside tables become keys with points: `[step] gain = "…"` is `step.gain`.
    ///
    /// # Errors
    /// Where the file is not TOML, holds something else than texts, or a text has an unclosed `{` or a
    /// character that the shipped fonts cannot set.
    pub fn read(language: &str, text: &str) -> Result<Texts, StatementError> {
        let fault = |message: String| StatementError::Texts {
            language: language.to_owned(),
            message,
        };
        let table: toml::Table = text
            .parse()
            .map_err(|error: toml::de::Error| fault(error.message().to_owned()))?;
        let mut flat = BTreeMap::new();
        flatten("", &table, &mut flat).map_err(fault)?;
        let mut entries = BTreeMap::new();
        for (key, text) in flat {
            if let Some(character) = first_unset(&text) {
                return Err(StatementError::Glyph {
                    field: format!("text {key}"),
                    character,
                });
            }
            let pieces = split(&text)
                .ok_or_else(|| fault(format!("`{key}` has a `{{` or `}}` without its pair")))?;
            entries.insert(key, pieces);
        }
        Ok(Texts {
            language: language.to_owned(),
            entries,
        })
    }

    /// The language, a BCP 47 tag.
    pub fn language(&self) -> &str {
        &self.language
    }

    /// Whether there is a text with this key.
    pub fn has(&self, key: &str) -> bool {
        self.entries.contains_key(key)
    }

    /// All keys that start with these words, in order.
    pub fn keys<'a>(&'a self, start: &'a str) -> impl Iterator<Item = &'a str> {
        self.entries
            .range(start.to_owned()..)
            .map(|(key, _)| key.as_str())
            .take_while(move |key| key.starts_with(start))
    }

    /// The text with its values in place.
    ///
    /// # Errors
    /// Where the key is unknown, or the text names a value that is not given.
    pub fn say(&self, key: &str, values: &[(&str, &str)]) -> Result<String, StatementError> {
        let fault = |message: String| StatementError::Texts {
            language: self.language.clone(),
            message,
        };
        let pieces = self
            .entries
            .get(key)
            .ok_or_else(|| fault(format!("no text with the key `{key}`")))?;
        let mut out = String::new();
        for piece in pieces {
            match piece {
                Piece::Words(words) => out.push_str(words),
                Piece::Slot(name) => {
                    let value = values.iter().find(|(known, _)| known == name);
                    let (_, value) = value.ok_or_else(|| {
                        fault(format!("`{key}` names `{name}`, which it is not given"))
                    })?;
                    out.push_str(value);
                }
            }
        }
        Ok(out)
    }
}

/// Brings tables inside tables to one level.
fn flatten(
    start: &str,
    table: &toml::Table,
    out: &mut BTreeMap<String, String>,
) -> Result<(), String> {
    for (name, value) in table {
        let key = if start.is_empty() {
            name.clone()
        } else {
            format!("{start}.{name}")
        };
        match value {
            toml::Value::String(text) => {
                out.insert(key, text.trim_end().to_owned());
            }
            toml::Value::Table(inner) => flatten(&key, inner, out)?,
            other => {
                return Err(format!(
                    "`{key}` is a {}, expected a text",
                    other.type_str()
                ));
            }
        }
    }
    Ok(())
}

/// Splits a text at its `{name}`s; none where a bracket has no pair.
fn split(text: &str) -> Option<Vec<Piece>> {
    let mut pieces = vec![];
    let mut rest = text;
    while let Some(open) = rest.find(['{', '}']) {
        let (words, tail) = rest.split_at(open);
        let name = tail.strip_prefix('{')?;
        let close = name.find(['{', '}'])?;
        let (name, tail) = name.split_at(close);
        if !words.is_empty() {
            pieces.push(Piece::Words(words.to_owned()));
        }
        pieces.push(Piece::Slot(name.to_owned()));
        rest = tail.strip_prefix('}')?;
    }
    if !rest.is_empty() {
        pieces.push(Piece::Words(rest.to_owned()));
    }
    Some(pieces)
}
