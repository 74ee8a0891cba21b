//! The letters of the demo lists, from real assessments: their length, their cautions, their words.

use hourworth::batch::{Books, GridRows, Orders, Places, Prepared, Press, prepare};
use hourworth::case::Household;
use hourworth::load::Rows;
use hourworth::measures::{Assessment, Point, Verdict};
use hourworth::statement::{
    EmployerCost, Kind, LetterContext, LetterView, PAGE_LIMIT, TemplateSet, Typesetter,
    missing_labels, probable_length, typeset_with_view,
};
use std::path::Path;
use std::sync::LazyLock;

/// One letter of a demo list.
struct Letter {
    /// List and household.
    name: String,
    assessment: Assessment,
    context: LetterContext,
    /// What the letter says that a run prints.
    view: LetterView,
    /// Its words, page by page.
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
        let (made, view) = typeset_with_view(typesetter, &assessment, &context).expect("a letter");
        let words = typesetter.words(&view, &context.texts).expect("words");
        assert_eq!(words.len(), made.pages, "{}", household.reference);
        out.push(Letter {
            name: format!("{list}, {}", household.reference),
            assessment: *assessment,
            context,
            view,
            words,
        });
    }
    out
}

pub fn press(prepared: &Prepared) -> Press {
    let orders = Orders {
        run_id: "20260506-TESTRUN1".into(),
        issued: chrono::NaiveDate::from_ymd_opt(2026, 5, 6).expect("a day"),
        rows: GridRows::Named,
        kinds: vec![Kind::Client],
        employer: EmployerCost::LeftOut,
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

pub fn households(prepared: &Prepared) -> Vec<Household> {
    let (_, readings) = prepared
        .list
        .read(&prepared.schema, &prepared.options, &Rows::AsWritten)
        .expect("the tables open");
    readings
        .filter_map(|reading| reading.expect("a sorted list").ok())
        .collect()
}

/// The letters whose print is of this size, whatever their paper.
fn of_size(large: bool) -> impl Iterator<Item = &'static Letter> {
    LETTERS
        .iter()
        .filter(move |letter| (letter.context.delivery.print_size > 12) == large)
}

fn dense(text: &str) -> String {
    text.chars()
        .filter(|character| !character.is_whitespace())
        .collect()
}

#[test]
fn the_demo_lists_give_letters() {
    // 25 and 8 and 10 households, three with changed amounts, and one alone; two of the first are held.
    assert!(LETTERS.len() >= 47, "{} letters", LETTERS.len());
    assert!(of_size(true).count() >= 2, "large print is among them");
}

#[test]
fn two_pages_for_most_three_for_couples_four_at_most() {
    let mut counts = [0; PAGE_LIMIT + 1];
    for letter in of_size(false) {
        let pages = letter.words.len();
        assert!(pages <= PAGE_LIMIT, "{}: {pages} pages", letter.name);
        counts[pages] += 1;
    }
    assert!(counts[2] * 2 >= LETTERS.len(), "pages: {counts:?}");
    assert!(counts[4] <= 2, "pages: {counts:?}");
    for letter in of_size(true) {
        assert!(
            letter.words.len() <= 6,
            "{}: {} pages",
            letter.name,
            letter.words.len()
        );
    }
}

#[test]
fn the_length_is_foreseen() {
    // A wrong guess costs a second typesetting; half a page is too much.
    for letter in LETTERS.iter() {
        let guess = probable_length(&letter.view).ceil();
        let pages = letter.words.len() as f64;
        assert!((guess - pages).abs() <= 1.0, "{}: {guess}", letter.name);
    }
    let wrong = LETTERS
        .iter()
        .filter(|letter| probable_length(&letter.view).ceil() as usize != letter.words.len())
        .count();
    assert!(wrong * 10 <= LETTERS.len(), "{wrong} wrong guesses");
}

#[test]
fn every_page_has_its_number_and_the_first_one_its_cautions() {
    for letter in LETTERS.iter() {
        let count = letter.words.len();
        for (place, page) in letter.words.iter().enumerate() {
            let foot = format!(
                "Statement{}Page{}of{count}",
                dense(&letter.context.number),
                place + 1
            );
            assert!(
                dense(page).contains(&foot),
                "{}: page {}",
                letter.name,
                place + 1
            );
        }
        let first = match of_size(true).any(|large| large.name == letter.name) {
            // Large print may go on to the second page.
            true => letter.words[..2].concat(),
            false => letter.words[0].clone(),
        };
        // Nothing kept, or less, is said in other words.
        let says = |sentence: &str| dense(&first).contains(&dense(sentence));
        assert!(says("You keep") || says("You have"), "{}", letter.name);
        for sentence in [
            "This is an estimate",
            "not a decision and not a payslip",
            "Check with the office that runs each benefit or tax, and with an accredited or licensed adviser.",
            "This letter informs. It does not advise.",
        ] {
            assert!(
                dense(&first).contains(&dense(sentence)),
                "{}: {sentence}",
                letter.name
            );
        }
    }
}

#[test]
fn notes_stand_on_the_first_two_pages() {
    let mut notes = 0;
    for letter in of_size(false) {
        for name in &letter.assessment.notes {
            let text = &letter.context.labels[&format!("note.{name}")];
            let first = dense(&letter.words[..2].concat());
            assert!(first.contains(&dense(text)), "{}: {name}", letter.name);
            notes += 1;
        }
    }
    assert!(notes >= 10, "{notes} notes");
}

#[test]
fn nothing_of_the_code_shows() {
    for letter in LETTERS.iter() {
        let text = letter.words.join(" ");
        for sign in [
            "_", "{", "}", "GBP", "England_", "≤", "true", "false", " 0 hours", "-£",
        ] {
            assert!(!text.contains(sign), "{}: {sign}", letter.name);
        }
        // No name of a fact, a figure or a word of a choice that the labels do not turn into words.
        let missing = missing_labels(&letter.assessment, &letter.context.labels);
        assert!(missing.is_empty(), "{}: {missing:?}", letter.name);
        for fact in &letter.assessment.facts {
            assert!(
                !text.contains(&fact.value) || !fact.value.contains('_'),
                "{}: {} is {}",
                letter.name,
                fact.name,
                fact.value
            );
        }
        // Days are in words.
        let shape: String = text
            .replace(&letter.context.number, "")
            .chars()
            .map(|c| if c.is_ascii_digit() { '0' } else { c })
            .collect();
        assert!(
            !shape.contains("0000-00-00"),
            "{}: a day in digits",
            letter.name
        );
    }
}

#[test]
fn no_word_that_advises_or_that_we_avoid() {
    let avoided = [
        "baseline",
        "reform",
        "scenario",
        "policy",
        "entity",
        "variable",
        "parameter",
        "should",
        "ought",
        "recommend",
        "recommended",
        "best",
        "average",
        "ptr",
        "metr",
        "taper",
        "nan",
    ];
    for letter in LETTERS.iter() {
        let text = letter.words.join(" ").to_lowercase();
        assert!(!text.contains("better off"), "{}", letter.name);
        // The letter says of itself that it does not advise, and says no more of it.
        assert_eq!(
            text.matches("advise").count(),
            1 + text.matches("adviser").count(),
            "{}",
            letter.name
        );
        // The letter says of itself that it does not advise, in large print over two lines.
        let text = text.split_whitespace().collect::<Vec<_>>().join(" ");
        let text = text.replace("does not advise.", "");
        // The reason of a what-if is the list's own.
        let reasons = letter
            .assessment
            .amounts
            .iter()
            .map(|amount| &amount.changed_because);
        let text = reasons.fold(text, |text, reason| {
            if reason.is_empty() {
                text
            } else {
                text.replace(&reason.to_lowercase(), " ")
            }
        });
        for word in text.split(|c: char| !c.is_alphanumeric()) {
            assert!(!avoided.contains(&word), "{}: {word}", letter.name);
        }
    }
}

#[test]
fn sentences_are_short() {
    // At most 35 words in what the letter itself says, lists apart.
    for letter in LETTERS.iter() {
        let mut said = letter.view.estimate.clone();
        said.push(letter.view.caution.clone());
        for section in &letter.view.sections {
            said.push(section.measure.clone());
            said.extend(section.answers.iter().map(|answer| answer.detail.clone()));
            said.extend(section.turns.iter().map(|turn| turn.what.clone()));
            for part in section.parts.iter().chain(&section.help) {
                said.extend(part.lines.iter().map(|line| line.text.clone()));
            }
        }
        for text in said {
            for sentence in text.split(". ") {
                let words = sentence.split_whitespace().count();
                assert!(words <= 35, "{}: {sentence}", letter.name);
            }
        }
    }
}

#[test]
fn each_office_stands_once_and_only_where_it_is_needed() {
    for letter in LETTERS.iter() {
        let part = letter
            .view
            .closing
            .iter()
            .find(|part| part.heading.starts_with("Who to tell"))
            .expect("the part");
        let mut offices: Vec<&str> = part.lines.iter().map(|line| line.lead.as_str()).collect();
        let all = offices.len();
        offices.sort_unstable();
        offices.dedup();
        assert_eq!(offices.len(), all, "{}", letter.name);
        let has = |item: &str| {
            letter.assessment.earners.iter().any(|earner| {
                let points = earner.lines.iter().flat_map(|line| &line.grid);
                points.chain([&earner.not_in_work]).any(|point| {
                    let items = letter.assessment.items.iter().zip(&point.items);
                    items
                        .into_iter()
                        .any(|(info, sum)| info.name == item && sum.0 != 0)
                })
            })
        };
        for (item, office) in [
            ("scottish_child_payment", "Social Security Scotland:"),
            ("student_loan", "The Student Loans Company:"),
            ("free_prescriptions", "NHS Business Services Authority:"),
        ] {
            if !has(item) {
                assert!(!offices.contains(&office), "{}: {office}", letter.name);
            }
        }
    }
    let loans = LETTERS.iter().filter(|letter| {
        let text = letter.words.concat();
        text.contains("The Student Loans Company")
    });
    assert!(loans.count() >= 3, "those with loans are told");
}

#[test]
fn amounts_that_nobody_checked_are_marked() {
    let (mut marked, mut unmarked) = (0, 0);
    for letter in LETTERS.iter() {
        let unconfirmed = letter
            .assessment
            .amounts
            .iter()
            .any(|amount| !amount.confirmed);
        let text = dense(&letter.words.concat());
        assert_eq!(
            text.contains("Notconfirmed(*)"),
            unconfirmed,
            "{}",
            letter.name
        );
        assert_eq!(
            text.contains("Astar(*)marks"),
            unconfirmed,
            "{}",
            letter.name
        );
        if unconfirmed {
            // At the sums of the table, or at the axis where only other hours rest on them.
            let at_sums = text.contains("restsonamountsnotyetchecked");
            let at_axis = text.contains("amonth*");
            assert!(at_sums || at_axis, "{}", letter.name);
            marked += 1;
        } else {
            unmarked += 1;
        }
    }
    // Few amounts are left that nobody has read in their source.
    assert!(
        marked >= 2 && unmarked >= 10,
        "{marked} and {unmarked} letters"
    );
}

#[test]
fn folded_items_show_nowhere() {
    let letter = LETTERS
        .iter()
        .find(|letter| !letter.context.delivery.fold.is_empty())
        .expect("a household that folds items");
    let text = letter.words.join(" ");
    for name in &letter.context.delivery.fold {
        let label = &letter.context.labels[&format!("item.{name}")];
        assert!(
            !dense(&text).contains(&dense(label)),
            "{}: {label}: {text}",
            letter.name
        );
    }
    assert!(text.contains("other items"), "{text}");
}

#[test]
fn the_first_answer_is_the_difference_of_the_sums() {
    let mut answers = 0;
    for letter in LETTERS.iter() {
        for section in &letter.view.sections {
            let earner = letter
                .assessment
                .earners
                .iter()
                .find(|earner| {
                    section.heading.starts_with(&earner.name) || letter.view.sections.len() == 1
                })
                .expect("the earner");
            let costs = earner.lines.iter().any(|line| line.has_costs);
            let sum = |point: &Point| {
                if costs {
                    point.after_costs.0
                } else {
                    point.net.0
                }
            };
            let today = match (earner.has_job, earner.lines.first()) {
                (true, Some(line)) => &line.grid[line.own],
                (_, _) => &earner.not_in_work,
            };
            let lines = earner.lines.iter();
            let gains: Vec<i64> = lines
                .map(|line| sum(&line.grid[line.step_to]) - sum(today))
                .collect();
            for answer in section
                .answers
                .iter()
                .filter(|answer| answer.kept.starts_with("You keep"))
            {
                let digits: String = answer.kept.chars().filter(char::is_ascii_digit).collect();
                let mut pence: i64 = digits.parse().expect("a sum");
                if !answer.kept.contains('.') {
                    pence *= 100;
                }
                assert!(
                    gains.contains(&pence),
                    "{}: {} of {gains:?}",
                    letter.name,
                    answer.kept
                );
                answers += 1;
            }
        }
    }
    assert!(answers >= 60, "{answers} answers");
}
