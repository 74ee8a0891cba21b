//! A made-up language: English with other signs for all letters, words two fifths longer, from right to left, with the decimal comma.
//! Whatever is still written in plain letters was never a fixed word or a label.

use super::*;
use crate::suite::statement::invented;
use hourworth::measures::{AmountUse, Assessment, FactUse, Unclaimed};
use hourworth::num::Money;
use hourworth::statement::{Detail, Evidence, FactShape, letter_view, pay_views};
use std::collections::BTreeMap;

const PLAIN: &str = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ";
const OTHER: &str = "áƀçđéƒğĥíĵķļṁñóṗɋŕšţúṽŵẋýžÁƁÇĐÉƑĞĤÍĴĶĻṀÑÓṖɊŔŠŢÚṼŴẊÝŽ";

/// English words in the made-up language. What stands in brackets is no word.
fn made_up(text: &str) -> String {
    let (mut out, mut inside, mut letters) = (String::new(), false, 0);
    for sign in text.chars() {
        match sign {
            '{' => inside = true,
            '}' => inside = false,
            _ => {}
        }
        let place = PLAIN.chars().position(|plain| plain == sign);
        let Some(place) = place.filter(|_| !inside) else {
            out.push(sign);
            letters = 0;
            continue;
        };
        let other = OTHER.chars().nth(place).expect("as many");
        out.push(other);
        letters += 1;
        // Two letters for each fifth letter and for each second one of five: two fifths more.
        if letters % 5 == 2 || letters % 5 == 4 {
            out.extend(other.to_lowercase());
        }
    }
    out
}

/// The English texts in the made-up language.
fn made_up_texts() -> String {
    fn change(table: &mut toml::Table) {
        for (key, value) in table.iter_mut() {
            match value {
                toml::Value::Table(inner) if key == "language" => {
                    // Greek has the comma and lists without a word in them.
                    inner.insert("locale".into(), "el".into());
                    inner.insert("direction".into(), "rtl".into());
                }
                toml::Value::Table(inner) => change(inner),
                toml::Value::String(text) => *text = made_up(text),
                other => panic!("{other}"),
            }
        }
    }
    let built_in = TemplateSet::built_in();
    let (_, text) = built_in
        .files()
        .find(|(name, _)| *name == "text/en.toml")
        .expect("the file");
    let mut table: toml::Table = text.parse().expect("it is TOML");
    // The file copy is in English only.
    table.remove("copy").expect("the tables of the file copy");
    change(&mut table);
    table.to_string()
}

const TAG: &str = "qps";

/// A context in the made-up language: labels, names, places.
fn context(size: u8) -> LetterContext {
    let mut context = invented::context();
    let set = TemplateSet::built_in().with(format!("text/{TAG}.toml"), made_up_texts());
    let faults = set.language_faults();
    assert!(faults.is_empty(), "{faults:#?}");
    context.texts = set.texts(TAG).expect("sound texts");
    context.english = Arc::new(context.labels.clone());
    let own = [
        ("title", "Invented Country, core"),
        ("area", "Harrowmere"),
        ("part.Household Support", "Household Support"),
        ("amount.support_rate", "the rate of support"),
        ("note.hint", "Help can end."),
        ("what.local_tax_help", "Help with local tax."),
        ("item.employer_contribution", "Contribution of the employer"),
        ("word.yes", "yes"),
    ];
    let labels = context.labels.iter();
    let mut labels: BTreeMap<String, String> = labels
        .map(|(key, text)| (key.clone(), made_up(text)))
        .collect();
    labels.extend(own.map(|(key, text)| (key.to_owned(), made_up(text))));
    context.labels = labels;
    context.number = "2026-0042".to_owned();
    context.delivery.print_size = size;
    for line in &mut context.delivery.address {
        *line = made_up(line);
    }
    context.office.name = made_up(&context.office.name);
    for line in &mut context.office.lines {
        *line = made_up(line);
    }
    let money = FactShape::Money("month".to_owned());
    context.facts.insert("household.rent".to_owned(), money);
    context
}

