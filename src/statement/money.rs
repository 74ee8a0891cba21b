//! How money, hours and days are written. In: exact values and the texts of a language. Out: text, by the language's numbers and
//! the pattern of its sums. No sum becomes a float.

use super::error::StatementError;
use super::speech::{MINUS, Speech, decimal};
use super::texts::Texts;
use crate::num::{Direction, Fraction, Hours, Money, divide_rounded};
use chrono::{Datelike, NaiveDate};
use fixed_decimal::Decimal;
use std::sync::Arc;

/// What stands where there is no value.
pub(super) const NONE: &str = "\u{2014}";
/// Stands for the number in the pattern of sums.
const NUMBER: &str = "\u{1}";

/// A currency as a language writes it with a sum.
#[derive(Clone, Debug)]
pub struct Currency {
    /// What stands before and after the number.
    around: (String, String),
    speech: Arc<Speech>,
}

/// The sign of a currency where that is clear to a reader at home, else the code.
fn sign_of(code: &str) -> &str {
    match code {
        "GBP" => "£",
        "EUR" => "€",
        "USD" | "AUD" | "CAD" | "NZD" => "$",
        other => other,
    }
}

impl Currency {
    /// The currency with this ISO 4217 code, as the texts of a language write it.
    ///
    /// # Errors
    /// Where the language has no pattern for sums, `write.sum`.
    pub fn of(code: &str, texts: &Texts) -> Result<Currency, StatementError> {
        let sign = sign_of(code);
        let whole = texts.say("write.sum", &[("sign", sign), ("number", NUMBER)])?;
        let (before, after) = whole.split_once(NUMBER).unwrap_or((&whole, ""));
        // Letters do not touch the number (CLDR, spacing of currencies).
        let space = |touches: Option<char>| touches.is_some_and(char::is_alphabetic);
        let gap = |wanted: bool| if wanted { "\u{a0}" } else { "" };
        Ok(Currency {
            around: (
                format!("{before}{}", gap(space(before.chars().next_back()))),
                format!("{}{after}", gap(space(after.chars().next()))),
            ),
            speech: Arc::clone(texts.speech()),
        })
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
        let mut size = scaled(wage.unsigned_abs(), 4);
        size.absolute.trim_end();
        size.absolute.pad_end(-2);
        self.around(&size, false)
    }

    /// A sum that is given as decimal text, in currency units: `1059.30` is `£1,059.30`, `725.00` is `£725`; a wage keeps
    /// its decimals. None where the text is no such number.
    pub fn typed(&self, text: &str, decimals: Decimals) -> Option<String> {
        let mut size = decimal(text)?;
        size.absolute.trim_end();
        let whole = size.absolute.nonzero_magnitude_end() >= 0;
        if !(whole && decimals == Decimals::WhereNeeded) {
            size.absolute.pad_end(-2);
        }
        Some(self.around(&size, text.starts_with('-')))
    }

    fn written(&self, sum: Money, pence: Pence) -> String {
        let mut size = scaled(sum.0.unsigned_abs(), 2);
        match pence {
            Pence::Always => {}
            Pence::WhereNeeded => size.absolute.trim_end_if_integer(),
        }
        self.around(&size, sum.0 < 0)
    }

    /// A number with its sign and its currency.
    fn around(&self, size: &Decimal, below_nothing: bool) -> String {
        let minus = if below_nothing {
            MINUS.to_string()
        } else {
            String::new()
        };
        let (before, after) = &self.around;
        format!("{minus}{before}{}{after}", self.speech.size(size))
    }
}

