//! What can be wrong with a list: one variant a family of messages, and all their wording. In: what was met. Out: what was
//! found, what was expected, what to do. Refuses to know where it happened. Imports nothing outside `case`.

use super::format::{DateForm, Decimals};

/// What is wrong with one place of a list.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Problem {
    // ---- values ----
    /// Nothing where something is needed.
    Missing {
        /// What is needed.
        expected: String,
        /// The question that asks for it; may be empty.
        ask: String,
    },
    /// Not a day at all.
    NotADay(DateForm),
    /// A day, but written in another order or with another sign between than declared.
    OtherDayForm(DateForm),
    /// A day that no calendar has.
    NoSuchDay(DateForm),
    /// A year of two digits.
    ShortYear(DateForm),
    /// Not a number of the type.
    NotANumber(String),
    /// A currency sign beside the number.
    CurrencySign(String),
    /// Marks or spaces that group thousands.
    Grouped(String),
    /// The other decimal sign than declared.
    OtherDecimals(Decimals, String),
    /// More decimals than the type has.
    TooManyDecimals(u32, String),
    /// Money below nothing.
    NegativeMoney,
    /// Below the least value that the pack allows.
    TooSmall(String),
    /// Above the largest value that the pack allows.
    TooLarge(String),
    /// More hours than a week has.
    HoursOfWeek,
    /// Neither yes nor no.
    NotYesNo,
    /// None of the words that are allowed here.
    UnknownWord {
        /// What the words are: `role`, `print size` …
        what: String,
        /// The words that are allowed.
        words: Vec<String>,
        /// The nearest of them.
        nearest: Option<String>,
    },
    /// `<fact>_known` says how something is known that is not there.
    KnownWithoutValue(String),
    /// A target that is not above nothing.
    TargetNotAbove,
    /// The address in one cell and in several.
    AddressTwice,
    /// More lines of an address than fit any window.
    LongAddress(usize),
    /// A fact of another role.
    OtherRole {
        /// The role of this member.
        role: String,
        /// The roles that have the fact.
        roles: Vec<String>,
    },

    // ---- households ----
    /// A reference with signs that it must not have.
    BadReference,
    /// A reference of more than forty characters.
    LongReference(usize),
    /// Two households with one reference.
    SecondHousehold(Vec<u64>),
    /// A row that names no household.
    NoHousehold,
    /// A row whose household is not in the list.
    UnknownHousehold,
    /// Two members with one reference.
    SecondMember(String),
    /// Two records of one kind with one reference.
    SecondRecord {
        /// The kind: `job` …
        kind: String,
        /// Where the first one is.
        first: String,
    },
    /// A row whose member is not in the household.
    UnknownMember(Vec<String>),
    /// A row whose job or other record is not in the household, or only on offer.
    UnknownRecord {
        /// The kind: `job` …
        kind: String,
        /// The references that the household has.
        known: Vec<String>,
    },
    /// A household without an adult.
    NoAdult,
    /// A third adult of the unit.
    ThirdAdult,
    /// A child born before an adult of the unit, or on the same day.
    OlderThanParent(String),
    /// Born after the date of the list.
    BornLater(String),
    /// A job of a member who is not an adult of the unit.
    JobOf(String),
    /// A record of a member whose role does not have such records.
    RecordOf {
        /// The role of the member named.
        role: String,
        /// The role that such records belong to.
        owner: String,
    },
    /// The hours of an adult's jobs together are more than a week has.
    SumOfHours {
        /// The adult.
        member: String,
        /// The sum.
        hours: String,
    },
    /// The wage beyond so many hours is lower than the wage before.
    PremiumBelowWage(String),
    /// A second job of today for one adult.
    SecondToday(String),
    /// A further job of an adult who has no job of today.
    FurtherAlone,
    /// An offer that does not say what it pays.
    OfferWithoutWage,
    /// The statement of one member who is not an adult of the household.
    OnlyUnknown(Vec<String>),

    // ---- tables and files ----
    /// A table that must be there.
    MissingTable,
    /// A table that the pack does not have.
    UnknownTable(Option<String>),
    /// One table twice.
    SecondTable,
    /// A table without a header row.
    EmptyTable,
    /// A column that the table does not have.
    UnknownColumn(Option<String>),
    /// One column twice.
    SecondColumn,
    /// A column that must be there.
    MissingColumn(String),
    /// A cell beyond the last column of the header.
    ExtraCell,
    /// Bytes that are not UTF-8.
    NotUtf8,
    /// A file in UTF-16.
    Utf16,
    /// A quotation mark that is never closed.
    OpenQuote,
    /// A row of more than a million bytes.
    LongRow,
    /// A row number of a sorted table that is not a number.
    BadRowNumber,

    // ---- list.toml and single households ----
    /// Not TOML.
    Syntax(String),
    /// A key that does not exist here.
    UnknownKey(Option<String>),
    /// A value of the wrong shape.
    WrongShape(String),
    /// One entry twice.
    SecondEntry,
    /// A grid that cannot be walked.
    BadGrid(String),
}