/// A household with everything that a letter can say, with names in the made-up language.
fn full(mut assessment: Assessment) -> Assessment {
    for earner in &mut assessment.earners {
        earner.name = made_up(&earner.name);
        for line in &mut earner.lines {
            line.terms.offer = made_up(&line.terms.offer);
        }
    }
    for fact in &mut assessment.facts {
        fact.of = made_up(&fact.of);
        if fact.name == "rent" {
            fact.value = "1690.50".to_owned();
        }
        if fact.name == "savings" {
            fact.value = "0.00".to_owned();
        }
    }
    for number in 0..20 {
        assessment.facts.push(FactUse {
            kind: "household".into(),
            of: String::new(),
            name: "student".into(),
            value: "yes".into(),
            known: if number == 0 { 't' } else { 'x' },
        });
    }
    for (name, changed) in [("support_rate", "das Amt fragt"), ("other", "")] {
        assessment.amounts.push(AmountUse {
            name: name.into(),
            value: "62.5 percent".into(),
            changed_because: made_up(changed),
            part: "Household Support, award".to_owned(),
            confirmed: false,
            ..assessment.amounts.first().cloned().unwrap_or(AmountUse {
                name: String::new(),
                value: String::new(),
                from: String::new(),
                to: String::new(),
                source: String::new(),
                locator: String::new(),
                confirmed: false,
                changed_because: String::new(),
                part: String::new(),
            })
        });
    }
    let due = assessment
        .items
        .iter()
        .position(|item| item.name == "support");
    if let Some(item) = due {
        assessment.unclaimed.push(Unclaimed {
            item,
            due: Money(123_450),
        });
    }
    assessment.notes = vec!["hint".into()];
    assessment
}

fn assessments() -> Vec<(&'static str, Assessment)> {
    let mut home = invented::LONE_PARENT.clone();
    home.employer = Some(61);
    let offers = [
        ("Depot", 1800, 127_100),
        ("School kitchen, term time", 2400, 134_500),
    ];
    let one = invented::earner(&home, 0, "Ana", Some((1600, 127_100)), &offers);
    vec![
        ("tenant", full(invented::tenant())),
        ("lone parent", full(invented::lone_parent())),
        ("couple", full(invented::couple())),
        ("employer", full(invented::assessment(&home, vec![one]))),
        ("minimal", full(invented::minimal())),
    ]
}

#[test]
fn the_made_up_words_are_longer() {
    assert_eq!(made_up("{hours|hours} more"), "{hours|hours} ṁóóŕéé");
    let english = "You keep nothing of each extra part, and the letter says so";
    let longer = made_up(english).chars().count() * 100 / english.chars().count();
    assert!((125..=145).contains(&longer), "{longer} percent");
}

/// Every fixed word goes through the texts, every name through the labels, every number through the language.
#[test]
fn no_plain_letter_and_no_point_is_left() {
    let typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    for (name, assessment) in assessments() {
        for detail in [
            Detail::Full,
            Detail::Plain,
            Detail::Short,
            Detail::Bare,
            Detail::Brief,
        ] {
            let context = context(12);
            let view = letter_view(&assessment, &context, detail).expect(name);
            let pages = typesetter.words(&view, &context.texts).expect(name);
            let alts = view.sections.iter().flat_map(|section| {
                [section.chart.alt.clone(), section.bars.alt.clone()]
                    .into_iter()
                    .chain(section.tables.iter().map(|table| table.summary.clone()))
            });
            for text in pages.iter().cloned().chain(alts) {
                in_other_signs(name, &text);
            }
        }
    }
}

