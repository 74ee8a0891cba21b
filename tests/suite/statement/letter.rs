//! What a letter says, how long it is, and that it is the same every time.

#[path = "letter/further.rs"]
mod further;
#[path = "letter/later.rs"]
mod later;

use super::invented::{COUPLE, LONE_PARENT, context, couple, earner, lone_parent, minimal, tenant};
use hourworth::measures::{AmountUse, Assessment, FactUse, TargetHours};
use hourworth::num::{Hours, Money};
use hourworth::statement::{
    AnswerWeight, Detail, LetterContext, LetterView, PAGE_LIMIT, RowWeight, StatementError,
    TemplateSet, Typesetter, letter_view, missing_labels, probable_length, typeset,
};

fn typesetter() -> Typesetter {
    Typesetter::new(&TemplateSet::built_in()).expect("the built-in templates are sound")
}

fn view(assessment: &Assessment, context: &LetterContext) -> LetterView {
    letter_view(assessment, context, Detail::Full).expect("a view")
}

/// All words of a letter without spaces, one text a page.
fn words(assessment: &Assessment, context: &LetterContext) -> Vec<String> {
    let pages = typesetter()
        .words(&view(assessment, context), &context.texts)
        .expect("words");
    pages.into_iter().map(|page| dense(&page)).collect()
}

fn dense(text: &str) -> String {
    text.chars()
        .filter(|character| !character.is_whitespace())
        .collect()
}

#[track_caller]
fn says(pages: &[String], text: &str) {
    assert!(
        pages.concat().contains(&dense(text)),
        "not said: {text}\n{pages:#?}"
    );
}

fn all() -> Vec<(&'static str, Assessment)> {
    vec![
        ("tenant", tenant()),
        ("lone parent", lone_parent()),
        ("couple", couple()),
        ("minimal", minimal()),
    ]
}

#[test]
fn page_counts() {
    let mut typesetter = typesetter();
    for (name, assessment) in all() {
        for size in [12, 16, 18, 20] {
            let mut context = context();
            context.delivery.print_size = size;
            let made = typeset(&mut typesetter, &assessment, &context).expect(name);
            let most = match (name, size) {
                ("tenant" | "minimal", 12) => 2,
                ("lone parent", 12) => 3,
                (_, 12) => PAGE_LIMIT,
                (_, _) => 9,
            };
            assert!(
                made.pages <= most,
                "{name} at {size} points: {} pages",
                made.pages
            );
        }
    }
}

#[test]
fn the_same_input_gives_the_same_bytes() {
    let mut first = typesetter();
    let made: Vec<_> = all()
        .iter()
        .map(|(_, assessment)| typeset(&mut first, assessment, &context()).expect("bytes"))
        .collect();
    // Another typesetter, another order, and after many letters with sweeps in between.
    let mut second = typesetter();
    for round in 0..4 {
        for (position, (name, assessment)) in all().iter().enumerate().rev() {
            let again = typeset(&mut second, assessment, &context()).expect("bytes");
            assert!(again == made[position], "{name} differs in round {round}");
        }
    }
    let mut other = context();
    other.number = "7K2Q-H-0043".to_owned();
    let differs = typeset(&mut first, &tenant(), &other).expect("bytes");
    assert!(
        differs.bytes != made[0].bytes,
        "another number gives other bytes"
    );
}