impl Problem {
    /// What was found, with the value as it was written (empty where nothing was written).
    pub fn found(&self, value: &str) -> String {
        let shown = shown(value);
        let what = match self {
            Problem::Missing { .. } => return "found nothing".into(),
            Problem::NotADay(_) | Problem::NotANumber(_) | Problem::NotYesNo => {
                return format!("found {shown}");
            }
            Problem::OtherDayForm(_) => "a day in another form",
            Problem::NoSuchDay(_) => "a day that does not exist",
            Problem::ShortYear(_) => "a year of two digits",
            Problem::CurrencySign(_) => "a number with a currency sign",
            Problem::Grouped(_) => "a number with signs that group its digits",
            Problem::OtherDecimals(_, _) => "a number with another decimal sign",
            Problem::TooManyDecimals(_, _) => "a number with too many decimals",
            Problem::NegativeMoney => "negative money",
            Problem::TooSmall(_) => "too small a value",
            Problem::TooLarge(_) => "too large a value",
            Problem::HoursOfWeek => "more hours than a week has",
            Problem::UnknownWord { what, .. } => {
                return format!("found {shown}, an unknown {what}");
            }
            Problem::KnownWithoutValue(fact) => {
                return format!("found {shown}, but `{fact}` itself is empty");
            }
            Problem::TargetNotAbove => "a target that is not above nothing",
            Problem::AddressTwice => return "found an address in one cell and in several".into(),
            Problem::LongAddress(lines) => return format!("found an address of {lines} lines"),
            Problem::OtherRole { role, .. } => {
                return format!("found {shown}, a fact that the role `{role}` does not have");
            }
            Problem::BadReference => "a malformed reference",
            Problem::LongReference(length) => {
                return format!("found {shown}, a reference of {length} characters");
            }
            Problem::SecondHousehold(rows) => {
                let rows: Vec<String> = rows.iter().map(u64::to_string).collect();
                return format!(
                    "found {shown}, a reference that the households in rows {} share",
                    rows.join(" and ")
                );
            }
            Problem::NoHousehold => return "found no reference of a household".into(),
            Problem::UnknownHousehold => "a household that is not in the list",
            Problem::SecondMember(first) => {
                return format!(
                    "found {shown}, a reference that the member in {first} has already"
                );
            }
            Problem::SecondRecord { kind, first } => {
                return format!(
                    "found {shown}, a reference that the {kind} in {first} has already"
                );
            }
            Problem::UnknownMember(_) => "a member who is not in this household",
            Problem::UnknownRecord { kind, .. } => {
                return format!("found {shown}, a {kind} that is not in this household");
            }
            Problem::NoAdult => return "found no adult in this household".into(),
            Problem::ThirdAdult => return "found a third adult of the unit".into(),
            Problem::OlderThanParent(parent) => {
                return format!(
                    "found {shown}, a child older than its parent: `{parent}` was not born before"
                );
            }
            Problem::BornLater(_) => "a birth after the date of the list",
            Problem::JobOf(role) => {
                return format!("found a job of {shown}, whose role is `{role}`");
            }
            Problem::RecordOf { role, .. } => {
                return format!("found a record of {shown}, whose role is `{role}`");
            }
            Problem::SumOfHours { member, hours } => {
                return format!(
                    "found {hours} hours in the jobs of `{member}` together, more than a week has"
                );
            }
            Problem::PremiumBelowWage(_) => "a premium below the basic wage",
            Problem::SecondToday(first) => {
                return format!(
                    "found a second job of today for one adult, beside the one in {first}"
                );
            }
            Problem::FurtherAlone => {
                return "found a further job of an adult without a job of today".into();
            }
            Problem::OfferWithoutWage => return "found an offer without a wage".into(),
            Problem::OnlyUnknown(_) => "a member who is not an adult of this household",
            Problem::MissingTable => return "found no such file".into(),
            Problem::UnknownTable(_) => {
                return "found a table that the rule pack does not have".into();
            }
            Problem::SecondTable => return "found this table a second time".into(),
            Problem::EmptyTable => return "found an empty file".into(),
            Problem::UnknownColumn(_) => "an unknown column",
            Problem::SecondColumn => "a column that is there already",
            Problem::MissingColumn(column) => return format!("found no column `{column}`"),
            Problem::ExtraCell => return "found a cell beyond the last column".into(),
            Problem::NotUtf8 => return "found bytes that are no UTF-8 text".into(),
            Problem::Utf16 => return "found a file in UTF-16".into(),
            Problem::OpenQuote => return "found a quotation mark that is never closed".into(),
            Problem::LongRow => return "found a row of more than a million bytes".into(),
            Problem::BadRowNumber => "a row number that is no number",
            Problem::Syntax(message) => return message.clone(),
            Problem::UnknownKey(_) => "an unknown key",
            Problem::WrongShape(_) => return format!("found {shown}"),
            Problem::SecondEntry => "an entry that is there already",
            Problem::BadGrid(what) => return format!("found a grid whose {what}"),
        };
        format!("found {shown}, {what}")
    }

