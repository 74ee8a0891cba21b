//! How a language writes numbers and lists and which plural forms it has, by CLDR. In: a locale and exact decimals. Out: text.
//! Refuses a locale that is no BCP 47 tag. No number becomes a float.

use fixed_decimal::Decimal;
use icu_decimal::DecimalFormatter;
use icu_decimal::options::DecimalFormatterOptions;
use icu_list::ListFormatter;
use icu_list::options::{ListFormatterOptions, ListLength};
use icu_locale_core::Locale;
use icu_plurals::{PluralCategory, PluralRules};

/// The sign before a number below nothing.
pub(super) const MINUS: char = '\u{2212}';

/// A plural form of CLDR.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Form {
    /// Such as nothing in Welsh.
    Zero,
    /// Such as one in English.
    One,
    /// Such as two in Welsh.
    Two,
    /// Such as three in Welsh.
    Few,
    /// Such as six in Welsh.
    Many,
    /// Everything else.
    Other,
}

impl Form {
    /// All forms.
    pub const ALL: [Form; 6] = [
        Form::Zero,
        Form::One,
        Form::Two,
        Form::Few,
        Form::Many,
        Form::Other,
    ];

    /// Its word in a text file.
    pub fn word(self) -> &'static str {
        match self {
            Form::Zero => "zero",
            Form::One => "one",
            Form::Two => "two",
            Form::Few => "few",
            Form::Many => "many",
            Form::Other => "other",
        }
    }

    fn of(category: PluralCategory) -> Form {
        match category {
            PluralCategory::Zero => Form::Zero,
            PluralCategory::One => Form::One,
            PluralCategory::Two => Form::Two,
            PluralCategory::Few => Form::Few,
            PluralCategory::Many => Form::Many,
            PluralCategory::Other => Form::Other,
        }
    }
}

/// The numbers, plural forms and lists of one locale.
#[derive(Debug)]
pub struct Speech {
    decimals: DecimalFormatter,
    plurals: PluralRules,
    list: ListFormatter,
}

impl Speech {
    /// The rules of a locale such as `en-GB`; a locale that CLDR does not know has those of its language, else the root's. None
    /// where the text is no locale.
    pub fn of(locale: &str) -> Option<Speech> {
        let locale: Locale = locale.parse().ok()?;
        // Parts of one thing, such as `a, b, c`: a list of names needs no word before its last, which Welsh would change by sound.
        let list = ListFormatterOptions::default().with_length(ListLength::Short);
        Some(Speech {
            decimals: DecimalFormatter::try_new(
                (&locale).into(),
                DecimalFormatterOptions::default(),
            )
            .ok()?,
            plurals: PluralRules::try_new_cardinal((&locale).into()).ok()?,
            list: ListFormatter::try_new_unit((&locale).into(), list).ok()?,
        })
    }

    /// The forms that the language needs, in the order of [`Form`].
    pub fn forms(&self) -> Vec<Form> {
        let mut forms: Vec<Form> = self.plurals.categories().map(Form::of).collect();
        forms.sort_unstable();
        forms
    }

    /// The form of a number that is given as plain text: `29.65`. None where it is no such number.
    pub fn form(&self, plain: &str) -> Option<Form> {
        let number = decimal(plain)?;
        Some(Form::of(self.plurals.category_for(&number)))
    }

    /// A number that is given as plain text, as the language writes it; its decimals stay. None where it is no such number.
    pub fn number(&self, plain: &str) -> Option<String> {
        let (minus, size) = match plain.strip_prefix('-') {
            Some(size) => (MINUS.to_string(), size),
            None => (String::new(), plain),
        };
        Some(format!("{minus}{}", self.size(&decimal(size)?)))
    }

    /// A number without its sign, as the language writes it.
    pub fn size(&self, number: &Decimal) -> String {
        self.decimals
            .format(&Decimal::new(
                fixed_decimal::Sign::None,
                number.absolute.clone(),
            ))
            .to_string()
    }

    /// Names in one line: `a, b, c`.
    pub fn list(&self, parts: &[String]) -> String {
        self.list.format(parts.iter()).to_string()
    }
}

/// A number as an exact decimal: digits, at most one point with digits on both sides, a minus in front.
pub(super) fn decimal(plain: &str) -> Option<Decimal> {
    let size = plain.strip_prefix('-').unwrap_or(plain);
    let (whole, part) = match size.split_once('.') {
        Some((_, "")) => return None,
        Some(parts) => parts,
        None => (size, ""),
    };
    let digits = |text: &str| text.chars().all(|c| c.is_ascii_digit());
    if whole.is_empty() || whole.len() > 15 || !digits(whole) || !digits(part) {
        return None;
    }
    plain.parse().ok()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Source: CLDR 48 as ICU4X 2.4 ships it, `common/main/{en_GB,cy,es,de}.xml` and `common/supplemental/plurals.xml`.
    #[test]
    fn numbers_of_four_languages() {
        let t = |tag: &str, expected: [&str; 4]| {
            let speech = Speech::of(tag).expect(tag);
            let found = ["1234.50", "12345.67", "29.65", "-3"].map(|number| speech.number(number));
            assert_eq!(found, expected.map(|text| Some(text.to_owned())), "{tag}");
        };
        t("en-GB", ["1,234.50", "12,345.67", "29.65", "−3"]);
        t("cy", ["1,234.50", "12,345.67", "29.65", "−3"]);
        // Spanish groups from five digits on.
        t("es", ["1234,50", "12.345,67", "29,65", "−3"]);
        t("de", ["1.234,50", "12.345,67", "29,65", "−3"]);
        assert!(Speech::of("not a tag").is_none());
    }

    /// Source: as above.
    #[test]
    fn forms_of_four_languages() {
        let t = |tag: &str, needed: &[Form], some: [(&str, Form); 5]| {
            let speech = Speech::of(tag).expect(tag);
            assert_eq!(speech.forms(), needed, "{tag}");
            for (number, form) in some {
                assert_eq!(speech.form(number), Some(form), "{tag} {number}");
            }
        };
        use Form::{Few, Many, One, Other, Two, Zero};
        t(
            "cy",
            &Form::ALL,
            [("0", Zero), ("1", One), ("2", Two), ("3", Few), ("6", Many)],
        );
        let two = [One, Other];
        let some = [
            ("0", Other),
            ("1", One),
            ("2", Other),
            ("1.5", Other),
            ("21", Other),
        ];
        t("en-GB", &two, some);
        t("de", &two, some);
        let some = [
            ("0", Other),
            ("1", One),
            ("2", Other),
            ("1.5", Other),
            ("1000000", Many),
        ];
        t("es", &[One, Many, Other], some);
    }

    #[test]
    fn lists_of_four_languages() {
        let t = |tag: &str, expected: &str| {
            let parts = ["a", "b", "c"].map(str::to_owned);
            assert_eq!(Speech::of(tag).expect(tag).list(&parts), expected, "{tag}");
        };
        t("en-GB", "a, b, c");
        t("cy", "a, b, c");
        t("es", "a, b, c");
        t("de", "a, b und c");
    }

    #[test]
    fn what_is_no_number() {
        let speech = Speech::of("en").expect("a locale");
        for text in [
            "",
            "-",
            ".",
            "1.",
            ".5",
            "1e3",
            "+1",
            "1,5",
            "5%",
            "£1",
            "12345678901234567",
        ] {
            assert_eq!(speech.number(text), None, "{text}");
            assert_eq!(speech.form(text), None, "{text}");
        }
    }
}
