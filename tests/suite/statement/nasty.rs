//! Nasty texts in every field that somebody types: each is printed as typed, or the household is refused with a message that
//! names the field. Nothing is run, nothing is lost, nothing leaves the sheet.

#[path = "nasty/list.rs"]
mod list;
#[path = "nasty/run.rs"]
mod run;

pub use list::NASTY;

use hourworth::batch::{Books, GridRows, Orders, Places, Prepared, Press, prepare};
use hourworth::case::Household;
use hourworth::load::{Office, Rows};
use hourworth::measures::Verdict;
use hourworth::statement::{
    Detail, EmployerCost, Kind, StatementError, TemplateSet, Typesetter, letter_view,
    typeset_with_view,
};
use std::path::Path;

/// A field that somebody types.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Field {
    Member(usize),
    Child(usize),
    Offer(usize),
    Address(usize),
    OfficeName,
    OfficeAddress,
    Phone,
    Email,
    Hours,
    Accreditation,
    Signatory,
    Privacy,
    Complaints,
}

const FIELDS: [Field; 16] = [
    Field::Member(0),
    Field::Member(1),
    Field::Child(0),
    Field::Offer(0),
    Field::Address(0),
    Field::Address(1),
    Field::Address(2),
    Field::OfficeName,
    Field::OfficeAddress,
    Field::Phone,
    Field::Email,
    Field::Hours,
    Field::Accreditation,
    Field::Signatory,
    Field::Privacy,
    Field::Complaints,
];

impl Field {
    /// Where a message may say that the fault is: starts of the names of a letter's fields.
    fn places(self) -> &'static [&'static str] {
        match self {
            Field::Member(_) => &["name", "whose", "sections", "closing", "title", "notes"],
            Field::Child(_) => &["name", "sections", "closing"],
            Field::Offer(_) => &["offer", "sections"],
            Field::Address(_) => &["address"],
            Field::OfficeName => &["office", "title"],
            Field::OfficeAddress
            | Field::Phone
            | Field::Email
            | Field::Hours
            | Field::Accreditation => &["office.lines", "office_lines", "office_more"],
            Field::Signatory | Field::Privacy | Field::Complaints => {
                &["office.next_steps", "closing"]
            }
        }
    }

    fn set(self, text: &str, household: &mut Household, office: &mut Office) {
        let text = text.to_owned();
        match self {
            Field::Member(at) => household.instances[1][at].label = text,
            Field::Child(at) => household.instances[2][at].label = text,
            Field::Offer(at) => household.offers[at].label = text,
            Field::Address(at) => household.delivery.address[at] = text,
            Field::OfficeName => office.name = text,
            Field::OfficeAddress => office.address = vec![text],
            Field::Phone => office.phone = text,
            Field::Email => office.email = text,
            Field::Hours => office.hours = text,
            Field::Accreditation => office.accreditation = text,
            Field::Signatory => office.signatory = text,
            Field::Privacy => office.privacy = text,
            Field::Complaints => office.complaints = text,
        }
    }
}

/// A couple with a child and an offer, and what sets its letter.
struct Bench {
    prepared: Prepared,
    books: Books,
    household: Household,
    typesetter: Typesetter,
}

impl Bench {
    fn new() -> Bench {
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo_cases/harrowmere");
        let prepared = prepare(&path, &Places::default()).expect("the list can be read");
        let kinds = &prepared.schema.kinds;
        assert_eq!((&*kinds[1].name, &*kinds[2].name), ("adult", "child"));
        let (_, readings) = prepared
            .list
            .read(&prepared.schema, &prepared.options, &Rows::AsWritten)
            .expect("the tables open");
        let mut household = readings
            .filter_map(|reading| reading.expect("a sorted list").ok())
            .find(|home| {
                home.instances[1].len() == 2
                    && !home.instances[2].is_empty()
                    && !home.offers.is_empty()
                    && home.delivery.print_size == 12
            })
            .expect("a couple with a child and an offer");
        household.delivery.address = vec!["Plain".to_owned(); 3];
        Bench {
            books: Books::new(prepared.pack.clone(), prepared.terms.clone()),
            prepared,
            household,
            typesetter: Typesetter::new(&TemplateSet::built_in()).expect("sound templates"),
        }
    }

