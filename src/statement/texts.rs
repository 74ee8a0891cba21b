//! The fixed words of a statement, by key, in one language. In: a TOML file. Out: sentences. Refuses unknown keys, unknown
//! names, plural forms that the language does not need or lacks, and characters that cannot be set.
//!
//! In a text, `{name}` is where a value goes; `{#name}` where a number goes, written as the language writes it; `{name|unit}`
//! where a number goes with the words of `unit.…`. A text that depends on a number is a table with one text for each plural form that
//! CLDR gives the language (`one`, `other` …), or with `any` alone where the language says the same for all numbers; `by`
//! names the number where there are several. Tables that start with `copy` are the office's own and in English only.

use super::error::StatementError;
use super::fonts::first_unset;
use super::speech::{Form, Speech};
use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

/// A piece of a text.
#[derive(Clone, Debug, PartialEq, Eq)]
enum Piece {
    /// Words as they stand.
    Words(String),
    /// The name of a value.
    Slot(String),
    /// The name of a number.
    Number(String),
    /// The name of a number, and the key of the text that writes it with its unit.
    Counted(String, String),
}

/// A text with its forms.
#[derive(Clone, Debug)]
enum Text {
    /// The same for all numbers.
    One(Vec<Piece>),
    /// The same for all numbers, and said to be so.
    Any(Vec<Piece>),
    /// By the form of a number.
    Forms(String, BTreeMap<Form, Vec<Piece>>),
}

impl Text {
    fn pieces(&self) -> Vec<&Piece> {
        match self {
            Text::One(pieces) | Text::Any(pieces) => pieces.iter().collect(),
            Text::Forms(_, forms) => forms.values().flatten().collect(),
        }
    }
}

/// The key of the number in the texts of units.
const UNIT_NUMBER: &str = "n";
/// The start of the keys of units.
const UNIT: &str = "unit.";
/// The start of the keys of the file copy. It is the office's own record, so its words are there in English alone.
const OFFICE: &str = "copy.";
/// What a file says about its language, and what holds where it does not.
const ABOUT: [(&str, &str); 3] = [
    ("language.direction", "ltr"),
    ("language.hyphenate", "no"),
    ("language.locale", ""),
];

/// All texts of one language.
#[derive(Clone, Debug)]
pub struct Texts {
    language: String,
    speech: Arc<Speech>,
    entries: BTreeMap<String, Text>,
}

impl Texts {
    /// Reads a text file; tables inside tables become keys with points: `[step] gain = "…"` is `step.gain`.
    ///
    /// # Errors
    /// The first of [`Texts::read_all`]'s.
    pub fn read(language: &str, text: &str) -> Result<Texts, StatementError> {
        Texts::read_all(language, text).map_err(|mut faults| faults.swap_remove(0))
    }

    /// As [`Texts::read`], with every fault.
    ///
    /// # Errors
    /// Where the file is not TOML, holds something else than texts, or a text has an unclosed `{`, the wrong plural forms or a
    /// character that the shipped fonts cannot set. At least one.
    pub fn read_all(language: &str, text: &str) -> Result<Texts, Vec<StatementError>> {
        let fault = |message: String| StatementError::Texts {
            language: language.to_owned(),
            message,
        };
        let table: toml::Table = text
            .parse()
            .map_err(|error: toml::de::Error| vec![fault(error.message().to_owned())])?;
        let mut flat = BTreeMap::new();
        flatten("", &table, &mut flat).map_err(|message| vec![fault(message)])?;
        for (key, usual) in ABOUT {
            let usual = if usual.is_empty() { language } else { usual };
            flat.entry(key.to_owned())
                .or_insert_with(|| Raw::One(usual.to_owned()));
        }
        let one_of = |key: &str, words: &[&str]| match flat.get(key) {
            Some(Raw::One(word)) if words.contains(&word.as_str()) => Ok(()),
            Some(_) | None => Err(vec![fault(format!(
                "`{key}` is something else than one of {}",
                words.join(", ")
            ))]),
        };
        one_of("language.direction", &["ltr", "rtl"])?;
        one_of("language.hyphenate", &["yes", "no"])?;
        let speech = match flat.get("language.locale") {
            Some(Raw::One(locale)) => Speech::of(locale),
            Some(Raw::Forms(_)) | None => None,
        };
        let Some(speech) = speech else {
            let found = "`language.locale` is no locale, expected one such as `en-GB`";
            return Err(vec![fault(found.to_owned())]);
        };
        let mut faults = vec![];
        let mut entries = BTreeMap::new();
        for (key, raw) in flat {
            match read_text(&key, raw, &speech) {
                Ok(text) => {
                    entries.insert(key, text);
                }
                Err(Bad::Character(character)) => faults.push(StatementError::Glyph {
                    field: format!("text {key}"),
                    character,
                }),
                Err(Bad::Text(messages)) => faults.extend(messages.into_iter().map(&fault)),
            }
        }
        for (key, text) in &entries {
            let number =
                |piece: &&Piece| matches!(piece, Piece::Number(name) if name == UNIT_NUMBER);
            if key.starts_with(UNIT) && !text.pieces().iter().any(number) {
                faults.push(fault(format!("`{key}` has no `{{#{UNIT_NUMBER}}}`")));
            }
            for piece in text.pieces() {
                if let Piece::Counted(name, unit) = piece
                    && !entries.contains_key(unit)
                {
                    let short = &unit[UNIT.len()..];
                    faults.push(fault(format!(
                        "`{key}` has `{{{name}|{short}}}`, but there is no text `{unit}`"
                    )));
                }
            }
        }
        if faults.is_empty() {
            Ok(Texts {
                language: language.to_owned(),
                speech: Arc::new(speech),
                entries,
            })
        } else {
            Err(faults)
        }
    }

