//! Letters in four languages, and in a made-up one that shows every fixed word and runs from right to left.

#[path = "languages/kinds.rs"]
mod kinds;
#[path = "languages/made_up.rs"]
mod made_up;
#[path = "languages/offered.rs"]
mod offered;

use hourworth::batch::{Books, GridRows, Orders, Places, Prepared, Press, prepare};
use hourworth::case::Household;
use hourworth::load::Rows;
use hourworth::measures::Verdict;
use hourworth::statement::{
    EmployerCost, Kind, LetterContext, LetterView, PAGE_LIMIT, StatementError, TemplateSet, Texts,
    Typesetter, typeset_with_view,
};
use std::path::{Path, PathBuf};
use std::sync::{Arc, LazyLock};

const LANGUAGES: [&str; 4] = ["en", "cy", "es", "de"];

fn folder(name: &str) -> PathBuf {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    root.join("tests/languages").join(name)
}

fn texts(language: &str) -> Arc<Texts> {
    let texts = TemplateSet::built_in().texts(language);
    texts.expect("the texts are sound")
}

fn dense(text: &str) -> String {
    text.chars()
        .filter(|character| !character.is_whitespace())
        .collect()
}

struct Letter {
    reference: String,
    language: String,
    context: LetterContext,
    view: LetterView,
    pdf: Vec<u8>,
    pages: Vec<String>,
    crowded: Vec<String>,
}

static LETTERS: LazyLock<Vec<Letter>> = LazyLock::new(|| letters(&folder("list")));

fn press(prepared: &Prepared) -> Press {
    let orders = Orders {
        run_id: "20260506-TESTRUN1".into(),
        issued: chrono::NaiveDate::from_ymd_opt(2026, 5, 6).expect("a day"),
        rows: GridRows::Named,
        kinds: vec![Kind::Client],
        employer: EmployerCost::LeftOut,
    };
    let office = hourworth::load::Office::default();
    let (templates, pack) = (&prepared.templates, &prepared.pack);
    Press::new(templates, &office, pack, &prepared.terms, &orders).expect("sound templates")
}

fn households(prepared: &Prepared) -> Vec<Household> {
    let (schema, options) = (&prepared.schema, &prepared.options);
    let read = prepared.list.read(schema, options, &Rows::AsWritten);
    let (_, readings) = read.expect("the tables open");
    let readings = readings.map(|reading| reading.expect("a sorted list"));
    readings
        .map(|reading| reading.expect("a sound household"))
        .collect()
}

fn letters(list: &Path) -> Vec<Letter> {
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    let prepared = prepare(list, &Places::default()).expect("the list can be read");
    let mut press = press(&prepared);
    let mut books = Books::new(prepared.pack.clone(), prepared.terms.clone());
    let mut out = vec![];
    for household in households(&prepared) {
        let Ok(Verdict::Assessed(assessment)) = books.assess(&household) else {
            panic!("{} is not assessed", household.reference);
        };
        let context = press.context(&household).expect("a context").clone();
        let (made, view) =
            typeset_with_view(&mut typesetter, &assessment, &context).expect("a letter");
        out.push(Letter {
            reference: household.reference.clone(),
            language: household.delivery.language.clone(),
            pages: typesetter.words(&view, &context.texts).expect("words"),
            crowded: typesetter
                .crowded("client/letter.typ", &view, &context.texts)
                .expect("pages"),
            pdf: made.bytes,
            context,
            view,
        });
    }
    out
}

fn letter(reference: &str) -> &'static Letter {
    let found = LETTERS.iter().find(|letter| letter.reference == reference);
    found.expect("a letter")
}

#[track_caller]
fn says(letter: &Letter, text: &str) {
    assert!(
        dense(&letter.pages.concat()).contains(&dense(text)),
        "not said: {text}\n{:#?}",
        letter.pages
    );
}

#[test]
fn every_language_has_the_keys_values_and_forms_of_english() {
    let set = TemplateSet::built_in();
    let mut languages: Vec<&str> = set.languages().collect();
    languages.sort_by_key(|language| LANGUAGES.iter().position(|known| known == language));
    assert_eq!(languages, LANGUAGES);
    let faults = set.language_faults();
    assert!(faults.is_empty(), "{faults:#?}");
}

