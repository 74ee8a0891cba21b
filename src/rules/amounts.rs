//! `amounts.csv` and `tables/*.csv`: dated figures of the law with their sources.
//! In: their texts. Out: checked rows; faults with the line.

use super::types::{Period, Ty};
use crate::diag::Diagnostic;
use crate::num::Fraction;
use crate::source::{FileId, Span};
use chrono::NaiveDate;
use std::collections::{BTreeMap, BTreeSet};

/// A day as year-month-day, in days since 1970-01-01.
pub fn day(text: &str) -> Option<i64> {
    let shaped = text.len() == 10
        && text.bytes().enumerate().all(|(at, b)| {
            if at == 4 || at == 7 {
                b == b'-'
            } else {
                b.is_ascii_digit()
            }
        });
    let parsed = NaiveDate::parse_from_str(text, "%Y-%m-%d").ok()?;
    shaped.then(|| i64::from(parsed.to_epoch_days()))
}

/// A day of 1970-01-01 and after as year-month-day.
pub fn day_text(day: i64) -> String {
    i32::try_from(day)
        .ok()
        .and_then(NaiveDate::from_epoch_days)
        .map_or_else(String::new, |d| d.format("%Y-%m-%d").to_string())
}

/// A decimal number such as `12570`, `-0.55`, of at most 18 digits.
pub fn decimal(text: &str) -> Option<Fraction> {
    let (negative, digits) = text
        .strip_prefix('-')
        .map_or((false, text), |rest| (true, rest));
    let (whole, part) = digits.split_once('.').unwrap_or((digits, ""));
    let all = |s: &str| s.bytes().all(|b| b.is_ascii_digit());
    if whole.is_empty()
        || !all(whole)
        || !all(part)
        || whole.len() + part.len() > 18
        || (digits.contains('.') && part.is_empty())
    {
        return None;
    }
    let scaled: i128 = format!("{whole}{part}").parse().ok()?;
    let value = Fraction::new(scaled, 10i128.pow(u32::try_from(part.len()).ok()?));
    Some(if negative { -value } else { value })
}

/// One dated row.
#[derive(Clone, Debug)]
pub(super) struct Row {
    pub from: i64,
    /// `i64::MAX` until further notice.
    pub to: i64,
    /// None where the status is `absent`.
    pub value: Option<Fraction>,
    /// As printed in the file.
    pub shown: String,
    pub source: String,
    pub locator: String,
    pub confirmed: bool,
    pub span: Span,
}

#[derive(Clone, Debug)]
pub(super) struct AmountDecl {
    pub name: String,
    pub ty: Ty,
    pub unit: String,
    pub rows: Vec<Row>,
}

impl AmountDecl {
    pub(super) fn on(&self, day: i64) -> Option<&Row> {
        self.rows
            .iter()
            .find(|row| row.from <= day && day <= row.to)
    }
}

/// A row of a keyed table: keys as written, then a dated value.
#[derive(Clone, Debug)]
pub(super) struct TableRow {
    pub keys: Vec<String>,
    pub row: Row,
}

const COLUMNS: [&str; 9] = [
    "name", "from", "to", "value", "unit", "period", "source", "locator", "status",
];

/// The records of a CSV text with the span of each line; the header first.
fn records(file: FileId, text: &str, faults: &mut Vec<Diagnostic>) -> Vec<(Span, Vec<String>)> {
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .from_reader(text.trim_start_matches('\u{feff}').as_bytes());
    let skipped = text.len() - text.trim_start_matches('\u{feff}').len();
    let mut out = Vec::new();
    for record in reader.records() {
        match record {
            Ok(record) => {
                let start = record.position().map_or(0, |p| p.byte() as usize) + skipped;
                // The place of a record is before the blank lines that lead to it.
                let start = text.len() - text[start..].trim_start_matches(['\r', '\n']).len();
                let end = text[start..].find('\n').map_or(text.len(), |at| start + at);
                let fields: Vec<String> = record.iter().map(|f| f.trim().to_owned()).collect();
                if fields.iter().any(|f| !f.is_empty()) {
                    out.push((
                        Span {
                            file,
                            start: start as u32,
                            end: end as u32,
                        },
                        fields,
                    ));
                }
            }
            Err(error) => faults.push(Diagnostic::fault(
                Span {
                    file,
                    start: 0,
                    end: 0,
                },
                format!("not a readable table: {error}"),
            )),
        }
    }
    out
}

