//! Random small packs: what the checker accepts is compared with the oracle, what it refuses is refused in words.

use super::book::{ADULT, Book};
use super::compare::{Asked, Subject, Tally, compare, same_schema};
use super::homes::{Village, marks, project, shown, smaller};
use super::invent::{DAYS, Invented, files, invent};
use super::luck::Luck;
use super::text::day;
use hourworth::case::{Household, Schema};
use hourworth::engine::JobChoice;
use hourworth::load::{check_pack, schema_of};
use hourworth::rules::Pack;
use std::panic::{AssertUnwindSafe, catch_unwind};

const SEED: u64 = 7_000_000;

/// A checked pack as both sides read it.
struct Ready {
    book: Book,
    pack: Pack,
    schema: Schema,
}

/// Checks texts. The reasons where they are refused.
///
/// # Errors
/// A panic, or a refusal without a word.
fn check(texts: &[(String, String)]) -> Result<Result<Box<Ready>, String>, String> {
    let files = files(texts);
    match catch_unwind(AssertUnwindSafe(|| check_pack(&files))) {
        Err(_) => Err("the checker panics".into()),
        Ok(Err((_, faults))) if faults.is_empty() => Err("refused without a reason".into()),
        Ok(Err((sources, faults))) => {
            let words = catch_unwind(AssertUnwindSafe(|| {
                faults
                    .iter()
                    .map(|f| f.render(&sources, false))
                    .collect::<Vec<_>>()
                    .join("\n")
            }));
            words.map(Err).map_err(|_| "a message panics".into())
        }
        Ok(Ok(pack)) => {
            let schema = schema_of(&pack);
            let book = Book::read(&files);
            same_schema(&book, &schema)?;
            Ok(Ok(Box::new(Ready { book, pack, schema })))
        }
    }
}

/// A question of an accepted pack.
struct Question {
    household: Household,
    days: Vec<i64>,
    earner: usize,
    choice: JobChoice,
    asked: Asked,
}

fn question(ready: &Ready, seed: u64) -> Question {
    let mut luck = Luck::new(seed ^ 0x5EED);
    let (from, to) = (day(DAYS[0]).expect("a day"), day(DAYS[3]).expect("a day"));
    let days: Vec<i64> = (0..2)
        .map(|_| {
            if luck.percent(40) {
                day(DAYS[luck.below(4)]).expect("a day")
            } else {
                luck.between(from, to)
            }
        })
        .collect();
    let village = Village {
        schema: &ready.schema,
        marks: marks(&ready.book),
        day: days[0],
        most_children: 3,
        most_pay: 600_000,
    };
    let household = village.household(&mut luck);
    let earner = luck.below(household.instances[ADULT].len());
    let offered = household
        .offers
        .first()
        .is_some_and(|offer| offer.owner == earner);
    let choice = if offered {
        JobChoice::Offer(0)
    } else {
        JobChoice::Today
    };
    let asked = Asked {
        seed,
        law_points: 6,
        fractions: 4,
        most_pieces: 12,
        rationals: if luck.percent(5) { 200 } else { 10 },
        bounded: 6,
    };
    Question {
        household,
        days,
        earner,
        choice,
        asked,
    }
}

fn ask(
    ready: &Ready,
    question: &Question,
    household: &Household,
    tally: &mut Tally,
) -> Result<(), String> {
    let Question {
        days,
        earner,
        choice,
        asked,
        ..
    } = question;
    let subject = Subject {
        book: &ready.book,
        pack: &ready.pack,
        days,
        household,
        earner: *earner,
        choice: *choice,
    };
    catch_unwind(AssertUnwindSafe(|| compare(&subject, *asked, tally)))
        .unwrap_or_else(|_| Err("a panic".into()))
}

/// Leaves out statements, records and facts as long as something still goes wrong.
fn shrink(
    invented: &Invented,
    ready: Box<Ready>,
    question: &mut Question,
    fault: &mut String,
) -> (Invented, Box<Ready>) {
    let (mut invented, mut ready) = (invented.clone(), ready);
    let mut tries = 0;
    loop {
        let mut shrunk = false;
        for at in (0..invented.statements.len()).rev() {
            tries += 1;
            if at >= invented.statements.len() || tries > 3000 {
                continue;
            }
            let less = invented.without(at);
            let Ok(Ok(new)) = check(&less.texts()) else {
                continue;
            };
            let household = project(&ready.schema, &new.schema, &question.household);
            if let Err(why) = ask(&new, question, &household, &mut Tally::default()) {
                (invented, ready, *fault, shrunk) = (less, new, why, true);
                question.household = household;
            }
        }
        for less in smaller(&ready.schema, &question.household) {
            tries += 1;
            if tries <= 3000
                && let Err(why) = ask(&ready, question, &less, &mut Tally::default())
            {
                (question.household, *fault, shrunk) = (less, why, true);
                break;
            }
        }
        if !shrunk {
            return (invented, ready);
        }
    }
}

fn printed(texts: &[(String, String)]) -> String {
    texts
        .iter()
        .filter(|(name, _)| name != "pack.toml" && name != "order.txt")
        .map(|(name, text)| format!("--- {name}\n{text}"))
        .collect()
}