#[test]
fn what_a_language_lacks_is_told_with_its_key() {
    let without = |from: &str, to: &str| -> Vec<String> {
        let built_in = TemplateSet::built_in();
        let files = built_in.files();
        let (_, text) = files
            .into_iter()
            .find(|(name, _)| *name == "text/cy.toml")
            .expect("the file");
        assert!(text.contains(from), "{from}");
        let text = text.replace(from, to);
        let faults = TemplateSet::built_in()
            .with("text/cy.toml", text)
            .language_faults();
        faults.iter().map(ToString::to_string).collect()
    };
    let t = |from: &str, to: &str, expected: &[&str]| {
        assert_eq!(without(from, to), expected, "{from}");
    };
    t(
        "title_plain = ",
        "title_plane = ",
        &[
            "texts `cy`: no text with the key `chart.title_plain`, which `en` has",
            "texts `cy`: `chart.title_plane` is a key that `en` does not have",
        ],
    );
    t(
        "ends = \"Os daw’r swydd i ben, mae gennych {sum}",
        "ends = \"Os daw’r swydd i ben, mae gennych {total}",
        &[
            "texts `cy`: `back.ends` does not say `sum`, or not as the same kind of value",
            "texts `cy`: `back.ends` names `total`, which it is not given",
        ],
    );
    t(
        "group = \"{name} ({#count})\"",
        "group = \"{name} ({count})\"",
        &["texts `cy`: `unconfirmed.group` does not say `count`, or not as the same kind of value"],
    );
    t(
        "some.any = ",
        "some = ",
        &[
            "texts `cy`: `facts.some` has one text, expected one for each of zero, one, two, few, many, other, or `any`",
        ],
    );
    t(
        "[payslip]",
        "[copy]\ntitle = \"Copi ffeil\"\n\n[payslip]",
        &["texts `cy`: `copy.title` is a text of the file copy, which is in English only"],
    );
    t(
        "more.two = ",
        "# more.two = ",
        &["texts `cy`: `turns.more` has no form `two`, which the language needs"],
    );
}

#[test]
fn texts_with_wrong_forms_are_refused() {
    let t = |language: &str, text: &str, expected: &[&str]| {
        let faults = Texts::read_all(language, text).expect_err(text);
        let faults: Vec<String> = faults.iter().map(ToString::to_string).collect();
        assert_eq!(faults, expected, "{text}");
    };
    t(
        "cy",
        "more.one = \"{#n} x\"\nmore.other = \"{#n} x\"",
        &[
            "texts `cy`: `more` has no form `zero`, which the language needs",
            "texts `cy`: `more` has no form `two`, which the language needs",
            "texts `cy`: `more` has no form `few`, which the language needs",
            "texts `cy`: `more` has no form `many`, which the language needs",
        ],
    );
    t(
        "de",
        "more.one = \"{#n} x\"\nmore.other = \"{#n} x\"\nmore.few = \"{#n} x\"",
        &["texts `de`: `more` has the form `few`, which the language does not have"],
    );
    t(
        "de",
        "more.one = \"{#a} {#b}\"\nmore.other = \"{#a} {#b}\"",
        &[
            "texts `de`: `more` does not say by which number it changes, expected `by` with one of: a, b",
        ],
    );
    t(
        "de",
        "more.any = \"x\"\nmore.other = \"x\"",
        &["texts `de`: `more` has `any` beside other forms"],
    );
    t(
        "de",
        "far = \"{a|miles}\"",
        &["texts `de`: `far` has `{a|miles}`, but there is no text `unit.miles`"],
    );
    t(
        "de",
        "[unit]\nmiles = \"miles\"",
        &["texts `de`: `unit.miles` has no `{#n}`"],
    );
    t(
        "de",
        "[language]\ndirection = \"up\"",
        &["texts `de`: `language.direction` is something else than one of ltr, rtl"],
    );
    t(
        "de",
        "[language]\nlocale = \"!\"",
        &["texts `de`: `language.locale` is no locale, expected one such as `en-GB`"],
    );
}

#[test]
fn numbers_choose_their_form() {
    let t = |language: &str, text: &str, expected: [(&str, &str); 4]| {
        let texts = Texts::read(language, text).expect(text);
        for (number, said) in expected {
            assert_eq!(texts.say("more", &[("n", number)]).as_deref(), Ok(said));
        }
    };
    t(
        "de",
        "more.one = \"{#n} Stunde\"\nmore.other = \"{#n} Stunden\"",
        [
            ("1", "1 Stunde"),
            ("0", "0 Stunden"),
            ("1.5", "1,5 Stunden"),
            ("1234.50", "1.234,50 Stunden"),
        ],
    );
    t(
        "cy",
        "more.zero = \"dim\"\nmore.one = \"{#n} trobwynt\"\nmore.two = \"{#n} drobwynt\"\n\
         more.few = \"{#n} throbwynt\"\nmore.many = \"{#n} throbwynt\"\nmore.other = \"{#n} trobwynt\"",
        [
            ("0", "dim"),
            ("2", "2 drobwynt"),
            ("3", "3 throbwynt"),
            ("11", "11 trobwynt"),
        ],
    );
    let texts = Texts::read("de", "more = \"{#n}\"").expect("sound");
    for value in ["", "x", "1,5"] {
        let fault = texts.say("more", &[("n", value)]);
        assert!(
            matches!(fault, Err(StatementError::Texts { .. })),
            "{value}"
        );
    }
}