/// Checks that a text has no plain letter and no decimal point.
#[track_caller]
fn in_other_signs(name: &str, text: &str) {
    // The letters of offers are the same in every language.
    let plain = text
        .split(|sign: char| !sign.is_alphabetic())
        .filter(|word| word.chars().any(|sign| sign.is_ascii_alphabetic()))
        .find(|word| !["A", "B"].contains(word));
    assert_eq!(plain, None, "{name}: {text}");
    let signs: Vec<char> = text.chars().collect();
    for (at, part) in signs.windows(3).enumerate() {
        let point = part[1] == '.' && part[0].is_ascii_digit() && part[2].is_ascii_digit();
        // In groups of three it parts thousands.
        let digits = signs[at + 2..]
            .iter()
            .take_while(|sign| sign.is_ascii_digit());
        assert!(!point || digits.count() == 3, "{name}: {text}");
    }
}

/// The same of payroll pages, which are mirrored as letters are.
#[test]
fn payroll_pages_have_no_plain_letter_and_room() {
    let typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    let template = Kind::Payroll.template();
    let (mut pages, mut texts_seen) = (0, String::new());
    for (name, mut assessment) in assessments() {
        assessment.reference = made_up(&assessment.reference);
        for size in [12, 16, 20] {
            let context = context(size);
            let evidence = Evidence::default();
            let views = pay_views(&assessment, &context, &evidence, EmployerCost::Shown);
            for (_, view) in views.expect(name) {
                let value = serde_json::to_value(&view).expect("plain values");
                let value = minijinja::Value::from(minijinja::value::Serde(value));
                let words = typesetter.words_of(template, &value, &context.texts);
                let summaries = view.tables.iter().map(|table| table.summary.clone());
                for text in words.expect(name).into_iter().chain(summaries) {
                    in_other_signs(name, &text);
                    texts_seen.push_str(&text);
                }
                let crowded = typesetter.crowded(template, &view, &context.texts);
                let crowded = crowded.expect(name);
                assert!(crowded.is_empty(), "{name} at {size} points: {crowded:#?}");
                pages += 1;
            }
        }
    }
    assert!(pages >= 15, "{pages} pages");
    for said in ["Basic pay", "Take-home pay", "Pay and contract"] {
        let said = dense(&made_up(said));
        assert!(dense(&texts_seen).contains(&said), "not said: {said}");
    }
}

#[test]
fn longer_words_from_right_to_left_have_room() {
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    for (name, assessment) in assessments() {
        for (size, most) in [(12, PAGE_LIMIT), (16, 9), (20, 16)] {
            let context = context(size);
            let (made, view) =
                typeset_with_view(&mut typesetter, &assessment, &context).expect(name);
            let crowded = typesetter
                .crowded("client/letter.typ", &view, &context.texts)
                .expect(name);
            assert!(crowded.is_empty(), "{name} at {size} points: {crowded:#?}");
            assert!(
                made.pages <= most,
                "{name} at {size} points: {}",
                made.pages
            );
        }
    }
}

/// The page is mirrored: names stand at the right of what they name, and the sums of a table at the left of its names.
#[test]
fn the_page_is_mirrored() {
    let typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    let (_, assessment) = assessments().swap_remove(1);
    let context = context(12);
    let view = letter_view(&assessment, &context, Detail::Full).expect("a view");
    let section = &view.sections[0];
    let find = |text: &str| {
        let placed = typesetter
            .places("client/letter.typ", &view, &context.texts)
            .expect("pages");
        let found = placed
            .into_iter()
            .find(|(words, _)| dense(words) == dense(text));
        found.map(|(_, left)| left)
    };
    let step = find(&section.answers[1].step).expect("the step's name");
    let kept = find(&section.answers[1].kept).expect("what is kept");
    assert!(step > kept, "{step} and {kept}");
    let row = &section.tables[0].rows[0];
    let (name, cell) = (find(&row.name), find(&row.cells[1]));
    assert!(name > cell, "{name:?} and {cell:?}");
    // The window of an envelope stays where it is.
    let address = find(&view.address[0]).expect("the address");
    assert!((56.0..58.0).contains(&address), "{address}");
}