/// Texts with a few words of their rules taken out, doubled, swapped or replaced.
fn broken(luck: &mut Luck, texts: &[(String, String)]) -> Vec<(String, String)> {
    let mut texts = texts.to_vec();
    let names: Vec<usize> = (0..texts.len())
        .filter(|at| texts[*at].0 != "order.txt")
        .collect();
    for _ in 0..1 + luck.below(3) {
        let text = &mut texts[*luck.pick(&names)].1;
        let mut pieces: Vec<String> = text
            .split_inclusive([' ', '\n', ',', '(', ')'])
            .map(str::to_owned)
            .collect();
        if pieces.is_empty() {
            continue;
        }
        let (at, other) = (luck.below(pieces.len()), luck.below(pieces.len()));
        match luck.below(6) {
            0 => {
                pieces.remove(at);
            }
            1 => pieces.insert(at, pieces[other].clone()),
            2 => pieces.swap(at, other),
            3 => pieces[at] = pieces[other].clone(),
            4 => pieces[at] = (*luck.pick(&STRANGE)).to_owned(),
            _ => {
                let cut = luck.below(text.len() + 1);
                pieces = vec![
                    text.char_indices()
                        .take_while(|(place, _)| *place < cut)
                        .map(|(_, c)| c)
                        .collect(),
                ];
            }
        }
        *text = pieces.concat();
    }
    texts
}

/// Things that do not belong in a rule.
const STRANGE: [&str; 24] = [
    "\"",
    "(",
    ")",
    "[",
    "]",
    "-",
    "99999999999999999",
    "0",
    "0.00000001 ",
    "999999999999999999.5 ",
    "\u{feff}",
    "£",
    "2026-02-30 ",
    "0000-01-01 ",
    "9999-12-31 ",
    "hours ",
    "where ",
    "give ",
    "per job\n",
    "beyond ",
    "* hours * hours ",
    "/ hours ",
    "rounded up to 0 ",
    "#",
];

#[test]
fn broken_packs_are_refused_in_words() {
    let packs = 2500 * super::times();
    let (mut refused, mut tally) = (0, Tally::default());
    for seed in (SEED * 3..).take(packs) {
        let mut luck = Luck::new(seed);
        let texts = broken(
            &mut luck,
            &invent(&mut Luck::new(SEED + seed % 500)).texts(),
        );
        match check(&texts) {
            Err(fault) => panic!("seed {seed}: {fault}\n{}", printed(&texts)),
            Ok(Err(_)) => refused += 1,
            // What is still a pack is one like any other.
            Ok(Ok(ready)) => {
                let question = question(&ready, seed);
                if let Err(fault) = ask(&ready, &question, &question.household, &mut tally) {
                    panic!(
                        "seed {seed}, days {:?}: {fault}\n{}\n{}",
                        question.days,
                        printed(&texts),
                        shown(&ready.schema, &question.household)
                    );
                }
            }
        }
    }
    println!("{refused} of {packs} refused; {tally:?}");
    assert!(
        refused * 4 > packs,
        "too few are refused: {refused} of {packs}"
    );
}

#[test]
fn small_packs_agree_with_the_oracle() {
    let packs = 1500 * super::times();
    let (mut tally, mut refused) = (Tally::default(), 0);
    let start = std::time::Instant::now();
    let mut reasons: std::collections::BTreeMap<String, usize> = std::collections::BTreeMap::new();
    for seed in (SEED..).take(packs) {
        let invented = invent(&mut Luck::new(seed));
        let texts = invented.texts();
        let ready = match check(&texts) {
            Err(fault) => panic!("seed {seed}: {fault}\n{}", printed(&texts)),
            Ok(Err(words)) => {
                refused += 1;
                let first = words.lines().next().unwrap_or("").to_owned();
                *reasons
                    .entry(first.split('`').step_by(2).collect::<Vec<_>>().join("…"))
                    .or_default() += 1;
                continue;
            }
            Ok(Ok(ready)) => ready,
        };
        tally.packs += 1;
        for turn in 0..2 {
            let mut question = question(&ready, seed * 2 + turn);
            let Err(first) = ask(&ready, &question, &question.household, &mut tally) else {
                continue;
            };
            let mut fault = first.clone();
            let Ok(Ok(again)) = check(&texts) else {
                panic!("seed {seed}: accepted once and then refused")
            };
            let (less, ready) = shrink(&invented, again, &mut question, &mut fault);
            panic!(
                "seed {seed}, days {:?}, earner {}, {:?}\n{first}\n\nmade smaller:\n{fault}\n{}\n{}",
                question.days,
                question.earner,
                question.choice,
                printed(&less.texts()),
                shown(&ready.schema, &question.household)
            );
        }
    }
    println!(
        "{tally:?}; {refused} refused in {:?}\n{reasons:#?}",
        start.elapsed()
    );
    assert!(
        tally.packs * 2 > packs,
        "too few packs are accepted: {} of {packs}",
        tally.packs
    );
}
