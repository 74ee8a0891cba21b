//! Random households under the United Kingdom pack.

use super::book::{ADULT, Book};
use super::compare::{Asked, Subject, Tally, compare, same_schema};
use super::homes::{Village, marks, shown, smaller};
use super::luck::Luck;
use hourworth::case::{Household, Schema};
use hourworth::engine::JobChoice;
use hourworth::load::{check_pack, lay_local, read_pack, schema_of};
use hourworth::rules::Pack;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::{Path, PathBuf};

/// The first seed; each household has the next one.
const SEED: u64 = 20_260_406;

const HOUSEHOLDS: usize = 500;

/// One household of a seed with what is asked of it.
struct Drawn {
    household: Household,
    days: Vec<i64>,
    earner: usize,
    choice: JobChoice,
    asked: Asked,
}

fn draw(seed: u64, book: &Book, pack: &Pack, schema: &Schema) -> Drawn {
    let mut luck = Luck::new(seed);
    let (from, to) = (pack.manifest.from, pack.manifest.to);
    let mut starts: Vec<i64> = book
        .amounts
        .values()
        .flatten()
        .map(|row| row.from)
        .filter(|day| (from..=to).contains(day))
        .collect();
    starts.extend([from, to]);
    starts.sort_unstable();
    starts.dedup();
    // Any day, a day on which amounts change, or the day before.
    let day = match luck.below(3) {
        0 => luck.between(from, to),
        1 => *luck.pick(&starts),
        _ => (luck.pick(&starts) - 1).max(from),
    };
    let payment = if luck.percent(60) {
        day
    } else {
        (day + luck.between(-40, 40)).clamp(from, to)
    };
    let village = Village {
        schema,
        marks: marks(book),
        day,
        most_children: 5,
        most_pay: 20_000_000,
    };
    let household = village.household(&mut luck);
    let earner = luck.below(household.instances[ADULT].len());
    let offered = household
        .offers
        .first()
        .is_some_and(|offer| offer.owner == earner);
    let choice = if offered && luck.percent(50) {
        JobChoice::Offer(0)
    } else {
        JobChoice::Today
    };
    let asked = Asked {
        seed,
        law_points: 9,
        fractions: 5,
        most_pieces: 14,
        rationals: if luck.percent(10) { 200 } else { 10 },
        bounded: 6,
    };
    Drawn {
        household,
        days: vec![day, payment],
        earner,
        choice,
        asked,
    }
}

fn ask(
    drawn: &Drawn,
    household: &Household,
    book: &Book,
    pack: &Pack,
    tally: &mut Tally,
) -> Result<(), String> {
    let subject = Subject {
        book,
        pack,
        days: &drawn.days,
        household,
        earner: drawn.earner,
        choice: drawn.choice,
    };
    catch_unwind(AssertUnwindSafe(|| compare(&subject, drawn.asked, tally)))
        .unwrap_or_else(|_| Err("a panic".into()))
}

#[test]
fn households_of_the_united_kingdom() {
    let mut files = read_pack("uk", None).expect("the pack is built in");
    // The invented councils and their area are words like the others.
    let councils: Vec<PathBuf> = ["harrowmere", "sallowby_vale", "brackenholme", "pennickmoor"]
        .map(|name| Path::new("demo_cases/councils").join(format!("{name}.toml")))
        .into();
    lay_local(&mut files, &[], None, &councils).expect("the demo's local files");
    let book = Book::read(&files);
    let Ok(pack) = check_pack(&files) else {
        panic!("the pack has faults")
    };
    let schema = schema_of(&pack);
    same_schema(&book, &schema).expect("one schema");
    let mut tally = Tally::default();
    let start = std::time::Instant::now();
    for seed in (SEED..).take(HOUSEHOLDS * super::times()) {
        let drawn = draw(seed, &book, &pack, &schema);
        let Err(first) = ask(&drawn, &drawn.household, &book, &pack, &mut tally) else {
            continue;
        };
        let mut household = drawn.household.clone();
        let mut fault = first.clone();
        let mut tries = 0;
        while let Some((less, why)) = smaller(&schema, &household).into_iter().find_map(|less| {
            tries += 1;
            let why = (tries < 2000)
                .then(|| ask(&drawn, &less, &book, &pack, &mut Tally::default()).err())
                .flatten()?;
            Some((less, why))
        }) {
            (household, fault) = (less, why);
        }
        panic!(
            "seed {seed}, days {:?}, earner {}, {:?}\n{first}\n\nmade smaller:\n{fault}\n{}",
            drawn.days,
            drawn.earner,
            drawn.choice,
            shown(&schema, &household)
        );
    }
    println!("{tally:?} in {:?}", start.elapsed());
    assert!(
        tally.windows * 4 < tally.bounded_items,
        "too many items lie in a window: {tally:?}"
    );
}