    /// The letter with these texts in these fields: its words without spaces, without what stands at the foot of each page.
    fn letter(&mut self, texts: &[(Field, String)]) -> Result<String, StatementError> {
        let mut household = self.household.clone();
        let mut office = Office::default();
        for (field, text) in texts {
            field.set(text, &mut household, &mut office);
        }
        let orders = Orders {
            run_id: "20260506-NASTY001".into(),
            issued: chrono::NaiveDate::from_ymd_opt(2026, 5, 6).expect("a day"),
            rows: GridRows::Named,
            kinds: vec![Kind::Client],
            employer: EmployerCost::LeftOut,
        };
        let Prepared {
            templates,
            pack,
            terms,
            ..
        } = &self.prepared;
        let mut press = Press::new(templates, &office, pack, terms, &orders)?;
        let context = press.context(&household)?.clone();
        let verdict = self.books.assess(&household).expect("it is assessed");
        let Verdict::Assessed(assessment) = verdict else {
            panic!("the household is not covered");
        };
        // What a run does; the same texts must go through it or be refused.
        typeset_with_view(&mut self.typesetter, &assessment, &context)?;
        let view = letter_view(&assessment, &context, Detail::Plain)?;
        let crowded = self
            .typesetter
            .crowded("client/letter.typ", &view, &context.texts)?;
        assert!(crowded.is_empty(), "{texts:?}: {crowded:?}");
        let pages = self.typesetter.words(&view, &context.texts)?;
        let count = pages.len();
        let mut out = String::new();
        for (place, page) in pages.iter().enumerate() {
            let page = dense(page);
            let foot = dense(&format!(
                "Statement {} Page {} of {count}",
                context.number,
                place + 1
            ));
            assert!(page.contains(&foot), "{texts:?}: no foot on a page");
            out.push_str(&page.replace(&foot, ""));
        }
        Ok(out)
    }
}

fn dense(text: &str) -> String {
    text.chars().filter(|c| !c.is_whitespace()).collect()
}

/// How often each character stands in a text.
fn counts(text: &str) -> std::collections::BTreeMap<char, usize> {
    let mut out = std::collections::BTreeMap::new();
    for character in text.chars() {
        *out.entry(character).or_default() += 1;
    }
    out
}

/// A text of a field: a mark that stands nowhere else, so that each place of it is found.
fn marked(at: usize, text: &str) -> String {
    format!(
        "Xqq{} {text}",
        char::from(b'a' + u8::try_from(at).expect("few fields"))
    )
}

#[test]
fn the_list_is_long_and_without_doubles() {
    assert!(NASTY.len() >= 60, "{} texts", NASTY.len());
    let mut once = NASTY.to_vec();
    once.sort_unstable();
    once.dedup();
    assert_eq!(once.len(), NASTY.len());
}

#[test]
fn each_text_is_printed_as_typed_or_refused_by_field() {
    let mut bench = Bench::new();
    let fill = |text: &str| -> Vec<(Field, String)> {
        let fields = FIELDS.iter().enumerate();
        fields
            .map(|(at, field)| (*field, marked(at, text)))
            .collect()
    };
    let plain = bench.letter(&fill("")).expect("a plain letter");
    let (mut printed, mut refused) = (0, 0);
    for text in NASTY {
        match bench.letter(&fill(text)) {
            Ok(words) => {
                // Each field stands in the letter as typed, as often as its mark does in the plain letter; and taken
                // out, nothing else has changed.
                let mut rest = words.clone();
                for (at, field) in FIELDS.iter().enumerate() {
                    let (mark, whole) = (dense(&marked(at, "")), dense(&marked(at, text)));
                    let wanted = plain.matches(&mark).count();
                    assert!(wanted > 0, "{field:?} is not printed");
                    assert_eq!(
                        words.matches(&whole).count(),
                        wanted,
                        "{field:?} with {text:?}\n{words}"
                    );
                    rest = rest.replace(&whole, &mark);
                }
                assert_eq!(counts(&rest), counts(&plain), "{text:?} changes the letter");
                printed += 1;
            }
            Err(together) => {
                // Not all at once: then each field alone is printed, or refused by its own name.
                let mut any = false;
                for (at, field) in FIELDS.into_iter().enumerate() {
                    let mut texts = fill("");
                    texts[at].1 = marked(at, text);
                    match bench.letter(&texts) {
                        Ok(words) => assert!(words.contains(&dense(&texts[at].1)), "{text:?}"),
                        Err(
                            StatementError::Glyph { field: named, .. }
                            | StatementError::Room { field: named, .. },
                        ) => {
                            let known = field.places().iter().any(|start| named.starts_with(start));
                            assert!(known, "{field:?} with {text:?} is called `{named}`");
                            any = true;
                        }
                        Err(other) => panic!("{field:?} with {text:?}: {other}"),
                    }
                }
                // Three lines of an address that each have room may have none together.
                let window =
                    matches!(&together, StatementError::Room { field, .. } if field == "address");
                assert!(
                    any || window,
                    "{text:?} alone is refused nowhere: {together}"
                );
                refused += 1;
            }
        }
    }
    assert!(
        printed >= 40 && refused >= 20,
        "{printed} printed, {refused} refused"
    );
}
