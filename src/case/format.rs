//! How a list writes days and numbers, and the reading of one value. In: text and a type. Out: a whole number of the type's unit.
//! Refuses whatever is not written as declared: no guess. Imports `diag`.

use super::problem::Problem;
use super::schema::{FactSpec, FactType};
use crate::diag::nearest;
use chrono::{Datelike, NaiveDate};

/// How days are written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum DateForm {
    /// `2026-05-04`.
    #[default]
    YearMonthDay,
    /// `04/05/2026` for the fourth of May.
    DayMonthYear,
    /// `05/04/2026` for the fourth of May.
    MonthDayYear,
}

impl DateForm {
    /// The word for it in `list.toml` and in messages.
    pub fn words(self) -> &'static str {
        match self {
            DateForm::YearMonthDay => "year-month-day",
            DateForm::DayMonthYear => "day/month/year",
            DateForm::MonthDayYear => "month/day/year",
        }
    }

    /// All of them.
    pub const ALL: [DateForm; 3] = [
        DateForm::YearMonthDay,
        DateForm::DayMonthYear,
        DateForm::MonthDayYear,
    ];

    /// A day written in this form.
    pub fn write(self, day: NaiveDate) -> String {
        match self {
            DateForm::YearMonthDay => day.format("%Y-%m-%d").to_string(),
            DateForm::DayMonthYear => day.format("%d/%m/%Y").to_string(),
            DateForm::MonthDayYear => day.format("%m/%d/%Y").to_string(),
        }
    }
}

/// Which sign stands before the decimals.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Decimals {
    /// `1234.50`.
    #[default]
    Point,
    /// `1234,50`.
    Comma,
}

impl Decimals {
    /// The word for it in `list.toml` and in messages.
    pub fn word(self) -> &'static str {
        match self {
            Decimals::Point => "point",
            Decimals::Comma => "comma",
        }
    }

    fn sign(self) -> char {
        match self {
            Decimals::Point => '.',
            Decimals::Comma => ',',
        }
    }
}

/// How days and numbers are written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Format {
    /// Days.
    pub dates: DateForm,
    /// Numbers.
    pub decimals: Decimals,
}

/// Days since 1970-01-01, as facts of the type `date` are kept.
pub fn days_since_1970(day: NaiveDate) -> i64 {
    i64::from(day.num_days_from_ce()) - 719_163
}

/// The day that is so many days after 1970-01-01; none where no calendar reaches it.
pub fn day_of(days: i64) -> Option<NaiveDate> {
    NaiveDate::from_num_days_from_ce_opt(i32::try_from(days.checked_add(719_163)?).ok()?)
}

/// A day written in the declared form: digits and the form's own sign, the year with four digits.
pub(super) fn read_day(text: &str, form: DateForm) -> Result<NaiveDate, Problem> {
    let Some(sign) = text.chars().find(|sign| !sign.is_ascii_digit()) else {
        return Err(Problem::NotADay(form));
    };
    let parts: Vec<&str> = text.split(sign).collect();
    let digits =
        |part: &&str| (1..=4).contains(&part.len()) && part.bytes().all(|b| b.is_ascii_digit());
    if parts.len() != 3 || !parts.iter().all(digits) {
        return Err(Problem::NotADay(form));
    }
    let (own_sign, [year, month, day]) = match form {
        DateForm::YearMonthDay => ('-', [0, 1, 2]),
        DateForm::DayMonthYear => ('/', [2, 1, 0]),
        DateForm::MonthDayYear => ('/', [2, 0, 1]),
    };
    let year_elsewhere = (0..3).any(|place| place != year && parts[place].len() == 4);
    if sign != own_sign || year_elsewhere {
        return Err(Problem::OtherDayForm(form));
    }
    match parts[year].len() {
        4 => {}
        2 => return Err(Problem::ShortYear(form)),
        _ => return Err(Problem::NotADay(form)),
    }
    let number = |place: usize| {
        parts[place]
            .parse::<u32>()
            .map_err(|_| Problem::NotADay(form))
    };
    let year = i32::try_from(number(year)?).map_err(|_| Problem::NotADay(form))?;
    NaiveDate::from_ymd_opt(year, number(month)?, number(day)?).ok_or(Problem::NoSuchDay(form))
}

