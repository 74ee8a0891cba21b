//! A local file as written: one place's word for a choice of the pack, with rows for the tables that the pack leaves open.
//! In: its TOML text. Out: [`LocalText`], every value with its place; faults for what is no local file. Knows no pack: `local`
//! lays the file over one.

use super::amounts::{day, day_text};
use super::manifest::Word;
use crate::diag::{Diagnostic, nearest};
use crate::source::{FileId, SourceText, Span};
use std::collections::BTreeMap;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// A local file.
#[derive(Clone, Debug)]
pub(super) struct LocalText {
    /// As messages name it.
    pub file_name: String,
    pub title: String,
    pub choice: Word,
    pub word: Word,
    pub from: i64,
    pub to: i64,
    /// Where it was published.
    pub source: String,
    /// How statements name the word, by language.
    pub names: BTreeMap<String, String>,
    /// The office that runs it, by language; empty where there is none of its own.
    pub offices: BTreeMap<String, String>,
    /// Where the office stands, if there is one.
    pub office_span: Option<Span>,
    /// Those without faults.
    pub tables: Vec<Block>,
    /// Every table that the file names, and whether all that stands below its name could be read.
    pub mentioned: BTreeMap<String, Readable>,
    /// The first line of the text.
    pub whole: Span,
}

/// Whether a table of a local file could be read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Readable {
    /// All of it.
    Whole,
    /// Not all: what it lacks would only echo what is wrong with it.
    InPart,
}

/// Rows of one table for a stretch of days.
#[derive(Clone, Debug)]
pub(super) struct Block {
    pub table: Word,
    pub unit: Word,
    pub from: i64,
    pub to: i64,
    pub source: String,
    pub locator: String,
    pub confirmed: bool,
    /// Keys, each one or several words, then the value.
    pub rows: Vec<(Span, Vec<Cell>)>,
}

/// One place of a row: one word or number, or several words that share the row.
#[derive(Clone, Debug)]
pub(super) struct Cell {
    pub span: Span,
    pub words: Vec<String>,
}

const KEYS: [&str; 11] = [
    "title", "pack", "choice", "word", "from", "to", "source", "status", "name", "office", "table",
];
const BLOCK_KEYS: [&str; 9] = [
    "name", "unit", "locator", "value", "rows", "from", "to", "source", "status",
];

/// Reads a local file. None where too little is left to lay it over a pack.
pub(super) fn read(
    file: FileId,
    source: &SourceText,
    faults: &mut Vec<Diagnostic>,
) -> Option<LocalText> {
    let (root, errors) = DeTable::parse_recoverable(&source.text);
    if !errors.is_empty() {
        for error in errors.into_iter().take(20) {
            let range = error.span().unwrap_or(0..0);
            let message = error.message().trim().replace('\n', ", ");
            let (found, expected) = message
                .split_once(", expected ")
                .unwrap_or((&message, "a text in TOML"));
            faults.push(Diagnostic::fault(span(file, &range), found).expected(expected));
        }
        return None;
    }
    let mut reader = Reader {
        file,
        text: &source.text,
        faults,
    };
    reader.whole(root.get_ref(), source)
}

fn span(file: FileId, range: &std::ops::Range<usize>) -> Span {
    Span {
        file,
        start: range.start as u32,
        end: range.end as u32,
    }
}

struct Reader<'f> {
    file: FileId,
    text: &'f str,
    faults: &'f mut Vec<Diagnostic>,
}