#[test]
fn key_figures_of_the_tenant() {
    let (assessment, context) = (tenant(), context());
    let pages = words(&assessment, &context);
    let line = &assessment.earners[0].lines[0];
    let (today, then) = (&line.grid[line.own], &line.grid[line.step_to]);
    // The sums are the fixture's own; the letter must say their difference.
    let gain = then.net.0 - today.net.0;
    assert_eq!((gain, then.pay.0 - today.pay.0), (9000, 22_030));
    says(&pages[..1], "You keep £90 more a month");
    says(
        &pages[..1],
        "20 hours a week in place of 16. Pay goes up by £220.30: you keep £4.09 of each extra £10.",
    );
    // An hour less and more, from the fixture's own grid.
    let near: Vec<Money> = [1900, 2100]
        .iter()
        .filter_map(|hours| line.grid.iter().find(|point| point.hours.0 == *hours))
        .map(|point| point.net - today.net)
        .collect();
    assert_eq!(near, [Money(7064), Money(10_685)]);
    says(
        &pages[..1],
        "At 19 hours it would be £70.64 more, at 21 hours £106.85 more.",
    );
    says(&pages[..1], "Statement 7K2Q-H-0042");
    says(&pages[..1], "4 June 2026");
    says(&pages[..1], "Worked out for 1 June 2026");
    says(&pages[..1], "Harrowmere");
    says(&pages[..1], "31 March 2027");
    says(&pages[..1], "Ana Petrescu-Hale");
    says(&pages[..1], "not a decision and not a payslip");
    says(
        &pages,
        "If the job ends, you have £940 a month: £388.43 less than today.",
    );
    says(
        &pages,
        "At 12 hours a week you have £1,234.24: £94.19 less than today.",
    );
    says(&pages, "Papers seen: rent £690.00 a month.");
    says(
        &pages,
        "You told us: home rented privately; Ana: born 2 May 1991.",
    );
    says(
        &pages,
        "Assumed, as nobody told us: Ana: pension payment 5%.",
    );
    says(
        &pages,
        "Assumed to be no or none: student, caring, savings.",
    );
    says(
        &pages,
        "Left out: travel to work; one-off payments; loans on account of Household Support.",
    );
    says(
        &pages,
        "The Support Office: changes in pay, hours and childcare, by the end of the month in which they happen.",
    );
    // One office once, for all that it runs; none for what the household does not have.
    says(
        &pages,
        "The Tax Office: a wrong tax code; a second job, in its first week.",
    );
    assert_eq!(pages.concat().matches("TheTaxOffice").count(), 1);
    assert!(!pages.concat().contains("Thetownhall"), "no such help here");
    assert_eq!(pages.len(), 2);
    for (position, page) in pages.iter().enumerate() {
        says(
            std::slice::from_ref(page),
            &format!("Page {} of 2", position + 1),
        );
        says(std::slice::from_ref(page), "Statement 7K2Q-H-0042");
    }
}

#[test]
fn every_letter_defers_on_its_first_page() {
    for (name, assessment) in all() {
        let pages = words(&assessment, &context());
        for sentence in [
            "Check with the office that runs each benefit or tax, and with an accredited or licensed adviser.",
            "This letter informs. It does not advise.",
            "This is an estimate",
        ] {
            assert!(pages[0].contains(&dense(sentence)), "{name}: {sentence}");
        }
        says(
            &pages,
            "ask the offices named here and an accredited or licensed adviser",
        );
    }
}

#[test]
fn no_average_rate_no_advice_and_none_of_the_words_we_avoid() {
    let texts = TemplateSet::built_in();
    let (_, en) = texts
        .files()
        .find(|(name, _)| *name == "text/en.toml")
        .expect("texts");
    // The file copy is for the trade: there the rates have their names. The payroll page keeps to the letter's words.
    let mut of_copy = false;
    let mut all_words = vec![
        en.lines()
            .filter(|line| {
                if line.starts_with('[') {
                    of_copy = line.starts_with("[copy");
                }
                !of_copy && !line.starts_with('#')
            })
            .collect::<String>(),
    ];
    all_words.extend(all().iter().map(|(_, assessment)| {
        typesetter()
            .words(&view(assessment, &context()), &context().texts)
            .expect("words")
            .join(" ")
    }));
    for text in all_words {
        let text = text.to_lowercase();
        for word in [
            "baseline",
            "reform",
            "scenario",
            "policy",
            "entity",
            "variable",
            "parameter",
            "better off",
            "should",
            "recommend",
            "participation",
            "average",
            "best",
            "worth",
            "ought",
            "ptr",
            "metr",
            "-£0",
            "−£0.00",
            "nan",
        ] {
            let found = text
                .split(|c: char| !c.is_alphanumeric() && !"-−£. ".contains(c))
                .any(|part| {
                    part.split(' ').any(|single| single == word)
                        || (word.contains(' ') && part.contains(word))
                });
            assert!(!found, "`{word}` in the letter");
        }
    }
}

#[test]
fn the_table_adds_up() {
    let pence = |text: &str| -> i64 {
        let digits: String = text.chars().filter(char::is_ascii_digit).collect();
        let size: i64 = digits.parse().unwrap_or(0);
        if text.starts_with('−') { -size } else { size }
    };
    let mut totals = 0;
    for (name, assessment) in all() {
        for section in view(&assessment, &context()).sections {
            for table in section.tables {
                for column in 0..table.columns.len() {
                    let mut sum = 0;
                    for row in &table.rows {
                        match row.weight {
                            RowWeight::Plain => sum += pence(&row.cells[column]),
                            RowWeight::Total => {
                                assert_eq!(sum, pence(&row.cells[column]), "{name}: {}", row.name);
                                totals += 1;
                            }
                        }
                    }
                }
            }
        }
    }
    assert!(totals > 20, "{totals} totals");
}