    /// What was expected.
    pub fn expected(&self) -> String {
        match self {
            Problem::Missing { expected, .. } => expected.clone(),
            Problem::NotADay(form)
            | Problem::OtherDayForm(form)
            | Problem::NoSuchDay(form)
            | Problem::ShortYear(form) => format!("a day as {}", form.words()),
            Problem::NotANumber(expected)
            | Problem::CurrencySign(expected)
            | Problem::Grouped(expected)
            | Problem::OtherDecimals(_, expected) => expected.clone(),
            Problem::TooManyDecimals(0, expected) => expected.clone(),
            Problem::TooManyDecimals(most, expected) => {
                format!("{expected}, with at most {most} decimals")
            }
            Problem::NegativeMoney => "nothing or more".into(),
            Problem::TooSmall(least) => format!("at least {least}"),
            Problem::TooLarge(most) => format!("at most {most}"),
            Problem::HoursOfWeek | Problem::SumOfHours { .. } => "at most 168 hours a week".into(),
            Problem::NotYesNo => "`yes` or `no`".into(),
            Problem::UnknownWord { words, .. } => one_of(words),
            Problem::KnownWithoutValue(fact) => format!("a value in `{fact}`"),
            Problem::TargetNotAbove => "a sum above nothing, or an empty cell".into(),
            Problem::AddressTwice => "either `address` or `address_1` to `address_6`".into(),
            Problem::LongAddress(_) => format!("at most {} lines", super::layout::ADDRESS_LINES),
            Problem::OtherRole { roles, .. } => {
                format!("an empty cell: only {} has it", one_of(roles))
            }
            Problem::BadReference => "letters A to Z, digits, `_` and `-`".into(),
            Problem::LongReference(_) => "at most 40 characters".into(),
            Problem::SecondHousehold(_) => "each reference once, whatever the case".into(),
            Problem::NoHousehold => "the household that the row belongs to".into(),
            Problem::UnknownHousehold => "a household that `households.csv` names".into(),
            Problem::SecondMember(_) | Problem::SecondRecord { .. } => {
                "each reference once in a household, whatever the case".into()
            }
            Problem::UnknownMember(known) | Problem::UnknownRecord { known, .. } => {
                if known.is_empty() {
                    "one that the household has; it has none".into()
                } else {
                    one_of(known)
                }
            }
            Problem::OnlyUnknown(known) => {
                if known.is_empty() {
                    "the reference of an adult".into()
                } else {
                    one_of(known)
                }
            }
            Problem::NoAdult => "one or two members with the role `adult`".into(),
            Problem::ThirdAdult => "at most two members with the role `adult`".into(),
            Problem::OlderThanParent(_) => "a child born after every adult of its unit".into(),
            Problem::BornLater(date) => format!("a birth up to {date}"),
            Problem::JobOf(_) => "jobs of members with the role `adult` only".into(),
            Problem::RecordOf { owner, .. } => {
                format!("a member with the role `{owner}`")
            }
            Problem::PremiumBelowWage(wage) => {
                format!("0 for none, or at least the wage of {wage}")
            }
            Problem::SecondToday(_) => "one job of today for each adult".into(),
            Problem::FurtherAlone => "a job with the status `today` for the same adult".into(),
            Problem::OfferWithoutWage => "the money an hour that the offer pays".into(),
            Problem::MissingTable => "this file in the list".into(),
            Problem::UnknownTable(_) => "only tables of the rule pack".into(),
            Problem::SecondTable => "each table once".into(),
            Problem::EmptyTable => "a header row".into(),
            Problem::UnknownColumn(_) => "a column of this table".into(),
            Problem::SecondColumn => "each column once".into(),
            Problem::MissingColumn(_) => "this column in the header".into(),
            Problem::ExtraCell => "no more cells than the header has".into(),
            Problem::NotUtf8 | Problem::Utf16 => "UTF-8 text".into(),
            Problem::OpenQuote => "a closing quotation mark".into(),
            Problem::LongRow => "a shorter row".into(),
            Problem::BadRowNumber => "a table as the sorting wrote it".into(),
            Problem::Syntax(_) => "TOML text".into(),
            Problem::UnknownKey(_) => "a key that exists here".into(),
            Problem::WrongShape(expected) => expected.clone(),
            Problem::SecondEntry => "each entry once".into(),
            Problem::BadGrid(_) => {
                "0 <= `from` < `to` <= 168, `step` above 0, at most 2000 steps".into()
            }
        }
    }

