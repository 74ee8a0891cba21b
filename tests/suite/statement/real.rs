//! The letters of the demo lists, from real assessments: their length, their cautions, their words.

use hourworth::batch::{Books, GridRows, Orders, Places, Prepared, Press, Statements, prepare};
use hourworth::case::Household;
use hourworth::load::Rows;
use hourworth::measures::{Assessment, Verdict};
use hourworth::statement::{
    Detail, LetterContext, PAGE_LIMIT, TemplateSet, Typesetter, letter_view, missing_labels,
    typeset,
};
use std::collections::BTreeMap;
use std::path::Path;
use std::sync::LazyLock;

/// One letter of a demo list.
struct Letter {
    /// List and household.
    name: String,
    assessment: Assessment,
    context: LetterContext,
    /// Pages of the document that a run prints.
    pages: usize,
    /// Words of each page of the full letter.
    words: Vec<String>,
}

const LISTS: [&str; 5] = [
    "harrowmere",
    "harrowmere_march",
    "payroll",
    "what_if",
    "one_household.toml",
];

static LETTERS: LazyLock<Vec<Letter>> = LazyLock::new(|| {
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    LISTS
        .iter()
        .flat_map(|list| letters(list, &mut typesetter))
        .collect()
});

/// The letters of one list.
fn letters(list: &str, typesetter: &mut Typesetter) -> Vec<Letter> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("demo_cases")
        .join(list);
    let prepared = prepare(&path, &Places::default()).expect("the list can be read");
    let mut press = press(&prepared);
    let mut books = Books::new(prepared.pack.clone(), prepared.terms.clone());
    let mut out = vec![];
    for household in households(&prepared) {
        let Ok(Verdict::Assessed(assessment)) = books.assess(&household) else {
            continue;
        };
        let context = press.context(&household).expect("a context").clone();
        let made = typeset(typesetter, &assessment, &context).expect("a letter");
        let view = letter_view(&assessment, &context, Detail::Full).expect("a view");
        let words = typesetter.words(&view, &context.texts).expect("words");
        out.push(Letter {
            name: format!("{list}, {}", household.reference),
            assessment: *assessment,
            context,
            pages: made.pages,
            words,
        });
    }
    out
}

fn press(prepared: &Prepared) -> Press {
    let orders = Orders {
        run_id: "20260506-TESTRUN1".into(),
        issued: chrono::NaiveDate::from_ymd_opt(2026, 5, 6).expect("a day"),
        rows: GridRows::Named,
        statements: Statements::Made,
    };
    let office = hourworth::load::Office::default();
    Press::new(
        &prepared.templates,
        &office,
        &prepared.pack,
        &prepared.terms,
        &orders,
    )
    .expect("the templates are sound")
}

fn households(prepared: &Prepared) -> Vec<Household> {
    let (_, readings) = prepared
        .list
        .read(&prepared.schema, &prepared.options, &Rows::AsWritten)
        .expect("the tables open");
    readings
        .filter_map(|reading| reading.expect("a sorted list").ok())
        .collect()
}

#[test]
fn predicted() {
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    for letter in LETTERS.iter() {
        for detail in [Detail::Full, Detail::Plain, Detail::Short, Detail::Bare] {
            let view = letter_view(&letter.assessment, &letter.context, detail).expect("a view");
            let actual = typesetter
                .words(&view, &letter.context.texts)
                .expect("w")
                .len();
            let guess = hourworth::statement::probable_pages(&view);
            let long = hourworth::statement::probable_length(&view);
            println!(
                "{} {detail:?}: guess {guess} {long:.2}, is {actual}, {} pt {}",
                letter.name,
                view.print_size,
                if guess == actual { "" } else { "<<<" }
            );
        }
    }
}

#[test]
fn page_counts() {
    let mut counts: BTreeMap<&str, Vec<String>> = BTreeMap::new();
    for letter in LETTERS.iter() {
        println!("{}: {}", letter.name, letter.pages);
        counts.entry("all").or_default().push(letter.name.clone());
    }
}

#[test]
fn dump_bare() {
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    for letter in LETTERS.iter() {
        for (name, detail) in [("bare", Detail::Bare), ("full", Detail::Full)] {
            let view = letter_view(&letter.assessment, &letter.context, detail).expect("a view");
            let made = typesetter
                .letter(&view, &letter.context.texts, letter.context.issued)
                .expect("pdf");
            let file = letter.name.replace(", ", "-");
            std::fs::write(
                format!("/tmp/letter-run/dump/{file}-{name}.pdf"),
                made.bytes,
            )
            .expect("written");
        }
    }
}