#[test]
fn childcare_makes_the_first_answer_after_costs() {
    let (assessment, context) = (lone_parent(), context());
    let view = view(&assessment, &context);
    let section = &view.sections[0];
    let line = &assessment.earners[0].lines[0];
    let gain = line.grid[line.step_to].after_costs.0 - line.grid[line.own].after_costs.0;
    assert_eq!(gain, 7920, "the fixture's own difference");
    // The offer is what the household asks about; four hours more stand beside it.
    let [offer, more] = section.answers.as_slice() else {
        panic!("{:?}", section.answers);
    };
    assert_eq!(
        (offer.step.as_str(), offer.about.as_str(), offer.weight),
        ("Offer", "School kitchen, term time", AnswerWeight::Lead)
    );
    assert_eq!(
        (more.step.as_str(), more.kept.as_str(), more.weight),
        (
            "4 hours more",
            "You keep £79.20 more a month",
            AnswerWeight::Beside
        )
    );
    // Said once, with what is taken off.
    assert_eq!(
        section.measure,
        "“You keep” is after costs of working. These are taken off: Childcare."
    );
    let pages = words(&assessment, &context);
    assert_eq!(pages.concat().matches("Thesearetakenoff").count(), 1);
    assert!(
        section
            .chart
            .alt
            .starts_with("Line chart: Net income after costs of working")
    );
}

#[test]
fn falls_on_the_way_come_first_and_say_where_they_are_regained() {
    let section = &view(&lone_parent(), &context()).sections[0];
    assert!(section.turns.len() <= 5);
    let fall = section
        .turns
        .iter()
        .find(|turn| turn.place == "23 hours")
        .expect("the fall");
    assert_eq!(
        fall.what,
        "Local Tax Help ends. You lose £94. You are back at that sum from 29.65 hours on."
    );
    assert_eq!(fall.pay, "Pay £1,266.76");
}

#[test]
fn many_falls_are_cut_to_five_and_the_rest_is_counted() {
    let mut assessment = lone_parent();
    let line = &mut assessment.earners[0].lines[0];
    let fall = line
        .turns
        .iter()
        .find(|turn| turn.size.0 < 0)
        .expect("a fall")
        .clone();
    for more in 1..=6 {
        let mut turn = fall.clone();
        turn.hours = Hours(fall.hours.0 - more * 20);
        turn.at = turn.hours.as_fraction();
        line.turns.push(turn);
    }
    line.turns.sort_by_key(|turn| turn.hours);
    let section = &view(&assessment, &context()).sections[0];
    assert_eq!(section.turns.len(), 5);
    assert!(
        section
            .turns
            .iter()
            .all(|turn| turn.what.contains("You lose £94"))
    );
    assert!(
        section.turns_note.contains("a list of "),
        "{}",
        section.turns_note
    );
}

#[test]
fn passported_help_lost_and_kept() {
    let offers = [("Depot", 1800, 127_100)];
    let mut home = LONE_PARENT.clone();
    home.meals = Some(17);
    let one = earner(&home, 0, "Ana", Some((1600, 127_100)), &offers);
    let lost = super::invented::assessment(&home, vec![one]);
    let pages = words(&lost, &context());
    says(
        &pages,
        "Free school meals: You have it today. It ends at 17 hours a week (pay £936.30).",
    );
    home.meals = Some(40);
    let one = earner(&home, 0, "Ana", Some((1600, 127_100)), &offers);
    let kept = super::invented::assessment(&home, vec![one]);
    says(
        &words(&kept, &context()),
        "Free school meals: You have it today and at the steps shown.",
    );
}

#[test]
fn what_the_employer_pays_stands_apart_from_every_sum() {
    let offers = [("Depot", 1800, 127_100)];
    let mut home = LONE_PARENT.clone();
    let one = earner(&home, 0, "Ana", Some((1600, 127_100)), &offers);
    let without = view(&super::invented::assessment(&home, vec![one]), &context());
    home.employer = Some(61);
    let one = earner(&home, 0, "Ana", Some((1600, 127_100)), &offers);
    let with = view(&super::invented::assessment(&home, vec![one]), &context());
    let rows = |view: &LetterView| -> Vec<Vec<String>> {
        let tables = view.sections[0].tables.iter();
        tables
            .flat_map(|table| table.rows.iter().map(|row| row.cells.clone()))
            .collect()
    };
    assert_eq!(rows(&without), rows(&with));
    assert_eq!(without.sections[0].bars, with.sections[0].bars);
    let help = &with.sections[0].help;
    let part = help
        .iter()
        .find(|part| part.heading == "Your employer pays")
        .expect("a part on the employer");
    assert_eq!(
        part.lines[0].text,
        "£61.00 today; 4 hours more: £61.00; Offer: £61.00."
    );
    assert!(
        without.sections[0]
            .help
            .iter()
            .all(|part| part.heading != "Your employer pays")
    );
}

