//! Types of the rule language.

use std::fmt;

/// A period of money.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Period {
    /// Money an hour: a wage.
    Hour,
    /// Money a day.
    Day,
    /// Money a week.
    Week,
    /// Money a month.
    Month,
    /// Money a year.
    Year,
}

impl Period {
    /// The words of the language, in the order of the variants.
    pub const WORDS: [&'static str; 5] = ["hour", "day", "week", "month", "year"];

    /// The period with this word.
    pub fn from_word(word: &str) -> Option<Period> {
        let all = [
            Period::Hour,
            Period::Day,
            Period::Week,
            Period::Month,
            Period::Year,
        ];
        Self::WORDS
            .iter()
            .position(|w| *w == word)
            .map(|at| all[at])
    }

    /// Its word.
    pub fn word(self) -> &'static str {
        Self::WORDS[self as usize]
    }
}

/// A type. `Choice` holds the position of the choice in the pack.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub(super) enum Ty {
    Money(Option<Period>),
    Rate,
    Hours,
    Number,
    Count,
    Date,
    YesNo,
    Choice(usize),
}

impl Ty {
    pub(super) const WORDS: [&'static str; 7] =
        ["money", "rate", "hours", "number", "count", "date", "yesno"];

    /// How a message names it.
    pub(super) fn words(self) -> String {
        match self {
            Ty::Money(None) => "money without a period".to_owned(),
            Ty::Money(Some(_)) | Ty::Hours => self.to_string(),
            Ty::Rate => "a rate".to_owned(),
            Ty::Number => "a number".to_owned(),
            Ty::Count => "a whole number".to_owned(),
            Ty::Date => "a day".to_owned(),
            Ty::YesNo => "yes or no".to_owned(),
            Ty::Choice(_) => "a choice".to_owned(),
        }
    }

    /// Rates, numbers and counts mix.
    pub(super) fn is_scalar(self) -> bool {
        match self {
            Ty::Rate | Ty::Number | Ty::Count => true,
            Ty::Money(_) | Ty::Hours | Ty::Date | Ty::YesNo | Ty::Choice(_) => false,
        }
    }

    /// Whether values can be ordered and added.
    pub(super) fn is_quantity(self) -> bool {
        match self {
            Ty::Money(_) | Ty::Rate | Ty::Hours | Ty::Number | Ty::Count => true,
            Ty::Date | Ty::YesNo | Ty::Choice(_) => false,
        }
    }

    /// The common type of two values that are added, compared or chosen from.
    pub(super) fn join(self, other: Ty) -> Option<Ty> {
        if self == other {
            Some(self)
        } else if self.is_scalar() && other.is_scalar() {
            Some(Ty::Number)
        } else {
            None
        }
    }

    /// Whether a value of this type may stand where `wanted` is declared.
    pub(super) fn fits(self, wanted: Ty) -> bool {
        self == wanted
            || match wanted {
                Ty::Number | Ty::Rate => self.is_scalar(),
                Ty::Money(_) | Ty::Hours | Ty::Count | Ty::Date | Ty::YesNo | Ty::Choice(_) => {
                    false
                }
            }
    }
}

impl fmt::Display for Ty {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Ty::Money(None) => f.write_str("money"),
            Ty::Money(Some(Period::Hour)) => f.write_str("money an hour"),
            Ty::Money(Some(period)) => write!(f, "money a {}", period.word()),
            Ty::Rate => f.write_str("rate"),
            Ty::Hours => f.write_str("hours"),
            Ty::Number => f.write_str("number"),
            Ty::Count => f.write_str("count"),
            Ty::Date => f.write_str("date"),
            Ty::YesNo => f.write_str("yesno"),
            Ty::Choice(_) => f.write_str("choice"),
        }
    }
}