    /// The language, a BCP 47 tag.
    pub fn language(&self) -> &str {
        &self.language
    }

    /// How the language writes numbers and lists.
    pub fn speech(&self) -> &Arc<Speech> {
        &self.speech
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

    /// The text with its values in place. Numbers are given as plain text: `29.65`.
    ///
    /// # Errors
    /// Where the key is unknown, or the text names a value that is not given, or a number that is none.
    pub fn say(&self, key: &str, values: &[(&str, &str)]) -> Result<String, StatementError> {
        let mut out = String::new();
        self.speak(key, values, &mut out)
            .map_err(|message| StatementError::Texts {
                language: self.language.clone(),
                message,
            })?;
        Ok(out)
    }

    fn speak(&self, key: &str, values: &[(&str, &str)], out: &mut String) -> Result<(), String> {
        let given = |name: &str| {
            let value = values.iter().find(|(known, _)| *known == name);
            value
                .map(|(_, value)| *value)
                .ok_or_else(|| format!("`{key}` names `{name}`, which it is not given"))
        };
        let no_number = |name: &str, value: &str| {
            format!("`{key}` has `{value}` for `{name}`, expected a number")
        };
        let text = self
            .entries
            .get(key)
            .ok_or_else(|| format!("no text with the key `{key}`"))?;
        let pieces = match text {
            Text::One(pieces) | Text::Any(pieces) => pieces,
            Text::Forms(by, forms) => {
                let value = given(by)?;
                let form = self
                    .speech
                    .form(value)
                    .ok_or_else(|| no_number(by, value))?;
                let pieces = forms.get(&form).or_else(|| forms.get(&Form::Other));
                pieces.ok_or_else(|| format!("`{key}` has no form `{}`", form.word()))?
            }
        };
        for piece in pieces {
            match piece {
                Piece::Words(words) => out.push_str(words),
                Piece::Slot(name) => out.push_str(given(name)?),
                Piece::Number(name) => {
                    let value = given(name)?;
                    let number = self.speech.number(value);
                    out.push_str(&number.ok_or_else(|| no_number(name, value))?);
                }
                Piece::Counted(name, unit) => {
                    let value = given(name)?;
                    if self.speech.form(value).is_none() {
                        return Err(no_number(name, value));
                    }
                    self.speak(unit, &[(UNIT_NUMBER, value)], out)?;
                }
            }
        }
        Ok(())
    }

    /// What this language lacks or has too much, measured by another: keys, names of values, plural forms. Units are each
    /// language's own; the words of the file copy, `copy.…`, belong to English alone.
    pub fn differences(&self, from: &Texts) -> Vec<StatementError> {
        let mut faults = vec![];
        let mut fault = |message: String| {
            faults.push(StatementError::Texts {
                language: self.language.clone(),
                message,
            });
        };
        let shared = |key: &&String| !key.starts_with(UNIT) && !key.starts_with(OFFICE);
        let own = self.language != from.language;
        let office = |key: &&String| own && key.starts_with(OFFICE);
        for key in self.entries.keys().filter(office) {
            fault(format!(
                "`{key}` is a text of the file copy, which is in English only"
            ));
        }
        for key in from.entries.keys().filter(shared) {
            if !self.entries.contains_key(key) {
                let words = from.language();
                fault(format!("no text with the key `{key}`, which `{words}` has"));
            }
        }
        for (key, text) in self.entries.iter().filter(|(key, _)| shared(key)) {
            let Some(other) = from.entries.get(key) else {
                let words = from.language();
                fault(format!("`{key}` is a key that `{words}` does not have"));
                continue;
            };
            let (own, wanted) = (names(text), names(other));
            for (name, _) in wanted.difference(&own) {
                fault(format!(
                    "`{key}` does not say `{name}`, or not as the same kind of value"
                ));
            }
            for (name, _) in own.difference(&wanted) {
                if !wanted.iter().any(|(known, _)| known == name) {
                    fault(format!("`{key}` names `{name}`, which it is not given"));
                }
            }
            if let (Text::Forms(..) | Text::Any(_), Text::One(_)) = (other, text) {
                let forms: Vec<&str> = self.speech.forms().iter().map(|form| form.word()).collect();
                fault(format!(
                    "`{key}` has one text, expected one for each of {}, or `any`",
                    forms.join(", ")
                ));
            }
        }
        faults
    }
}

/// The names of a text's values, and whether each is a number.
fn names(text: &Text) -> BTreeSet<(&str, bool)> {
    let mut out = BTreeSet::new();
    for piece in text.pieces() {
        match piece {
            Piece::Words(_) => {}
            Piece::Slot(name) => {
                out.insert((name.as_str(), false));
            }
            Piece::Number(name) | Piece::Counted(name, _) => {
                out.insert((name.as_str(), true));
            }
        }
    }
    out
}

/// A text as the file has it.
enum Raw {
    One(String),
    Forms(BTreeMap<String, String>),
}

/// Why a text cannot be used.
enum Bad {
    Character(char),
    Text(Vec<String>),
}

/// Whether a table holds the forms of one text.
fn is_forms(table: &toml::Table) -> bool {
    let known = |name: &String| {
        name == "any" || name == "by" || Form::ALL.iter().any(|form| form.word() == name)
    };
    (table.contains_key("other") || table.contains_key("any")) && table.keys().all(known)
}

/// Brings tables inside tables to one level.
fn flatten(
    start: &str,
    table: &toml::Table,
    out: &mut BTreeMap<String, Raw>,
) -> Result<(), String> {
    for (name, value) in table {
        let key = if start.is_empty() {
            name.clone()
        } else {
            format!("{start}.{name}")
        };
        match value {
            toml::Value::String(text) => {
                out.insert(key, Raw::One(text.trim_end().to_owned()));
            }
            toml::Value::Table(inner) if is_forms(inner) => {
                let mut forms = BTreeMap::new();
                for (name, text) in inner {
                    let text = text.as_str().ok_or_else(|| {
                        format!("`{key}.{name}` is a {}, expected a text", text.type_str())
                    })?;
                    forms.insert(name.clone(), text.trim_end().to_owned());
                }
                out.insert(key, Raw::Forms(forms));
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

/// Reads one text with its forms.
fn read_text(key: &str, raw: Raw, speech: &Speech) -> Result<Text, Bad> {
    let pieces = |text: &str| {
        if let Some(character) = first_unset(text) {
            return Err(Bad::Character(character));
        }
        split(text).ok_or_else(|| {
            let message = format!("`{key}` has a `{{` or `}}` without its pair");
            Bad::Text(vec![message])
        })
    };
    let mut raw = match raw {
        Raw::One(text) => return pieces(&text).map(Text::One),
        Raw::Forms(forms) => forms,
    };
    let by = raw.remove("by");
    if let Some(text) = raw.get("any") {
        if raw.len() > 1 || by.is_some() {
            let message = format!("`{key}` has `any` beside other forms");
            return Err(Bad::Text(vec![message]));
        }
        return pieces(text).map(Text::Any);
    }
    let needed = speech.forms();
    let mut faults = vec![];
    let mut forms = BTreeMap::new();
    for form in Form::ALL {
        match (raw.get(form.word()), needed.contains(&form)) {
            (Some(text), true) => {
                forms.insert(form, pieces(text)?);
            }
            (None, true) => faults.push(format!(
                "`{key}` has no form `{}`, which the language needs",
                form.word()
            )),
            (Some(_), false) => faults.push(format!(
                "`{key}` has the form `{}`, which the language does not have",
                form.word()
            )),
            (None, false) => {}
        }
    }
    let numbers: BTreeSet<&str> = forms
        .values()
        .flatten()
        .filter_map(|piece| match piece {
            Piece::Number(name) | Piece::Counted(name, _) => Some(name.as_str()),
            Piece::Words(_) | Piece::Slot(_) => None,
        })
        .collect();
    let by = match (by, numbers.iter().next(), numbers.len()) {
        (Some(by), _, _) if numbers.contains(by.as_str()) => by,
        (None, Some(one), 1) => (*one).to_owned(),
        (_, _, _) => {
            let names: Vec<&str> = numbers.iter().copied().collect();
            faults.push(format!(
                "`{key}` does not say by which number it changes, expected `by` with one of: {}",
                names.join(", ")
            ));
            String::new()
        }
    };
    if faults.is_empty() {
        Ok(Text::Forms(by, forms))
    } else {
        Err(Bad::Text(faults))
    }
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
        pieces.push(match (name.strip_prefix('#'), name.split_once('|')) {
            (Some(name), _) => Piece::Number(name.to_owned()),
            (None, Some((name, unit))) => Piece::Counted(name.to_owned(), format!("{UNIT}{unit}")),
            (None, None) => Piece::Slot(name.to_owned()),
        });
        rest = tail.strip_prefix('}')?;
    }
    if !rest.is_empty() {
        pieces.push(Piece::Words(rest.to_owned()));
    }
    Some(pieces)
}