#[test]
fn what_is_due_and_not_claimed_is_said_once() {
    let mut told = lone_parent();
    let position = told
        .items
        .iter()
        .position(|item| item.name == "local_tax_help")
        .expect("the item");
    told.unclaimed.push(hourworth::measures::Unclaimed {
        item: position,
        due: Money(9_400),
    });
    says(
        &words(&told, &context()),
        "Local Tax Help: about £94 a month looks due, and it is not claimed.",
    );
    let mut folding = context();
    folding.delivery.fold = vec!["local_tax_help".to_owned()];
    assert!(
        !words(&told, &folding).concat().contains("is not claimed"),
        "what is folded is not named"
    );
}

#[test]
fn the_first_with_an_offer_leads_and_each_offer_has_its_answer() {
    let context = context();
    let view = view(&couple(), &context);
    let headings: Vec<&str> = view
        .sections
        .iter()
        .map(|section| section.heading.as_str())
        .collect();
    assert_eq!(headings, ["Ana’s hours", "Ben’s hours"]);
    let steps: Vec<&str> = view.sections[0]
        .answers
        .iter()
        .map(|answer| answer.about.as_str())
        .collect();
    assert_eq!(steps, ["Bakery, mornings", "Care home, nights"]);
    let heads: Vec<&str> = view.sections[0].tables[0]
        .columns
        .iter()
        .map(|column| column.name.as_str())
        .collect();
    assert_eq!(heads, ["Today, not in work", "Offer A", "Offer B"]);
    // Not in work today: the rate over the whole step would be an average, so the letter gives the one from there on.
    assert!(
        view.sections[0].answers[0]
            .detail
            .contains("From there, you keep £")
    );
    let mut only = context.clone();
    only.delivery.only = Some(1);
    let alone = letter_view(&couple(), &only, Detail::Full).expect("a view");
    assert_eq!(alone.sections.len(), 1);
    let pages = words(&couple(), &only);
    assert!(
        !pages.concat().contains("Bakery"),
        "the other's offers are not printed"
    );
    assert!(
        !pages.concat().contains("2May1991"),
        "the other's facts are not printed"
    );
}

#[test]
fn a_lower_offer_and_a_level_one() {
    let offers = [("Shorter week", 1000, 127_100), ("Same pay", 1600, 127_100)];
    let one = earner(&COUPLE, 0, "", Some((1600, 127_100)), &offers);
    let view = view(&super::invented::assessment(&COUPLE, vec![one]), &context());
    let answers = &view.sections[0].answers;
    let [lower, level] = answers.as_slice() else {
        panic!("{answers:?}");
    };
    assert!(lower.kept.contains("less a month"), "{}", lower.kept);
    assert!(
        lower.detail.contains("Pay goes down by £330.46"),
        "{}",
        lower.detail
    );
    // Sixteen hours at this wage are today's own, so they need as many.
    assert!(
        lower
            .detail
            .contains("At this wage, today’s net income needs 16 hours a week."),
        "{}",
        lower.detail
    );
    assert_eq!(level.kept, "You have the same each month");
}

#[test]
fn a_sum_to_reach() {
    let mut assessment = tenant();
    let mut said = |first, stays| {
        assessment.earners[0].target = Some(TargetHours {
            sum: Money(150_000),
            first,
            stays,
        });
        let answer = view(&assessment, &context()).sections[0].answers[1].clone();
        (answer.kept, answer.detail)
    };
    assert_eq!(
        said(Some(Hours(2775)), Some(Hours(3000))),
        (
            "27.75 hours a week bring £1,500 a month".to_owned(),
            "From 30 hours a week on, it stays at £1,500 or more.".to_owned()
        )
    );
    assert_eq!(said(None, None).0, "No hours up to 48 bring £1,500 a month");
    assert!(said(Some(Hours(2775)), None).1.contains("falls below"));
    assert_eq!(
        said(Some(Hours(2775)), Some(Hours(2775))).1,
        "It stays so with more hours."
    );
}

fn amount(name: &str, value: &str, part: &str) -> AmountUse {
    AmountUse {
        name: name.into(),
        value: value.into(),
        from: "2026-04-06".into(),
        to: String::new(),
        source: "Invented Gazette".into(),
        locator: "p. 2".into(),
        confirmed: true,
        changed_because: String::new(),
        part: part.into(),
    }
}
