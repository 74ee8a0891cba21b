//! `pack.toml`: what a pack covers. In: its text. Out: [`Manifest`] or faults.

use super::types::Period;
use crate::diag::Diagnostic;
use crate::diag::nearest;
use crate::source::{FileId, Span};
use serde::Deserialize;
use std::collections::BTreeMap;
use toml::Spanned;
use toml::value::Datetime;

/// What a pack says of itself.
#[derive(Clone, Debug)]
pub struct Manifest {
    /// Title, printed on statements.
    pub title: String,
    /// The place whose rules they are.
    pub area: String,
    /// ISO 4217 code.
    pub currency: String,
    /// Statement period.
    pub period: Period,
    /// First day covered, in days since 1970-01-01.
    pub from: i64,
    /// Last day covered.
    pub to: i64,
    /// Names and meanings of the dates that a list gives; the first is the list's `date`.
    pub dates: Vec<(String, String)>,
    /// Where each date is named.
    pub(super) date_spans: Vec<Span>,
    /// What local files may add.
    pub(super) open: Vec<Open>,
}

/// A word of `pack.toml` with its place.
pub(super) type Word = (String, Span);

/// A choice to which local files may add words, and what they give for such a word.
#[derive(Clone, Debug)]
pub(super) struct Open {
    pub choice: Word,
    /// Tables that each local file fills.
    pub fills: Vec<Word>,
    /// Tables that a local file may fill: left out, they give nothing.
    pub may_fill: Vec<Word>,
    /// Tables that a local file fills where it gives a word of a choice, by that word; otherwise it may not.
    pub fills_where: Vec<(Word, Vec<Word>)>,
    /// Tables of the pack that each local file adds rows to.
    pub adds_to: Vec<Word>,
    /// Items that the place's own office runs.
    pub office_of: Vec<Word>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct WrittenOpen {
    choice: Spanned<String>,
    #[serde(default)]
    fills: Vec<Spanned<String>>,
    #[serde(default)]
    may_fill: Vec<Spanned<String>>,
    #[serde(default)]
    fills_where: BTreeMap<Spanned<String>, Vec<Spanned<String>>>,
    #[serde(default)]
    adds_to: Vec<Spanned<String>>,
    #[serde(default)]
    office_of: Vec<Spanned<String>>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Written {
    title: Spanned<String>,
    area: Spanned<String>,
    currency: Spanned<String>,
    period: Spanned<String>,
    covers: Covers,
    dates: Spanned<BTreeMap<Spanned<String>, Spanned<String>>>,
    #[serde(default)]
    local: Vec<WrittenOpen>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Covers {
    from: Spanned<Datetime>,
    to: Spanned<Datetime>,
}

/// Reads it. None where it is no TOML, lacks a key or has no dates; other faults leave something to go on with.
pub(super) fn read(file: FileId, text: &str, faults: &mut Vec<Diagnostic>) -> Option<Manifest> {
    let place = |range: std::ops::Range<usize>| Span {
        file,
        start: range.start as u32,
        end: range.end as u32,
    };
    let written: Written = match toml::from_str(text) {
        Ok(written) => written,
        Err(error) => {
            let span = place(error.span().unwrap_or(0..0));
            let message = error.message().trim().replace('\n', ", ");
            let (found, expected) = message
                .split_once(", expected ")
                .unwrap_or((&message, "title, area, currency, period, covers and dates"));
            faults.push(Diagnostic::fault(span, found).expected(expected));
            return None;
        }
    };
    for (what, text) in [("title", &written.title), ("area", &written.area)] {
        if text.get_ref().trim().is_empty() {
            faults.push(
                Diagnostic::fault(place(text.span()), format!("the {what} is empty"))
                    .expected(format!("the pack's {what} as statements print it")),
            );
        }
    }
    let period = Period::from_word(written.period.get_ref())
        .filter(|p| *p != Period::Hour)
        .unwrap_or_else(|| {
            let fault = Diagnostic::fault(
                place(written.period.span()),
                format!("the period is `{}`", written.period.get_ref()),
            );
            let words = &Period::WORDS[1..];
            let fault = fault.expected(format!("one of {}", words.join(", ")));
            faults.push(super::declare::with_near(
                fault,
                nearest(written.period.get_ref(), words.iter().copied()),
            ));
            Period::Month
        });
    let currency = written.currency.get_ref();
    if currency.len() != 3 || !currency.bytes().all(|b| b.is_ascii_uppercase()) {
        faults.push(
            Diagnostic::fault(
                place(written.currency.span()),
                format!("the currency is `{currency}`"),
            )
            .expected("an ISO 4217 code such as GBP"),
        );
    }
    let mut day = |d: &Spanned<Datetime>| {
        let found = super::amounts::day(&d.get_ref().to_string());
        if found.is_none() {
            faults.push(
                Diagnostic::fault(
                    place(d.span()),
                    format!("`{}` is not a whole day", d.get_ref()),
                )
                .expected("a day such as 2024-04-08"),
            );
        }
        found.unwrap_or(0)
    };
    let (from, to) = (day(&written.covers.from), day(&written.covers.to));
    if from > to {
        faults.push(
            Diagnostic::fault(
                place(written.covers.to.span()),
                "`covers` ends before it starts",
            )
            .expected("`to` on or after `from`"),
        );
    }
    // TOML tables come sorted by name; the order of the text decides which date is the first.
    let whole = written.dates.span();
    let mut dates: Vec<_> = written.dates.into_inner().into_iter().collect();
    dates.sort_by_key(|(name, _)| name.span().start);
    if dates.is_empty() {
        faults.push(
            Diagnostic::fault(place(whole), "`dates` is empty")
                .expected("at least one date, such as `assessment = \"first day of the period\"`"),
        );
        return None;
    }
    for (name, meaning) in &dates {
        let word = name.get_ref();
        let lower = word
            .bytes()
            .all(|b| b.is_ascii_lowercase() || b.is_ascii_digit() || b == b'_');
        let letter = word.starts_with(|c: char| c.is_ascii_lowercase());
        if !lower || !letter || !super::token::can_name(word) {
            faults.push(
                Diagnostic::fault(place(name.span()), format!("`{word}` cannot name a date"))
                    .expected("lower case letters, digits and `_`, a letter first, and no word of the language"),
            );
        }
        if meaning.get_ref().trim().is_empty() {
            faults.push(
                Diagnostic::fault(
                    place(meaning.span()),
                    format!("the date `{word}` has no meaning"),
                )
                .expected("what the date is, in a few words"),
            );
        }
    }
    let word = |word: Spanned<String>| {
        let span = place(word.span());
        (word.into_inner(), span)
    };
    let words = |list: Vec<Spanned<String>>| list.into_iter().map(word).collect();
    let open = |written: WrittenOpen| Open {
        choice: word(written.choice),
        fills: words(written.fills),
        may_fill: words(written.may_fill),
        fills_where: written
            .fills_where
            .into_iter()
            .map(|(when, tables)| (word(when), words(tables)))
            .collect(),
        adds_to: words(written.adds_to),
        office_of: words(written.office_of),
    };
    Some(Manifest {
        open: written.local.into_iter().map(open).collect(),
        title: written.title.into_inner(),
        area: written.area.into_inner(),
        currency: written.currency.into_inner(),
        period,
        from,
        to,
        date_spans: dates.iter().map(|(name, _)| place(name.span())).collect(),
        dates: dates
            .into_iter()
            .map(|(name, meaning)| (name.into_inner(), meaning.into_inner()))
            .collect(),
    })
}
