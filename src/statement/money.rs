//! How money, hours and days are written in English. In: exact values. Out: text.

use crate::num::{Direction, Fraction, Hours, Money, divide_rounded};
use chrono::{Datelike, NaiveDate};

/// The sign before a sum below nothing.
const MINUS: char = '\u{2212}';
/// What stands where there is no value.
pub(super) const NONE: &str = "\u{2014}";

/// A currency as it is written before a sum.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Currency {
    sign: String,
}

impl Currency {
    /// The currency with this ISO 4217 code: its sign where that is clear to a reader at home, else the code.
    pub fn of(code: &str) -> Currency {
        let sign = match code {
            "GBP" => "£".to_owned(),
            "EUR" => "€".to_owned(),
            "USD" | "AUD" | "CAD" | "NZD" => "$".to_owned(),
            other => format!("{other}\u{a0}"),
        };
        Currency { sign }
    }

    /// For tables: two decimals always, `£1,234.50`, `−£3.00`; nothing is `£0.00`.
    pub fn exact(&self, sum: Money) -> String {
        self.written(sum, Pence::Always)
    }

    /// For running text: round sums without decimals, `£1,234`.
    pub fn short(&self, sum: Money) -> String {
        self.written(sum, Pence::WhereNeeded)
    }

    /// For axes and marks: whole units, rounded half up.
    pub fn whole(&self, sum: Money) -> String {
        let size = divide_rounded(i128::from(sum.0.abs()), 100, Direction::HalfUp);
        let size = i64::try_from(size).unwrap_or(i64::MAX / 100) * 100;
        self.written(
            Money(if sum.0 < 0 { -size } else { size }),
            Pence::WhereNeeded,
        )
    }

    /// A wage in ten-thousandths of a unit an hour: at least two decimals, more where they count.
    pub fn wage(&self, wage: i64) -> String {
        let size = wage.unsigned_abs();
        let mut text = format!(
            "{}{}.{:04}",
            self.sign,
            grouped(size / 10_000),
            size % 10_000
        );
        while text.ends_with('0') && text.rfind('.').is_some_and(|dot| text.len() - dot > 3) {
            text.pop();
        }
        text
    }

    /// A sum that is given as decimal text, in currency units: `1059.30` is `£1,059.30`, `725.00` is `£725`; a wage keeps
    /// its decimals. None where the text is no such number.
    pub fn typed(&self, text: &str, decimals: Decimals) -> Option<String> {
        let (minus, size) = match text.strip_prefix('-') {
            Some(size) => (MINUS.to_string(), size),
            None => (String::new(), text),
        };
        let (whole, part) = size.split_once('.').unwrap_or((size, ""));
        let digits = |text: &str| text.chars().all(|c| c.is_ascii_digit());
        if whole.is_empty() || whole.len() > 15 || !digits(whole) || !digits(part) {
            return None;
        }
        let whole = grouped(whole.parse().ok()?);
        let part = match (decimals, part.trim_end_matches('0')) {
            (Decimals::WhereNeeded, "") => String::new(),
            (_, kept) => format!(".{kept:0<2}"),
        };
        Some(format!("{minus}{}{whole}{part}", self.sign))
    }

    fn written(&self, sum: Money, pence: Pence) -> String {
        let size = sum.0.unsigned_abs();
        let minus = if sum.0 < 0 {
            MINUS.to_string()
        } else {
            String::new()
        };
        let whole = grouped(size / 100);
        match (pence, size % 100) {
            (Pence::WhereNeeded, 0) => format!("{minus}{}{whole}", self.sign),
            (_, part) => format!("{minus}{}{whole}.{part:02}", self.sign),
        }
    }
}

/// When the decimals of a typed sum are written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Decimals {
    /// At least two.
    Always,
    /// None where the sum is whole.
    WhereNeeded,
}

/// When pence are written.
#[derive(Clone, Copy)]
enum Pence {
    Always,
    WhereNeeded,
}

/// Digits in groups of three.
fn grouped(value: u64) -> String {
    let digits = value.to_string();
    let mut out = String::with_capacity(digits.len() + digits.len() / 3);
    for (position, digit) in digits.chars().enumerate() {
        if position > 0 && (digits.len() - position).is_multiple_of(3) {
            out.push(',');
        }
        out.push(digit);
    }
    out
}