/// A value of a type as a table writes it, or what was expected. A rate stands in percent.
pub(super) fn typed(text: &str, ty: Ty, words: &[String]) -> Result<Fraction, String> {
    let found = match ty {
        Ty::Money(_) | Ty::Hours | Ty::Number => decimal(text),
        Ty::Rate => decimal(text).map(|value| value / Fraction::whole(100)),
        Ty::Count => decimal(text).filter(|value| value.denominator() == 1),
        Ty::YesNo => ["no", "yes"]
            .iter()
            .position(|w| *w == text)
            .map(|at| Fraction::whole(at as i128)),
        Ty::Date => day(text).map(|d| Fraction::whole(i128::from(d))),
        Ty::Choice(_) => words
            .iter()
            .position(|w| w == text)
            .map(|at| Fraction::whole(at as i128)),
    };
    found.ok_or_else(|| match ty {
        Ty::Money(_) | Ty::Hours | Ty::Number => {
            "a number with a point, of at most 18 digits".to_owned()
        }
        Ty::Rate => "a percentage as a number with a point, without its sign".to_owned(),
        Ty::Count => "a whole number".to_owned(),
        Ty::YesNo => "yes or no".to_owned(),
        Ty::Date => "a day as year-month-day".to_owned(),
        Ty::Choice(_) => format!("one of {}", words.join(", ")),
    })
}

fn dated(
    span: Span,
    fields: &BTreeMap<&str, &str>,
    ty: Ty,
    words: &[String],
    faults: &mut Vec<Diagnostic>,
) -> Option<Row> {
    let get = |column: &str| fields.get(column).copied().unwrap_or("");
    let mut bad = |column: &str, expected: &str| {
        let found = if get(column).is_empty() {
            "nothing".to_owned()
        } else {
            format!("`{}`", get(column))
        };
        faults.push(
            Diagnostic::fault(span, format!("{found} in column `{column}`")).expected(expected),
        );
    };
    let from = day(get("from"));
    if from.is_none() {
        bad("from", "a day as year-month-day");
    }
    let to = if get("to").is_empty() {
        Some(i64::MAX)
    } else {
        day(get("to"))
    };
    if to.is_none() {
        bad("to", "a day as year-month-day, or nothing");
    }
    let confirmed = match get("status") {
        "read" => Some(true),
        "memory" | "absent" => Some(false),
        _ => {
            bad("status", "read, memory or absent");
            None
        }
    };
    let absent = get("status") == "absent";
    let value = if absent {
        if !get("value").is_empty() {
            bad("value", "nothing, as the status is absent");
        }
        Some(None)
    } else {
        typed(get("value"), ty, words)
            .map_err(|expected| bad("value", &expected))
            .ok()
            .map(Some)
    };
    if get("source").is_empty() {
        bad("source", "where the figure was published");
    }
    if let (Some(from), Some(to)) = (from, to)
        && from > to
    {
        bad("to", &format!("a day from {} on", day_text(from)));
    }
    let (from, to, confirmed, value) = (from?, to?, confirmed?, value?);
    Some(Row {
        from,
        to,
        value,
        shown: get("value").to_owned(),
        source: get("source").to_owned(),
        locator: get("locator").to_owned(),
        confirmed,
        span,
    })
}

/// Reports rows of one name whose days overlap.
pub(super) fn overlaps(what: &str, rows: &mut [Row], faults: &mut Vec<Diagnostic>) {
    rows.sort_by_key(|row| row.from);
    let mut last: Option<i64> = None;
    for row in rows {
        if last.is_some_and(|last| row.from <= last) {
            faults.push(
                Diagnostic::fault(
                    row.span,
                    format!("two rows of {what} hold on {}", day_text(row.from)),
                )
                .expected("days that do not overlap"),
            );
        }
        last = last.max(Some(row.to));
    }
}

fn unit_type(currency: &str, unit: &str, period: &str) -> Option<Ty> {
    let money = unit == currency;
    if !money && !period.is_empty() {
        return None;
    }
    Some(match unit {
        "percent" => Ty::Rate,
        "hours" => Ty::Hours,
        "years" | "count" => Ty::Count,
        "number" => Ty::Number,
        "yesno" => Ty::YesNo,
        "date" => Ty::Date,
        _ if money => match period {
            "" => Ty::Money(None),
            word => Ty::Money(Some(Period::from_word(word)?)),
        },
        _ => return None,
    })
}