#[test]
fn letters_are_in_the_language_of_the_household_or_the_list() {
    let found: Vec<(&str, &str)> = LETTERS
        .iter()
        .map(|letter| (letter.reference.as_str(), letter.language.as_str()))
        .collect();
    let expected = [
        ("L-01", "cy"),
        ("L-02", "en"),
        ("L-03", "es"),
        ("L-04", "de"),
        ("L-05", "cy"),
        ("L-06", "en"),
        ("L-07", "es"),
        ("L-08", "de"),
        ("L-09", "cy"),
    ];
    assert_eq!(found, expected);
    says(letter("L-01"), "4 Mai 2026");
    says(letter("L-01"), "Rydych yn cadw £7.34* yn fwy y mis");
    says(letter("L-02"), "4 May 2026");
    says(letter("L-03"), "Le quedan 41,97 £* más al mes");
    says(letter("L-03"), "4 de mayo de 2026");
    says(letter("L-04"), "Sie behalten 41,97 £* mehr pro Monat");
    says(
        letter("L-04"),
        "24,5 Stunden pro Woche zu 13,45 £ pro Stunde, statt 16.",
    );
}

/// The same household in two languages: the same sums, written in two ways.
#[test]
fn sums_are_the_same_in_every_language() {
    let cells = |reference: &str| -> Vec<String> {
        let sections = &letter(reference).view.sections;
        let rows = sections
            .iter()
            .flat_map(|section| &section.tables)
            .flat_map(|table| &table.rows);
        rows.flat_map(|row| row.cells.clone()).collect()
    };
    let (english, german, spanish) = (cells("L-02"), cells("L-04"), cells("L-03"));
    assert!(english.len() > 20);
    for (place, cell) in english.iter().enumerate() {
        let number = cell.replace('£', "");
        if number == "—" {
            assert_eq!((&german[place], &spanish[place]), (cell, cell));
            continue;
        }
        let swapped: String = number
            .chars()
            .map(|sign| match sign {
                ',' => '.',
                '.' => ',',
                other => other,
            })
            .collect();
        assert_eq!(german[place], format!("{swapped}\u{a0}£"));
        // Spanish groups from five digits on; no sum here has as many.
        assert_eq!(
            spanish[place],
            format!("{}\u{a0}£", swapped.replace('.', ""))
        );
    }
}

#[test]
fn the_document_says_its_language() {
    for letter in LETTERS.iter() {
        let text = String::from_utf8_lossy(&letter.pdf).into_owned();
        let tag = format!("/Lang({})", letter.language);
        let tag_spaced = format!("/Lang ({})", letter.language);
        assert!(
            text.contains(&tag) || text.contains(&tag_spaced),
            "{}: no {tag}",
            letter.reference
        );
        assert!(text.contains(&letter.view.title), "{}", letter.reference);
    }
}

/// Fixed words and labels of other languages in pages of one language.
fn foreign(prepared: &Prepared, language: &str, pages: &[String]) -> Vec<String> {
    let said = dense(&pages.concat());
    let own = texts(language);
    let mut found = vec![];
    for other in LANGUAGES.iter().filter(|other| **other != language) {
        let words = texts(other);
        for key in words.keys("") {
            let (Ok(text), Ok(same)) = (words.say(key, &[]), own.say(key, &[])) else {
                continue;
            };
            let text = dense(&text);
            let alike = dense(&same).contains(&text) || text.chars().count() < 8;
            if !(alike || key.starts_with("month.") || !said.contains(&text)) {
                found.push(format!("`{text}` ({key} in {other})"));
            }
        }
        for (key, text) in &prepared.pack.labels[*other] {
            let text = dense(&text.replace("{value}", ""));
            let same = prepared.pack.labels[language].get(key);
            let alike = same.is_some_and(|same| dense(same).contains(&text));
            if !(alike || text.chars().count() < 8 || !said.contains(&text)) {
                found.push(format!("`{text}` ({key} in {other})"));
            }
        }
    }
    found
}

#[test]
fn no_letter_holds_words_of_another_language() {
    let prepared = prepare(&folder("list"), &Places::default()).expect("the list can be read");
    for letter in LETTERS.iter() {
        let found = foreign(&prepared, &letter.language, &letter.pages);
        assert!(found.is_empty(), "{}: {found:#?}", letter.reference);
    }
}

#[test]
fn no_letter_is_crowded_or_too_long() {
    for letter in LETTERS.iter() {
        assert!(
            letter.crowded.is_empty(),
            "{}: {:#?}",
            letter.reference,
            letter.crowded
        );
        let large = letter.context.delivery.print_size > 12;
        let most = if large { 8 } else { PAGE_LIMIT };
        assert!(letter.pages.len() <= most, "{}", letter.reference);
    }
}

/// In Welsh a name can change its first letter inside a sentence: `cymorth lleol`, `ar gymorth lleol`. So what to hide is found by
/// the English label of the same key.
#[test]
fn folded_items_show_in_no_form() {
    let letter = letter("L-09");
    let said = dense(&letter.pages.concat()).to_lowercase();
    for form in ["cymorthlleol", "gymorthlleol", "neuaddydref"] {
        assert!(!said.contains(form), "{form}: {said}");
    }
    says(letter, "eitemau eraill");
    let mut open = letter.context.clone();
    open.delivery.fold.clear();
    assert!(open.labels["turn.works_long"].contains("gymorth lleol"));
}
