//! `pack.toml`: what a pack covers. In: its text. Out: [`Manifest`] or faults.

use super::types::Period;
use crate::diag::Diagnostic;
use crate::source::{FileId, Span};
use serde::Deserialize;
use std::collections::BTreeMap;

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
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Written {
    title: String,
    area: String,
    currency: String,
    period: String,
    covers: Covers,
    dates: BTreeMap<String, String>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Covers {
    from: toml::value::Datetime,
    to: toml::value::Datetime,
}

pub(super) fn read(file: FileId, text: &str, faults: &mut Vec<Diagnostic>) -> Option<Manifest> {
    let whole = Span { file, start: 0, end: 0 };
    let written: Written = match toml::from_str(text) {
        Ok(written) => written,
        Err(error) => {
            let span = error.span().map_or(whole, |s| Span { file, start: s.start as u32, end: s.end as u32 });
            faults.push(Diagnostic::fault(span, error.message().trim().replace('\n', ", ")).expected("a `pack.toml` as `rules/README.md` shows it"));
            return None;
        }
    };
    let before = faults.len();
    let Some(period) = Period::from_word(&written.period) else {
        faults.push(Diagnostic::fault(whole, format!("the period is `{}`", written.period)).expected("one of day, week, month, year"));
        return None;
    };
    if written.currency.len() != 3 || !written.currency.bytes().all(|b| b.is_ascii_uppercase()) {
        faults.push(Diagnostic::fault(whole, format!("the currency is `{}`", written.currency)).expected("an ISO 4217 code such as GBP"));
    }
    let day = |d: &toml::value::Datetime| super::amounts::day(&d.to_string());
    let (from, to) = (day(&written.covers.from), day(&written.covers.to));
    let (Some(from), Some(to)) = (from, to) else {
        faults.push(Diagnostic::fault(whole, "`covers` does not hold two days").expected("from and to as days, such as 2024-04-08"));
        return None;
    };
    if from > to {
        faults.push(Diagnostic::fault(whole, "`covers` ends before it starts").expected("`from` before `to`"));
    }
    // TOML tables come sorted by name; the order of the text decides which date is the first.
    let mut dates: Vec<(String, String)> = written.dates.into_iter().collect();
    dates.sort_by_key(|(name, _)| text.find(&format!("\n{name} ")).or_else(|| text.find(&format!("\n{name}="))));
    if dates.is_empty() {
        faults.push(Diagnostic::fault(whole, "`dates` is empty").expected("at least one date, such as `assessment = \"first day of the period\"`"));
    }
    (faults.len() == before).then_some(Manifest {
        title: written.title,
        area: written.area,
        currency: written.currency,
        period,
        from,
        to,
        dates,
    })
}