/// Currency units as money, rounded half up to the minor unit.
pub(super) fn money(units: Fraction) -> Money {
    let pence = divide_rounded(
        units.numerator() * 100,
        units.denominator(),
        Direction::HalfUp,
    );
    Money(i64::try_from(pence).unwrap_or(i64::MAX))
}

/// Hours at or just above an exact place, in hundredths.
pub(super) fn hours(at: Fraction) -> Hours {
    let hundredths = (at * Fraction::whole(100)).ceil();
    Hours(i64::try_from(hundredths).unwrap_or(i64::MAX))
}

/// What is kept of ten units of extra pay at this rate.
pub(super) fn kept_of_ten(rate: Fraction) -> Money {
    money((Fraction::ONE - rate) * Fraction::whole(10))
}

/// A day in words: `4 June 2026`. The names of months come from the texts.
pub(super) fn day(date: NaiveDate, months: &[String]) -> String {
    let month = months
        .get(date.month0() as usize)
        .map(String::as_str)
        .unwrap_or("?");
    format!("{}\u{a0}{month} {}", date.day(), date.year())
}

/// A name of the code as words: `work_allowance` is `work allowance`.
pub(super) fn readable(name: &str) -> String {
    name.replace('_', " ")
}

/// The text with its first letter large.
pub(super) fn capital(text: &str) -> String {
    let mut letters = text.chars();
    match letters.next() {
        Some(first) => first.to_uppercase().chain(letters).collect(),
        None => String::new(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sums_in_tables_and_in_text() {
        let pound = Currency::of("GBP");
        let t = |pence, exact: &str, short: &str, whole: &str| {
            let sum = Money(pence);
            assert_eq!(
                (pound.exact(sum), pound.short(sum), pound.whole(sum)),
                (exact.to_owned(), short.to_owned(), whole.to_owned())
            );
        };
        // UK practice: comma above 999, no `.00` in text (methods.md section 17); minus as U+2212, common practice, no source.
        t(0, "£0.00", "£0", "£0");
        t(-0, "£0.00", "£0", "£0");
        t(49, "£0.49", "£0.49", "£0");
        t(50, "£0.50", "£0.50", "£1");
        t(-49, "−£0.49", "−£0.49", "£0");
        t(99_999, "£999.99", "£999.99", "£1,000");
        t(100_000, "£1,000.00", "£1,000", "£1,000");
        t(
            -123_456_789,
            "−£1,234,567.89",
            "−£1,234,567.89",
            "−£1,234,568",
        );
    }

    #[test]
    fn wages_keep_what_counts() {
        let pound = Currency::of("GBP");
        assert_eq!(pound.wage(127_100), "£12.71");
        assert_eq!(pound.wage(120_000), "£12.00");
        assert_eq!(pound.wage(127_125), "£12.7125");
        assert_eq!(Currency::of("CHF").wage(305_000), "CHF\u{a0}30.50");
    }

    #[test]
    fn sums_given_as_text() {
        let pound = Currency::of("GBP");
        let t = |text, decimals, expected: Option<&str>| {
            assert_eq!(pound.typed(text, decimals).as_deref(), expected, "{text}");
        };
        t("725.00", Decimals::WhereNeeded, Some("£725"));
        t("1059.30", Decimals::WhereNeeded, Some("£1,059.30"));
        t("1048", Decimals::WhereNeeded, Some("£1,048"));
        t("-3.5", Decimals::WhereNeeded, Some("−£3.50"));
        t("12.00", Decimals::Always, Some("£12.00"));
        t("12.7125", Decimals::Always, Some("£12.7125"));
        t("", Decimals::Always, None);
        t("£725.00", Decimals::Always, None);
        t("5%", Decimals::WhereNeeded, None);
    }

    #[test]
    fn what_is_kept_of_ten() {
        assert_eq!(kept_of_ten(Fraction::new(676, 1000)), Money(324));
        assert_eq!(kept_of_ten(Fraction::new(12, 10)), Money(-200));
    }
}