/// Reads `amounts.csv`. Names whose rows all have faults go into `broken`.
pub(super) fn read(
    file: FileId,
    text: &str,
    currency: &str,
    broken: &mut BTreeSet<String>,
    faults: &mut Vec<Diagnostic>,
) -> Vec<AmountDecl> {
    let mut records = records(file, text, faults).into_iter();
    let Some((span, header)) = records.next() else {
        return Vec::new();
    };
    if header != COLUMNS {
        faults.push(
            Diagnostic::fault(span, "these are not the columns of `amounts.csv`")
                .expected(COLUMNS.join(",")),
        );
        return Vec::new();
    }
    let mut found: Vec<AmountDecl> = Vec::new();
    let mut places: BTreeMap<String, usize> = BTreeMap::new();
    for (span, fields) in records {
        if fields.len() != COLUMNS.len() {
            faults.push(
                Diagnostic::fault(span, format!("this row has {} fields", fields.len()))
                    .expected(format!("{}, as the first line has", COLUMNS.len())),
            );
            continue;
        }
        let named: BTreeMap<&str, &str> = COLUMNS
            .iter()
            .copied()
            .zip(fields.iter().map(String::as_str))
            .collect();
        let (name, unit, period) = (named["name"], named["unit"], named["period"]);
        let lower = name
            .bytes()
            .all(|b| b.is_ascii_lowercase() || b.is_ascii_digit() || b == b'_');
        if !lower || !name.starts_with(|c: char| c.is_ascii_lowercase()) {
            faults.push(
                Diagnostic::fault(span, format!("`{name}` in column `name`"))
                    .expected("lower case letters, digits and `_`, a letter first"),
            );
            continue;
        }
        if !super::token::can_name(name) {
            faults.push(
                Diagnostic::fault(span, format!("`{name}` is a word of the language"))
                    .expected("another name for the amount"),
            );
            continue;
        }
        let Some(ty) = unit_type(currency, unit, period) else {
            faults.push(
                Diagnostic::fault(span, format!("`{unit}` in column `unit` with `{period}` in column `period`"))
                    .expected(format!("{currency} with hour, day, week, month, year or nothing, or without a period percent, hours, years, count, number, yesno or date")),
            );
            broken.insert(name.to_owned());
            continue;
        };
        let Some(row) = dated(span, &named, ty, &[], faults) else {
            broken.insert(name.to_owned());
            continue;
        };
        match places.get(name) {
            Some(at) => {
                let decl = &mut found[*at];
                if decl.ty != ty {
                    faults.push(
                        Diagnostic::fault(span, format!("`{name}` is {} here", ty.words()))
                            .expected(format!("{}, as in its first row", decl.ty.words())),
                    );
                }
                decl.rows.push(row);
            }
            None => {
                places.insert(name.to_owned(), found.len());
                let unit = if period.is_empty() {
                    unit.to_owned()
                } else {
                    format!("{unit} a {period}").replace(" a hour", " an hour")
                };
                found.push(AmountDecl {
                    name: name.to_owned(),
                    ty,
                    unit,
                    rows: vec![row],
                });
            }
        }
    }
    for decl in &mut found {
        let name = format!("`{}`", decl.name);
        overlaps(&name, &mut decl.rows, faults);
    }
    found
}

/// Reads `tables/NAME.csv`, which has so many key columns first.
pub(super) fn read_table(
    file: FileId,
    text: &str,
    keys: usize,
    ty: Ty,
    words: &[String],
    faults: &mut Vec<Diagnostic>,
) -> Vec<TableRow> {
    let mut records = records(file, text, faults).into_iter();
    let Some((span, header)) = records.next() else {
        return Vec::new();
    };
    let rest = ["from", "to", "value", "source", "locator", "status"];
    if header.len() != keys + rest.len() || header[keys..] != rest {
        faults.push(
            Diagnostic::fault(span, "these are not the columns of this table").expected(format!(
                "{keys} key {}, then {}",
                if keys == 1 { "column" } else { "columns" },
                rest.join(",")
            )),
        );
        return Vec::new();
    }
    let mut out = Vec::new();
    for (span, fields) in records {
        if fields.len() != header.len() {
            faults.push(
                Diagnostic::fault(span, format!("this row has {} fields", fields.len()))
                    .expected(format!("{}, as the first line has", header.len())),
            );
            continue;
        }
        let named: BTreeMap<&str, &str> = rest
            .iter()
            .copied()
            .zip(fields[keys..].iter().map(String::as_str))
            .collect();
        if let Some(row) = dated(span, &named, ty, words, faults) {
            out.push(TableRow {
                keys: fields[..keys].to_vec(),
                row,
            });
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn days_and_numbers_are_read_strictly() {
        assert_eq!(day("1970-01-02"), Some(1));
        assert_eq!(day("2024-02-29"), Some(19_782));
        for wrong in [
            "2026-02-29",
            "2026-2-28",
            "2026- 2-28",
            "+2026-2-28",
            "02026-2-28",
            "2026/02/28",
            "2026-02-28 ",
            "",
        ] {
            assert_eq!(day(wrong), None, "`{wrong}`");
        }
        assert_eq!(decimal("-0.55"), Some(Fraction::new(-55, 100)));
        for wrong in [
            "",
            "-",
            ".5",
            "5.",
            "1,000",
            "1e3",
            "+1",
            "--1",
            "1.2.3",
            "1234567890123456789",
        ] {
            assert_eq!(decimal(wrong), None, "`{wrong}`");
        }
    }
}
