//! Rule text to tokens, days to numbers and back, for the oracle. In: texts that the checker accepted. Out: tokens.
//! Written from `rules/README.md` alone; shares nothing with the product's reader.

use num_bigint::BigInt;
use num_rational::BigRational;

/// An exact number of any size.
pub type Q = BigRational;

/// `n / d`.
pub fn q(n: i128, d: i128) -> Q {
    Q::new(BigInt::from(n), BigInt::from(d))
}

/// A whole number.
pub fn whole(n: i128) -> Q {
    Q::from_integer(BigInt::from(n))
}

/// `12570`, `-0.55`, `20000`.
pub fn number(text: &str) -> Option<Q> {
    let (sign, digits) = text.strip_prefix('-').map_or((1, text), |rest| (-1, rest));
    let (before, after) = digits.split_once('.').unwrap_or((digits, ""));
    if before.is_empty()
        || !format!("{before}{after}")
            .bytes()
            .all(|b| b.is_ascii_digit())
    {
        return None;
    }
    let mut value = Q::from_integer(BigInt::from(0));
    for digit in before.bytes() {
        value = value * whole(10) + whole(i128::from(digit - b'0'));
    }
    let mut unit = whole(1);
    for digit in after.bytes() {
        unit /= whole(10);
        value += &unit * whole(i128::from(digit - b'0'));
    }
    Some(value * whole(sign))
}

/// Whether a year has a 29 February.
fn leap(year: i64) -> bool {
    year % 4 == 0 && (year % 100 != 0 || year % 400 == 0)
}

fn days_of_year(year: i64) -> i64 {
    if leap(year) { 366 } else { 365 }
}

fn days_of_month(year: i64, month: i64) -> i64 {
    match month {
        2 if leap(year) => 29,
        2 => 28,
        4 | 6 | 9 | 11 => 30,
        _ => 31,
    }
}

/// A day as days since 1970-01-01, by counting years and months one by one.
pub fn day_number(year: i64, month: i64, day: i64) -> i64 {
    let mut days = 0;
    for y in 1970..year {
        days += days_of_year(y);
    }
    for y in year..1970 {
        days -= days_of_year(y);
    }
    for m in 1..month {
        days += days_of_month(year, m);
    }
    days + day - 1
}

/// Year, month and day of a number of days since 1970-01-01.
pub fn calendar(days: i64) -> (i64, i64, i64) {
    let (mut year, mut rest) = (1970, days);
    while rest < 0 {
        year -= 1;
        rest += days_of_year(year);
    }
    while rest >= days_of_year(year) {
        rest -= days_of_year(year);
        year += 1;
    }
    let mut month = 1;
    while rest >= days_of_month(year, month) {
        rest -= days_of_month(year, month);
        month += 1;
    }
    (year, month, rest + 1)
}

/// `2026-04-06` as days since 1970-01-01.
pub fn day(text: &str) -> Option<i64> {
    let parts: Vec<&str> = text.split('-').collect();
    let [year, month, day] = parts.as_slice() else {
        return None;
    };
    if (year.len(), month.len(), day.len()) != (4, 2, 2) {
        return None;
    }
    Some(day_number(
        year.parse().ok()?,
        month.parse().ok()?,
        day.parse().ok()?,
    ))
}

/// Full birthdays that have passed: none before the first. Somebody born on 29 February has a birthday on 1 March where there is no 29th.
pub fn full_years(from: i64, to: i64) -> i64 {
    let (year, month, birthday) = calendar(from);
    let mut years = 0;
    loop {
        let next = year + years + 1;
        let on = if birthday > days_of_month(next, month) {
            day_number(next, month + 1, 1)
        } else {
            day_number(next, month, birthday)
        };
        if on > to {
            return years;
        }
        years += 1;
    }
}

/// One token of rule text.
#[derive(Clone, Debug, PartialEq)]
pub enum Token {
    Word(String),
    Number(Q),
    Day(i64),
    Text(String),
    Sign(char),
    End,
}

/// The tokens of a text.
pub fn tokens(text: &str) -> Vec<Token> {
    let chars: Vec<char> = text.chars().collect();
    let mut out = Vec::new();
    let mut at = 0;
    while at < chars.len() {
        let c = chars[at];
        let start = at;
        if c == '#' {
            while at < chars.len() && chars[at] != '\n' {
                at += 1;
            }
        } else if c.is_whitespace() || c == '\u{feff}' {
            at += 1;
        } else if c == '"' {
            at += 1;
            while chars[at] != '"' {
                at += 1;
            }
            at += 1;
            out.push(Token::Text(chars[start + 1..at - 1].iter().collect()));
        } else if c.is_ascii_lowercase() {
            while at < chars.len()
                && (chars[at].is_ascii_lowercase()
                    || chars[at].is_ascii_digit()
                    || chars[at] == '_')
            {
                at += 1;
            }
            out.push(Token::Word(chars[start..at].iter().collect()));
        } else if c.is_ascii_digit() {
            let ten: String = chars[start..chars.len().min(start + 10)].iter().collect();
            if let Some(found) = day(&ten) {
                at += 10;
                out.push(Token::Day(found));
                continue;
            }
            while at < chars.len()
                && (chars[at].is_ascii_digit()
                    || (chars[at] == '.' && chars.get(at + 1).is_some_and(char::is_ascii_digit)))
            {
                at += 1;
            }
            let words: String = chars[start..at].iter().collect();
            out.push(Token::Number(
                number(&words).expect("the checker accepted this number"),
            ));
        } else {
            at += 1;
            out.push(Token::Sign(c));
        }
    }
    out.push(Token::End);
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn days_count_on_from_1970() {
        assert_eq!(
            (day("1970-01-01"), day("1969-12-31"), day("2000-03-01")),
            (Some(0), Some(-1), Some(11_017))
        );
        for days in [-40_000, -1, 0, 59, 60, 11_016, 20_000, 60_000] {
            let (year, month, day) = calendar(days);
            assert_eq!(day_number(year, month, day), days);
        }
    }

    #[test]
    fn birthdays_pass_on_the_day() {
        let years =
            |from: &str, to: &str| full_years(day(from).expect("a day"), day(to).expect("a day"));
        assert_eq!(years("2000-04-06", "2016-04-05"), 15);
        assert_eq!(years("2000-04-06", "2016-04-06"), 16);
        assert_eq!(years("2004-02-29", "2025-02-28"), 20);
        assert_eq!(years("2004-02-29", "2025-03-01"), 21);
        assert_eq!(years("2030-01-01", "2025-03-01"), 0);
    }
}