/// A number with up to so many decimals, as a whole number of its smallest unit. `expected` says what it should have been.
pub(super) fn read_decimal(
    text: &str,
    places: u32,
    decimals: Decimals,
    expected: &dyn Fn() -> String,
) -> Result<i64, Problem> {
    let not = || Problem::NotANumber(expected());
    let (negative, body) = match text.strip_prefix('-') {
        Some(rest) => (true, rest),
        None => (false, text),
    };
    if body.chars().any(is_currency_sign) {
        return Err(Problem::CurrencySign(expected()));
    }
    let sign = decimals.sign();
    let other = if sign == '.' { ',' } else { '.' };
    let all_digits = |part: &str| !part.is_empty() && part.bytes().all(|b| b.is_ascii_digit());
    let groups = |c: char| matches!(c, ' ' | '\u{a0}' | '\u{202f}' | '\u{2009}' | '\'' | '’');
    if body.contains(groups) {
        let digits = |c: char| c.is_ascii_digit() || groups(c) || c == '.' || c == ',';
        return Err(if body.chars().all(digits) {
            Problem::Grouped(expected())
        } else {
            not()
        });
    }
    if body.contains(other) {
        let pieces: Vec<&str> = body.split([sign, other]).collect();
        if !pieces.iter().all(|piece| all_digits(piece)) {
            return Err(not());
        }
        return Err(if pieces.len() == 2 && pieces[1].len() != 3 {
            Problem::OtherDecimals(decimals, expected())
        } else {
            Problem::Grouped(expected())
        });
    }
    let (whole, part) = match body.split_once(sign) {
        Some((whole, part)) if all_digits(part) => (whole, part),
        Some((whole, part)) if part.contains(sign) && all_digits(whole) => {
            return Err(Problem::Grouped(expected()));
        }
        Some(_) => return Err(not()),
        None => (body, ""),
    };
    if !all_digits(whole) {
        return Err(not());
    }
    if part.len() > places as usize {
        return Err(Problem::TooManyDecimals(places, expected()));
    }
    if whole.trim_start_matches('0').len() > 12 {
        return Err(Problem::TooLarge("999999999999".into()));
    }
    let scaled = format!("{whole}{part:0<width$}", width = places as usize);
    let size: i64 = scaled.parse().map_err(|_| not())?;
    Ok(if negative { -size } else { size })
}

fn is_currency_sign(sign: char) -> bool {
    matches!(sign, '$' | '¢' | '£' | '¤' | '¥' | '\u{20a0}'..='\u{20cf}')
}

/// How many decimals a value of this type may have.
pub(super) fn places(ty: &FactType) -> u32 {
    match ty {
        FactType::Money(period) if period == "hour" => 4,
        FactType::Money(_) | FactType::Rate | FactType::Hours | FactType::Number => 2,
        FactType::Count | FactType::Date | FactType::YesNo | FactType::Choice(_) => 0,
    }
}

/// What a type looks like in a list: `money a month, such as 1234.50`.
pub(super) fn describe(ty: &FactType, format: Format) -> String {
    let point = format.decimals.sign();
    match ty {
        FactType::Money(period) if period.is_empty() => format!("money, such as 1234{point}50"),
        FactType::Money(period) if period == "hour" => {
            format!("money an hour, such as 12{point}71")
        }
        FactType::Money(period) => format!("money a {period}, such as 1234{point}50"),
        FactType::Rate => format!("a percentage, such as 5 or 5{point}5%"),
        FactType::Hours => format!("hours a week, such as 37{point}5"),
        FactType::Number => format!("a number, such as 2{point}5"),
        FactType::Count => "a whole number".into(),
        FactType::Date => format!("a day as {}", format.dates.words()),
        FactType::YesNo => "`yes` or `no`".into(),
        FactType::Choice(words) => super::problem::one_of(words),
    }
}