/// A whole number of parts of a unit as units, all decimals kept.
fn scaled(parts: u64, decimals: i16) -> Decimal {
    let mut size = Decimal::from(parts);
    size.multiply_pow10(-decimals);
    size
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

/// A day in words: `4 June 2026`.
///
/// # Errors
/// Where the language has no such month or no pattern for days, `write.day`.
pub(super) fn day(date: NaiveDate, texts: &Texts) -> Result<String, StatementError> {
    let month = texts.say(&format!("month.{}", date.month()), &[])?;
    let (day, year) = (date.day().to_string(), date.year().to_string());
    let values = [("day", day.as_str()), ("month", &month), ("year", &year)];
    texts.say("write.day", &values)
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
    use crate::statement::templates::TemplateSet;

    fn texts(language: &str) -> Arc<Texts> {
        let texts = TemplateSet::built_in().texts(language);
        texts.expect("the texts are sound")
    }

    fn currency(code: &str) -> Currency {
        Currency::of(code, &texts("en")).expect("a pattern")
    }

    #[test]
    fn sums_in_tables_and_in_text() {
        let pound = currency("GBP");
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
        let pound = currency("GBP");
        assert_eq!(pound.wage(127_100), "£12.71");
        assert_eq!(pound.wage(120_000), "£12.00");
        assert_eq!(pound.wage(127_125), "£12.7125");
        assert_eq!(currency("CHF").wage(305_000), "CHF\u{a0}30.50");
    }

    #[test]
    fn sums_given_as_text() {
        let pound = currency("GBP");
        let t = |text, decimals, expected: Option<&str>| {
            assert_eq!(pound.typed(text, decimals).as_deref(), expected, "{text}");
        };
        t("725.00", Decimals::WhereNeeded, Some("£725"));
        t("0.00", Decimals::WhereNeeded, Some("£0"));
        t("1059.30", Decimals::WhereNeeded, Some("£1,059.30"));
        t("1048", Decimals::WhereNeeded, Some("£1,048"));
        t("-3.5", Decimals::WhereNeeded, Some("−£3.50"));
        t("12.00", Decimals::Always, Some("£12.00"));
        t("12.7125", Decimals::Always, Some("£12.7125"));
        t("", Decimals::Always, None);
        t("£725.00", Decimals::Always, None);
        t("5%", Decimals::WhereNeeded, None);
    }

    /// Source: the narrow currency formats of ICU4X 2.4 with its CLDR data, but for the minus (U+2212, common practice, no
    /// source) and the franc (its code).
    #[test]
    fn sums_in_four_languages() {
        let t = |language: &str, code: &str, expected: [&str; 3]| {
            let currency = Currency::of(code, &texts(language)).expect("a pattern");
            let found = [123_450, -123_450, 1_234_567].map(|pence| currency.exact(Money(pence)));
            assert_eq!(found, expected.map(str::to_owned), "{language} {code}");
        };
        t("en", "GBP", ["£1,234.50", "−£1,234.50", "£12,345.67"]);
        t("cy", "GBP", ["£1,234.50", "−£1,234.50", "£12,345.67"]);
        t(
            "es",
            "GBP",
            ["1234,50\u{a0}£", "−1234,50\u{a0}£", "12.345,67\u{a0}£"],
        );
        t(
            "de",
            "GBP",
            ["1.234,50\u{a0}£", "−1.234,50\u{a0}£", "12.345,67\u{a0}£"],
        );
        t(
            "de",
            "EUR",
            ["1.234,50\u{a0}€", "−1.234,50\u{a0}€", "12.345,67\u{a0}€"],
        );
        t(
            "de",
            "CHF",
            [
                "1.234,50\u{a0}CHF",
                "−1.234,50\u{a0}CHF",
                "12.345,67\u{a0}CHF",
            ],
        );
    }

    /// Source: the long dates of ICU4X 2.4 with its CLDR data; the hard space behind the day is ours.
    #[test]
    fn days_in_four_languages() {
        let t = |language: &str, expected: [&str; 12]| {
            let texts = texts(language);
            for (month, expected) in (1..).zip(expected) {
                let date = NaiveDate::from_ymd_opt(2026, month, 4).expect("a day");
                let found = day(date, &texts).expect("words").replace('\u{a0}', " ");
                assert_eq!(found, expected, "{language}");
            }
        };
        t(
            "en",
            [
                "4 January 2026",
                "4 February 2026",
                "4 March 2026",
                "4 April 2026",
                "4 May 2026",
                "4 June 2026",
                "4 July 2026",
                "4 August 2026",
                "4 September 2026",
                "4 October 2026",
                "4 November 2026",
                "4 December 2026",
            ],
        );
        t(
            "cy",
            [
                "4 Ionawr 2026",
                "4 Chwefror 2026",
                "4 Mawrth 2026",
                "4 Ebrill 2026",
                "4 Mai 2026",
                "4 Mehefin 2026",
                "4 Gorffennaf 2026",
                "4 Awst 2026",
                "4 Medi 2026",
                "4 Hydref 2026",
                "4 Tachwedd 2026",
                "4 Rhagfyr 2026",
            ],
        );
        t(
            "es",
            [
                "4 de enero de 2026",
                "4 de febrero de 2026",
                "4 de marzo de 2026",
                "4 de abril de 2026",
                "4 de mayo de 2026",
                "4 de junio de 2026",
                "4 de julio de 2026",
                "4 de agosto de 2026",
                "4 de septiembre de 2026",
                "4 de octubre de 2026",
                "4 de noviembre de 2026",
                "4 de diciembre de 2026",
            ],
        );
        t(
            "de",
            [
                "4. Januar 2026",
                "4. Februar 2026",
                "4. März 2026",
                "4. April 2026",
                "4. Mai 2026",
                "4. Juni 2026",
                "4. Juli 2026",
                "4. August 2026",
                "4. September 2026",
                "4. Oktober 2026",
                "4. November 2026",
                "4. Dezember 2026",
            ],
        );
    }

    #[test]
    fn what_is_kept_of_ten() {
        assert_eq!(kept_of_ten(Fraction::new(676, 1000)), Money(324));
        assert_eq!(kept_of_ten(Fraction::new(12, 10)), Money(-200));
    }
}