    /// What to do about it; empty where the expectation says enough.
    pub fn hint(&self) -> String {
        match self {
            Problem::Missing { ask, .. } => ask.clone(),
            Problem::OtherDayForm(_) | Problem::NotADay(_) => {
                "write days in the form that `dates` under `[format]` declares".into()
            }
            Problem::ShortYear(_) => "write the year with four digits".into(),
            Problem::CurrencySign(_) => "leave the currency sign out".into(),
            Problem::Grouped(_) => "write the digits without signs or spaces between".into(),
            Problem::OtherDecimals(declared, _) => format!(
                "write a decimal {}, or change `decimals` under `[format]`",
                declared.word()
            ),
            Problem::UnknownWord { nearest, .. }
            | Problem::UnknownTable(nearest)
            | Problem::UnknownColumn(nearest)
            | Problem::UnknownKey(nearest) => nearest
                .as_ref()
                .map_or_else(String::new, |name| format!("did you mean `{name}`?")),
            Problem::OpenQuote => "close it, or write two marks for one that is meant".into(),
            Problem::NotUtf8 | Problem::Utf16 => "save the table as CSV in UTF-8".into(),
            Problem::ExtraCell => {
                "put a cell that holds the separating sign in quotation marks".into()
            }
            Problem::UnknownHousehold => "add the household, or take the row out".into(),
            Problem::SecondColumn => "take one of them out".into(),
            Problem::NotANumber(_)
            | Problem::NoSuchDay(_)
            | Problem::TooManyDecimals(_, _)
            | Problem::NegativeMoney
            | Problem::TooSmall(_)
            | Problem::TooLarge(_)
            | Problem::HoursOfWeek
            | Problem::NotYesNo
            | Problem::KnownWithoutValue(_)
            | Problem::TargetNotAbove
            | Problem::AddressTwice
            | Problem::LongAddress(_)
            | Problem::OtherRole { .. }
            | Problem::BadReference
            | Problem::LongReference(_)
            | Problem::SecondHousehold(_)
            | Problem::NoHousehold
            | Problem::SecondMember(_)
            | Problem::SecondRecord { .. }
            | Problem::UnknownMember(_)
            | Problem::UnknownRecord { .. }
            | Problem::NoAdult
            | Problem::ThirdAdult
            | Problem::OlderThanParent(_)
            | Problem::BornLater(_)
            | Problem::JobOf(_)
            | Problem::RecordOf { .. }
            | Problem::SumOfHours { .. }
            | Problem::PremiumBelowWage(_)
            | Problem::SecondToday(_)
            | Problem::FurtherAlone
            | Problem::OfferWithoutWage
            | Problem::OnlyUnknown(_)
            | Problem::MissingTable
            | Problem::SecondTable
            | Problem::EmptyTable
            | Problem::MissingColumn(_)
            | Problem::LongRow
            | Problem::BadRowNumber
            | Problem::Syntax(_)
            | Problem::WrongShape(_)
            | Problem::SecondEntry
            | Problem::BadGrid(_) => String::new(),
        }
    }
}

/// `a`, `b` or `c`.
pub(super) fn one_of(words: &[String]) -> String {
    let quoted: Vec<String> = words.iter().map(|word| format!("`{word}`")).collect();
    match quoted.split_last() {
        None => "nothing".into(),
        Some((last, [])) => last.clone(),
        Some((last, rest)) => format!("{} or {last}", rest.join(", ")),
    }
}

/// A value in backticks on one line, cut after sixty characters; `nothing` for an empty one.
fn shown(value: &str) -> String {
    if value.is_empty() {
        return "nothing".into();
    }
    let mut out = String::from("`");
    for (place, sign) in value.chars().enumerate() {
        if place == 60 {
            out.push('…');
            break;
        }
        if sign.is_control() {
            out.extend(sign.escape_default());
        } else {
            out.push(sign);
        }
    }
    out.push('`');
    out
}
