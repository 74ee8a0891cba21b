//! Every amount of the law that went in, by instrument, with its days, its source and whether it was seen there.

use super::{Copy, Side};
use crate::measures::AmountUse;
use crate::statement::build::amount_value;
use crate::statement::copy_view::{CopyPart, CopySection, LongRow};
use crate::statement::error::StatementError;
use crate::statement::money::NONE;
use crate::statement::view::Line;
use chrono::NaiveDate;

/// Width that the names of amounts get at least, in sizes of print.
const NAMES: f64 = 13.0;

pub(super) fn section(copy: &Copy<'_>) -> Result<CopySection, StatementError> {
    let words = &copy.words;
    let amounts = all(copy);
    let mut parts: Vec<&str> = vec![];
    for amount in &amounts {
        if !parts.contains(&amount.part.as_str()) {
            parts.push(&amount.part);
        }
    }
    // In the order of the law, as the working has it.
    let order = |part: &str| {
        let mut points = copy.evidence.points.iter().flat_map(|point| &point.lines);
        points.position(|line| line.part == part)
    };
    parts.sort_by_key(|part| order(part).unwrap_or(usize::MAX));
    let mut rows = vec![];
    for part in parts {
        rows.push(LongRow::group(part.to_owned()));
        for amount in amounts.iter().copied().filter(|amount| amount.part == part) {
            rows.push(row(copy, amount)?);
        }
    }
    let heads = [
        words.plain("copy.amounts.name")?,
        words.plain("copy.amounts.value")?,
    ];
    let summary = words.plain("copy.amounts.summary")?;
    Ok(CopySection {
        heading: words.plain("copy.amounts.heading")?,
        parts: vec![CopyPart {
            heading: String::new(),
            lines: vec![words.plain("copy.amounts.lead")?.into()],
            tables: vec![
                copy.room
                    .whole(&summary, &heads, rows, (1, NAMES), Side::Figures),
            ],
        }],
    })
}

/// The amounts that the budget lines rest on, and those that the working names beside them; each once.
fn all<'c>(copy: &'c Copy<'_>) -> Vec<&'c AmountUse> {
    let mut amounts: Vec<&AmountUse> = copy.words.assessment.amounts.iter().collect();
    let lines = copy.evidence.points.iter().flat_map(|point| &point.lines);
    let lines = lines.filter(|line| line.counts);
    for amount in lines.flat_map(|line| &line.amounts) {
        if !amounts.iter().any(|known| known.name == amount.name) {
            amounts.push(amount);
        }
    }
    amounts
}

fn row(copy: &Copy<'_>, amount: &AmountUse) -> Result<LongRow, StatementError> {
    let words = &copy.words;
    let day = |text: &str| match NaiveDate::parse_from_str(text, "%Y-%m-%d") {
        Ok(day) => words.day(day),
        Err(_) => Ok(text.to_owned()),
    };
    let from = day(&amount.from)?;
    let holds = match amount.to.as_str() {
        "" => words.say("copy.amounts.open", &[("from", &from)])?,
        to => words.say("copy.amounts.days", &[("from", &from), ("to", &day(to)?)])?,
    };
    let status = match (amount.changed_because.as_str(), amount.confirmed) {
        ("", true) => words.plain("copy.amounts.read")?,
        ("", false) => words.plain("copy.amounts.memory")?,
        (why, _) => {
            let why = why.trim_end_matches('.');
            words.say("copy.amounts.changed", &[("reason", why)])?
        }
    };
    let star = if amount.confirmed { "" } else { "*" };
    let source = match amount.locator.as_str() {
        "" => amount.source.clone(),
        place => words.say(
            "copy.amounts.source",
            &[("source", &amount.source), ("place", place)],
        )?,
    };
    Ok(LongRow {
        under: vec![Line {
            lead: status,
            text: words.say(
                "copy.amounts.under",
                &[("days", &holds), ("source", &source)],
            )?,
        }],
        ..LongRow::plain(vec![
            format!("{}{star}", amount.name),
            written(copy, &amount.value)?,
        ])
    })
}

/// The value of an amount; a dash where it is not known for these dates.
fn written(copy: &Copy<'_>, value: &str) -> Result<String, StatementError> {
    let figure = value.split(' ').next().unwrap_or_default();
    match value.trim_end().rsplit(' ').next() {
        Some("yesno" | "date" | "number" | "years") => Ok(figure.to_owned()),
        Some(_) | None if figure.is_empty() || figure == copy.words.context.currency => {
            Ok(NONE.to_owned())
        }
        Some(_) | None => amount_value(&copy.words, value),
    }
}