/// A value of a fact as a list would write it.
pub fn write_value(ty: &FactType, value: i64, format: Format) -> String {
    match ty {
        FactType::Money(_)
        | FactType::Rate
        | FactType::Hours
        | FactType::Number
        | FactType::Count => {
            let places = places(ty) as usize;
            let digits = format!("{:0>width$}", value.unsigned_abs(), width = places + 1);
            let (whole, part) = digits.split_at(digits.len() - places);
            let kept = if matches!(ty, FactType::Money(_)) {
                2
            } else {
                0
            };
            let mut part = part.to_string();
            while part.len() > kept && part.ends_with('0') {
                part.pop();
            }
            let sign = if value < 0 { "-" } else { "" };
            if part.is_empty() {
                format!("{sign}{whole}")
            } else {
                format!("{sign}{whole}{}{part}", format.decimals.sign())
            }
        }
        FactType::Date => {
            day_of(value).map_or_else(|| value.to_string(), |day| format.dates.write(day))
        }
        FactType::YesNo => if value == 0 { "no" } else { "yes" }.into(),
        FactType::Choice(words) => usize::try_from(value)
            .ok()
            .and_then(|place| words.get(place).cloned())
            .unwrap_or_else(|| value.to_string()),
    }
}

/// The value of a fact, from text that is not empty, checked against the fact's range.
pub(super) fn read_fact(text: &str, fact: &FactSpec, format: Format) -> Result<i64, Problem> {
    let expected = || describe(&fact.ty, format);
    let value = match &fact.ty {
        FactType::Money(_) | FactType::Hours | FactType::Number | FactType::Count => {
            read_decimal(text, places(&fact.ty), format.decimals, &expected)?
        }
        FactType::Rate => {
            let number = text.strip_suffix('%').map_or(text, str::trim_end);
            read_decimal(number, 2, format.decimals, &expected)?
        }
        FactType::Date => days_since_1970(read_day(text, format.dates)?),
        FactType::YesNo => read_yes_no(text)?,
        FactType::Choice(words) => read_word(&fact.name.replace('_', " "), text, words)? as i64,
    };
    match &fact.ty {
        FactType::Money(_) if value < 0 && fact.min >= 0 => return Err(Problem::NegativeMoney),
        FactType::Hours if value > 16_800 => return Err(Problem::HoursOfWeek),
        FactType::YesNo | FactType::Choice(_) => return Ok(value),
        FactType::Money(_)
        | FactType::Rate
        | FactType::Hours
        | FactType::Number
        | FactType::Count
        | FactType::Date => {}
    }
    let limit = |value| write_value(&fact.ty, value, format);
    if value < fact.min {
        Err(Problem::TooSmall(limit(fact.min)))
    } else if value > fact.max {
        Err(Problem::TooLarge(limit(fact.max)))
    } else {
        Ok(value)
    }
}

fn read_yes_no(text: &str) -> Result<i64, Problem> {
    match text.to_ascii_lowercase().as_str() {
        "yes" | "y" | "true" => Ok(1),
        "no" | "n" | "false" => Ok(0),
        _ => Err(Problem::NotYesNo),
    }
}

/// The position of a word among those allowed, whatever the case.
pub(super) fn read_word(what: &str, text: &str, words: &[String]) -> Result<usize, Problem> {
    words
        .iter()
        .position(|word| word.eq_ignore_ascii_case(text))
        .ok_or_else(|| Problem::UnknownWord {
            what: what.into(),
            words: words.to_vec(),
            nearest: near(text, words.iter().map(String::as_str)),
        })
}

/// The nearest of some names to a word that somebody wrote; none for a text too long to be one.
pub(super) fn near<'a>(text: &str, names: impl IntoIterator<Item = &'a str>) -> Option<String> {
    (text.len() <= 60)
        .then(|| nearest(&text.to_ascii_lowercase(), names))
        .flatten()
        .map(Into::into)
}