impl Reader<'_> {
    fn whole(&mut self, root: &DeTable<'_>, source: &SourceText) -> Option<LocalText> {
        let top = Span {
            file: self.file,
            start: 0,
            end: source.text.lines().next().map_or(0, str::len) as u32,
        };
        self.known(root, &KEYS);
        let title = self.text(
            root,
            "title",
            top,
            "the title of the scheme or table, as statements print it",
        );
        self.text(
            root,
            "pack",
            top,
            "the rule pack that it is for, such as `pack = \"uk\"`",
        );
        let choice = self.text(
            root,
            "choice",
            top,
            "the choice of the pack to which the file adds a word",
        );
        let word = self.text(
            root,
            "word",
            top,
            "the place's word: lower case letters, digits and `_`",
        );
        let from = self.day(root, "from", Some(top));
        let to = self.day(root, "to", Some(top));
        let published = self.text(root, "source", top, "who published the figures, and where");
        let status = match root.get("status") {
            None => Status::Left,
            Some(value) => self.status(value).map_or(Status::Faulty, Status::Given),
        };
        let names = self.languages(root, "name", Some(top));
        let offices = self.languages(root, "office", None);
        let (from, to) = (from?, to?);
        if from.0 > to.0 {
            self.faults.push(
                Diagnostic::fault(to.1, format!("`to` is {}", day_text(to.0)))
                    .expected(format!("a day from {} on", day_text(from.0))),
            );
            return None;
        }
        let shared = Shared {
            from: from.0,
            to: to.0,
            source: published.as_ref().map_or("", |(text, _)| text),
            status,
        };
        let mut mentioned = BTreeMap::new();
        let tables = self.blocks(root, top, &shared, &mut mentioned);
        let office = root.iter().find(|(key, _)| key.get_ref() == "office");
        Some(LocalText {
            file_name: source.name.clone(),
            title: title.map_or_else(String::new, |(text, _)| text),
            choice: choice?,
            word: word?,
            from: from.0,
            to: to.0,
            source: published.map_or_else(String::new, |(text, _)| text),
            names,
            offices,
            office_span: office.map(|(key, _)| span(self.file, &key.span())),
            tables,
            mentioned,
            whole: top,
        })
    }

    /// Reports keys that mean nothing.
    fn known(&mut self, table: &DeTable<'_>, keys: &[&str]) {
        for (key, _) in table.iter() {
            let word: &str = key.get_ref();
            if !keys.contains(&word) {
                let fault = Diagnostic::fault(
                    span(self.file, &key.span()),
                    format!("`{word}` is no key of a local file here"),
                )
                .expected(format!("one of {}", keys.join(", ")));
                self.faults.push(super::declare::with_near(
                    fault,
                    nearest(word, keys.iter().copied()),
                ));
            }
        }
    }

    fn missing(&mut self, place: Span, key: &str, expected: &str) {
        self.faults
            .push(Diagnostic::fault(place, format!("`{key}` is missing")).expected(expected));
    }

    /// A text that must be there and not be empty.
    fn text(
        &mut self,
        table: &DeTable<'_>,
        key: &str,
        place: Span,
        expected: &str,
    ) -> Option<Word> {
        let Some(value) = table.get(key) else {
            self.missing(place, key, expected);
            return None;
        };
        let place = span(self.file, &value.span());
        match value.get_ref() {
            DeValue::String(text) if !text.trim().is_empty() => {
                Some((text.trim().to_owned(), place))
            }
            DeValue::String(_) => {
                self.faults
                    .push(Diagnostic::fault(place, format!("`{key}` is empty")).expected(expected));
                None
            }
            other => {
                self.faults.push(
                    Diagnostic::fault(place, format!("`{key}` is no text but {}", kind(other)))
                        .expected(expected),
                );
                None
            }
        }
    }

    /// A day; `place` is where it is missed.
    fn day(&mut self, table: &DeTable<'_>, key: &str, place: Option<Span>) -> Option<(i64, Span)> {
        let Some(value) = table.get(key) else {
            if let Some(place) = place {
                let which = if key == "from" { "first" } else { "last" };
                self.missing(
                    place,
                    key,
                    &format!("the {which} day on which it holds, as year-month-day"),
                );
            }
            return None;
        };
        let place = span(self.file, &value.span());
        let text = scalar(value.get_ref()).unwrap_or_default();
        let found = day(&text);
        if found.is_none() {
            self.faults.push(
                Diagnostic::fault(place, format!("`{text}` is no day"))
                    .expected("a day as year-month-day"),
            );
        }
        found.map(|day| (day, place))
    }

    fn status(&mut self, value: &Spanned<DeValue<'_>>) -> Option<bool> {
        match value.get_ref().as_str() {
            Some("read") => Some(true),
            Some("memory") => Some(false),
            _ => {
                let found = scalar(value.get_ref()).unwrap_or_default();
                self.faults.push(
                    Diagnostic::fault(
                        span(self.file, &value.span()),
                        format!("the status is `{found}`"),
                    )
                    .expected("read (seen in the source) or memory (not confirmed)"),
                );
                None
            }
        }
    }

    /// Texts by language; English must be among them.
    fn languages(
        &mut self,
        root: &DeTable<'_>,
        key: &str,
        needed: Option<Span>,
    ) -> BTreeMap<String, String> {
        let expected = format!("a table `[{key}]` with a text for each language, `en` among them");
        let Some(value) = root.get(key) else {
            if let Some(place) = needed {
                self.missing(place, key, &expected);
            }
            return BTreeMap::new();
        };
        let place = span(self.file, &value.span());
        let Some(table) = value.get_ref().as_table() else {
            self.faults.push(
                Diagnostic::fault(place, format!("`{key}` is {}", kind(value.get_ref())))
                    .expected(expected),
            );
            return BTreeMap::new();
        };
        let mut out = BTreeMap::new();
        for (language, _) in table.iter() {
            let language: &str = language.get_ref();
            if let Some((text, _)) = self.text(table, language, place, "a text") {
                out.insert(language.to_owned(), text);
            }
        }
        if !table.contains_key("en") {
            self.missing(place, "en", "a text in English");
        }
        out
    }

    /// The tables without faults; all that are named go into `mentioned`.
    fn blocks(
        &mut self,
        root: &DeTable<'_>,
        top: Span,
        shared: &Shared<'_>,
        mentioned: &mut BTreeMap<String, Readable>,
    ) -> Vec<Block> {
        let expected = "tables `[[table]]` with `name`, `unit`, `locator` and `rows`";
        let Some(value) = root.get("table") else {
            self.missing(top, "table", expected);
            return vec![];
        };
        let Some(list) = value.get_ref().as_array() else {
            let found = format!("`table` is {}", kind(value.get_ref()));
            let place = span(self.file, &value.span());
            self.faults
                .push(Diagnostic::fault(place, found).expected(expected));
            return vec![];
        };
        let mut out = vec![];
        for one in list.iter() {
            let place = span(self.file, &one.span());
            // The head of the table alone: its values follow it over many lines.
            let mut end = place.end.min(place.start + "[[table]]".len() as u32);
            while !self.text.is_char_boundary(end as usize) {
                end -= 1;
            }
            let place = Span { end, ..place };
            let Some(table) = one.get_ref().as_table() else {
                let found = format!("this is {}", kind(one.get_ref()));
                self.faults
                    .push(Diagnostic::fault(place, found).expected(expected));
                continue;
            };
            let block = self.block(table, place, shared);
            if let Some(name) = table.get("name").and_then(|name| name.get_ref().as_str()) {
                let whole = mentioned
                    .entry(name.trim().to_owned())
                    .or_insert(Readable::Whole);
                if block.is_none() {
                    *whole = Readable::InPart;
                }
            }
            out.extend(block);
        }
        out
    }

    fn block(&mut self, table: &DeTable<'_>, place: Span, shared: &Shared<'_>) -> Option<Block> {
        self.known(table, &BLOCK_KEYS);
        let name = self.text(
            table,
            "name",
            place,
            "the name of a table that the pack leaves open",
        );
        let at = name.as_ref().map_or(place, |(_, at)| *at);
        let unit = self.text(
            table,
            "unit",
            at,
            "the unit of the values, such as `GBP a week`, `percent`, `yesno` or `word`",
        );
        let locator = self.text(
            table,
            "locator",
            at,
            "where in the source the figures stand",
        );
        let source = match table.get("source") {
            None => Some(shared.source.to_owned()),
            Some(_) => self
                .text(table, "source", at, "where the figures were published")
                .map(|(text, _)| text),
        };
        let status = match (table.get("status"), shared.status) {
            (Some(value), _) => self.status(value),
            (None, Status::Given(status)) => Some(status),
            (None, Status::Faulty) => None,
            (None, Status::Left) => {
                self.missing(at, "status", "read (seen in the source) or memory (not confirmed), here or at the top of the file");
                None
            }
        };
        let mut inside = |key: &str, otherwise: i64| match table.get(key) {
            None => Some(otherwise),
            Some(_) => {
                let (day, place) = self.day(table, key, None)?;
                if day < shared.from || day > shared.to {
                    self.faults.push(
                        Diagnostic::fault(place, format!("`{key}` is {}", day_text(day))).expected(
                            format!(
                                "a day from {} to {}, for which the file holds",
                                day_text(shared.from),
                                day_text(shared.to)
                            ),
                        ),
                    );
                    return None;
                }
                Some(day)
            }
        };
        let (from, to) = (inside("from", shared.from), inside("to", shared.to));
        let rows = self.rows(table, at);
        Some(Block {
            table: name?,
            unit: unit?,
            from: from?,
            to: to?,
            source: source?,
            locator: locator?.0,
            confirmed: status?,
            rows: rows?,
        })
    }

    fn rows(&mut self, table: &DeTable<'_>, at: Span) -> Option<Vec<(Span, Vec<Cell>)>> {
        let expected = "`rows`, a list of rows with their keys and the value last, or `value` where the word is the only key";
        let (value, rows) = (table.get("value"), table.get("rows"));
        let (Some(one), only) = (value.or(rows), value.is_none() != rows.is_none()) else {
            self.missing(at, "rows", expected);
            return None;
        };
        let place = span(self.file, &one.span());
        if !only {
            self.faults.push(
                Diagnostic::fault(place, "`value` and `rows` stand in one table")
                    .expected(expected),
            );
            return None;
        }
        if value.is_some() {
            return Some(vec![(place, vec![self.cell(one, "a number or a word")?])]);
        }
        let Some(list) = one
            .get_ref()
            .as_array()
            .filter(|list| list.iter().next().is_some())
        else {
            self.faults
                .push(Diagnostic::fault(place, "`rows` is no list of rows").expected(expected));
            return None;
        };
        let before = self.faults.len();
        let mut out = vec![];
        for row in list.iter() {
            let place = span(self.file, &row.span());
            let Some(cells) = row.get_ref().as_array() else {
                self.faults.push(
                    Diagnostic::fault(place, format!("this row is {}", kind(row.get_ref()))).expected(
                        "a list with the keys and then the value, such as `[\"single\", 1, 80]`",
                    ),
                );
                continue;
            };
            let cells: Vec<Cell> = cells
                .iter()
                .filter_map(|cell| {
                    self.cell(
                        cell,
                        "a number, a word, or a list of words that share the row",
                    )
                })
                .collect();
            out.push((place, cells));
        }
        (self.faults.len() == before).then_some(out)
    }

    fn cell(&mut self, value: &Spanned<DeValue<'_>>, expected: &str) -> Option<Cell> {
        let place = span(self.file, &value.span());
        let words = match value.get_ref() {
            DeValue::Array(list) => list
                .iter()
                .map(|one| scalar(one.get_ref()))
                .collect::<Option<Vec<_>>>()
                .filter(|words| !words.is_empty()),
            other => scalar(other).map(|word| vec![word]),
        };
        if words.is_none() {
            self.faults.push(
                Diagnostic::fault(place, format!("this is {}", kind(value.get_ref())))
                    .expected(expected),
            );
        }
        words.map(|words| Cell { span: place, words })
    }
}

/// What the tables of a file share.
struct Shared<'s> {
    from: i64,
    to: i64,
    source: &'s str,
    status: Status,
}

/// The status at the top of a file.
#[derive(Clone, Copy)]
enum Status {
    Given(bool),
    Left,
    /// It was reported already.
    Faulty,
}

/// A single value as text; none for lists and tables.
fn scalar(value: &DeValue<'_>) -> Option<String> {
    match value {
        DeValue::String(text) => Some(text.trim().to_owned()),
        DeValue::Integer(number) => Some(number.to_string()),
        DeValue::Float(number) => Some(number.as_str().to_owned()),
        DeValue::Boolean(true) => Some("yes".to_owned()),
        DeValue::Boolean(false) => Some("no".to_owned()),
        DeValue::Datetime(day) => Some(day.to_string()),
        DeValue::Array(_) | DeValue::Table(_) => None,
    }
}

fn kind(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a day",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
