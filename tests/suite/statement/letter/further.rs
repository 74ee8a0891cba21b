//! Further tests of the letter: what is said, left out and held.

use super::*;

#[test]
fn changed_amounts_are_named_with_their_reason() {
    let mut assessment = tenant();
    let reasons = [
        ("work_allowance", "1411.00 GBP a month", "£1,411 a month"),
        ("support_rate", "60 percent", "60%"),
    ];
    for (name, value, _) in reasons {
        assessment.amounts.push(AmountUse {
            changed_because: "the council asks what it would do".into(),
            ..amount(name, value, "Household Support")
        });
    }
    let mut context = context();
    context
        .labels
        .insert("amount.support_rate".into(), "the rate of support".into());
    let pages = words(&assessment, &context);
    for (name, (_, _, value)) in ["Work allowance", "The rate of support"]
        .iter()
        .zip(reasons)
    {
        says(
            &pages[..1],
            &format!("{name} was set to {value}, because the council asks what it would do."),
        );
    }
    says(
        &pages[..1],
        "It shows what they would mean with changed amounts.",
    );
    assert!(!words(&tenant(), &context).concat().contains("Whatif"));
}

#[test]
fn unconfirmed_amounts_are_counted_and_marked_where_they_were_used() {
    let mut assessment = tenant();
    for name in ["first", "second"] {
        assessment.amounts.push(AmountUse {
            confirmed: false,
            ..amount(name, "411.00 GBP a month", "Household Support, award")
        });
    }
    let context = context();
    let pages = words(&assessment, &context);
    says(
        &pages,
        "Not confirmed (*): amounts of Household Support (2), not yet checked against their source.",
    );
    says(&pages[..1], "You keep £90* more a month");
    says(
        &pages[..1],
        "A star (*) marks sums that rest on amounts of the law not yet checked.",
    );
    says(&pages[..1], "Net income a month*");
    says(&pages, "you have £940* a month");
    let view = view(&assessment, &context);
    let table = &view.sections[0].tables[0];
    let starred: Vec<&str> = table
        .rows
        .iter()
        .map(|row| row.name.as_str())
        .filter(|name| name.ends_with('*'))
        .collect();
    // Only the row that rests on them; pay, tax and pension do not.
    assert_eq!(starred, ["Household Support*"]);
    assert!(table.note.starts_with("* rests on amounts"));
    let turn = |words: &str| {
        let turns = &view.sections[0].turns;
        let found = turns.iter().find(|turn| turn.what.contains(words));
        found.map(|turn| turn.place.ends_with('*'))
    };
    // Every turn here changes what support is paid.
    assert_eq!(turn("Income Tax starts"), Some(true));
    let plain = words_of_all(&tenant());
    assert!(!plain.contains('*'), "nothing is marked without a reason");
    assert!(!plain.contains("Notconfirmed"));
}

/// All words of a letter in one text.
fn words_of_all(assessment: &Assessment) -> String {
    words(assessment, &context()).concat()
}

#[test]
fn folded_items_are_not_named() {
    let mut context = context();
    context.delivery.fold = vec!["local_tax_help".to_owned()];
    context
        .labels
        .insert("note.hint".into(), "Local Tax Help can end.".into());
    let mut assessment = lone_parent();
    assessment.notes = vec!["hint".into()];
    assessment.facts.push(FactUse {
        kind: "household".into(),
        of: String::new(),
        name: "claims_local_tax_help".into(),
        value: "yes".into(),
        known: 't',
    });
    assessment.amounts.push(AmountUse {
        confirmed: false,
        ..amount("help", "94 GBP a month", "Local Tax Help")
    });
    let said = words(&assessment, &context).concat();
    assert!(!said.to_lowercase().contains("localtaxhelp"), "{said}");
    assert!(!said.contains("Thetownhall"), "{said}");
    assert!(said.contains(&dense("other items")));
    // The same letter without folding names it in each of these places.
    context.delivery.fold.clear();
    let said = words(&assessment, &context).concat();
    for text in [
        "Local Tax Help ends",
        "claims local tax help",
        "Local Tax Help can end.",
        "Local Tax Help (1)",
        "The town hall:",
        "second homes",
    ] {
        assert!(said.contains(&dense(text)), "{text}: {said}");
    }
}

#[test]
fn a_missing_label_has_a_fallback_and_is_listed() {
    let (assessment, mut context) = (lone_parent(), context());
    assert_eq!(
        missing_labels(&assessment, &context.labels),
        Vec::<String>::new()
    );
    for key in ["item.support", "fact.rent", "turn.local_tax_help"] {
        context.labels.remove(key);
    }
    context
        .labels
        .retain(|key, _| !key.starts_with("office.") && !key.starts_with("left_out"));
    let missing = missing_labels(&assessment, &context.labels);
    assert_eq!(
        missing,
        [
            "fact.rent",
            "item.support",
            "turn.local_tax_help",
            "left_out*",
            "office.*"
        ]
    );
    let pages = words(&assessment, &context);
    says(&pages, "Local Tax Help changes. You lose £94.");
    says(&pages, "support");
    says(&pages, "Tell each office about a change in pay");
}

#[test]
fn a_name_that_cannot_be_set_is_reported_with_its_field() {
    let mut context = context();
    context.delivery.address[0] = "Ana 家".to_owned();
    let fault = typeset(&mut typesetter(), &tenant(), &context);
    assert_eq!(
        fault,
        Err(StatementError::Glyph {
            field: "address[0]".to_owned(),
            character: '家'
        })
    );
}

#[test]
fn typed_signs_show_as_typed_in_the_letter() {
    let mut context = context();
    let odd = "#strong[x] *y* \\ \"z\" $1 <a> @b // c";
    context.delivery.address[1] = odd.to_owned();
    context
        .labels
        .insert("item.support".into(), "Support & #co".into());
    let mut assessment = lone_parent();
    assessment.earners[0].lines[1].terms.offer = "[Job] \"A\" #1".to_owned();
    let pages = words(&assessment, &context);
    says(&pages, odd);
    says(&pages, "Support & #co");
    says(&pages, "[Job] \"A\" #1");
}

#[test]
fn a_long_letter_is_shortened_not_refused() {
    let offers = [
        ("Bakery, mornings", 2000, 128_000),
        ("Care home, nights and every second weekend", 3000, 141_250),
        ("Garden centre", 2400, 131_000),
        ("Ferry office", 2600, 133_000),
        ("Rope works", 2800, 129_000),
    ];
    let first = earner(&COUPLE, 0, "Ana", Some((800, 127_100)), &offers);
    let second = earner(&COUPLE, 1, "Ben", Some((3000, 127_100)), &offers);
    let mut assessment = super::super::invented::assessment(&COUPLE, vec![first, second]);
    for number in 0..60 {
        assessment.facts.push(FactUse {
            kind: "adult".into(),
            of: "Ben".into(),
            name: format!("further_fact_number_{number}"),
            value: if number % 4 == 0 {
                "yes".into()
            } else {
                "no".into()
            },
            known: 'a',
        });
    }
    let mut typesetter = typesetter();
    let context = context();
    let full = view(&assessment, &context);
    let long = typesetter.letter(&full, &context.texts, context.issued);
    let long = long.map(|made| made.pages);
    assert!(
        matches!(
            long,
            Err(StatementError::TooLong {
                pages: 5..,
                limit: PAGE_LIMIT
            })
        ),
        "{long:?}"
    );
    let made = typeset(&mut typesetter, &assessment, &context).expect("a shorter letter");
    assert!(made.pages <= PAGE_LIMIT);
}

#[test]
fn each_detail_says_less_than_the_one_before() {
    let mut assessment = lone_parent();
    for number in 0..20 {
        assessment.facts.push(FactUse {
            kind: "adult".into(),
            of: "Ana".into(),
            name: format!("further_fact_{number}"),
            value: "no".into(),
            known: 'a',
        });
    }
    let context = context();
    let lengths: Vec<(usize, f64)> = [
        Detail::Full,
        Detail::Plain,
        Detail::Short,
        Detail::Bare,
        Detail::Brief,
    ]
    .iter()
    .map(|detail| {
        let view = letter_view(&assessment, &context, *detail).expect("a view");
        let pages = typesetter().words(&view, &context.texts).expect("words");
        (pages.concat().len(), probable_length(&view))
    })
    .collect();
    for pair in lengths[..4].windows(2) {
        assert!(
            pair[1].0 < pair[0].0 && pair[1].1 < pair[0].1,
            "{lengths:?}"
        );
    }
    assert!(lengths[4].0 < lengths[1].0, "{lengths:?}");
}

#[test]
fn an_address_that_the_window_does_not_show_is_refused() {
    let mut context = context();
    let mut refused = |address: &[&str]| {
        context.delivery.address = address.iter().map(|line| (*line).to_owned()).collect();
        match letter_view(&tenant(), &context, Detail::Full) {
            Err(error @ StatementError::Room { .. }) => error.to_string(),
            Err(other) => panic!("{other}"),
            Ok(_) => "none".to_owned(),
        }
    };
    let six = [
        "Ana Petrescu-Hale",
        "Flat 2",
        "18 Tanners Row",
        "Lower Side",
        "Harrowmere",
        "HX0 4ZZ",
    ];
    assert_eq!(refused(&six), "none");
    let seven = ["A", "B", "C", "D", "E", "F", "G"];
    assert_eq!(
        refused(&seven),
        "`address` needs 7 lines, expected at most 6, which the window of an envelope shows"
    );
    // A line that is too wide takes two.
    let mut wide = six;
    wide[2] = "The Old Fulling Mill and Dye House, 18 Tanners Row";
    assert!(
        refused(&wide).contains("needs 7 lines"),
        "{}",
        refused(&wide)
    );
    let word = "Llanfairpwllgwyngyllgogerychwyrndrobwllllantysiliogogogoch";
    assert!(
        refused(&["Ana", word]).starts_with("`address[1]` needs more than 84 mm"),
        "{}",
        refused(&["Ana", word])
    );
}

#[test]
fn an_office_with_many_lines_stays_off_the_address() {
    let mut context = context();
    context.office.lines = (1..=9)
        .map(|line| format!("Line {line} of the office"))
        .collect();
    let view = view(&tenant(), &context);
    assert_eq!((view.office_lines.len(), view.office_more.len()), (5, 4));
    let pages = words(&tenant(), &context);
    says(&pages[..1], "Line 9 of the office");
    context.delivery.address.clear();
    let view = super::view(&tenant(), &context);
    assert_eq!((view.office_lines.len(), view.office_more.len()), (9, 0));
}

#[test]
fn another_currency_has_its_own_ten() {
    let mut context = context();
    context.currency = "EUR".to_owned();
    let said = words(&tenant(), &context).concat();
    assert!(said.contains("ofeachextra€10"), "{said}");
    assert!(said.contains("Wherethenext€10ofpaygoes"), "{said}");
    // The one pound left is the rent, which the fixture gives as text.
    assert_eq!(said.matches('£').count(), 1, "{said}");
}

#[test]
fn turns_are_said_with_their_direction() {
    let mut context = context();
    let ways = [
        ("turn.income_tax.starts", "Income Tax begins"),
        ("turn.income_tax.ends", "Income Tax is over"),
        ("turn.support.ends", "Household Support is over"),
        ("turn.support.starts", "Household Support begins to fall"),
    ];
    for (key, text) in ways {
        context.labels.insert(key.to_owned(), text.to_owned());
    }
    let said = words(&tenant(), &context).concat();
    // The nearer words win, where the slope of the item was nothing before.
    assert!(
        said.contains("19.53hoursPay£1,075.26IncomeTaxbegins."),
        "{said}"
    );
    assert!(!said.contains("IncomeTaxisover"), "{said}");
    // Far more pay: the benefit's slope becomes nothing.
    let offers = [("Depot, all week", 4700, 127_100)];
    let one = earner(&COUPLE, 0, "", Some((4000, 127_100)), &offers);
    let said = words(
        &super::super::invented::assessment(&COUPLE, vec![one]),
        &context,
    )
    .concat();
    assert!(!said.contains("HouseholdSupportbeginstofall"), "{said}");
}

#[test]
fn the_pdf_is_tagged_and_says_its_standards() {
    let made = typeset(&mut typesetter(), &couple(), &context()).expect("bytes");
    let text = String::from_utf8_lossy(&made.bytes).into_owned();
    for part in [
        "<pdfuaid:part>1</pdfuaid:part>",
        "<pdfaid:part>2</pdfaid:part>",
        "<pdfaid:conformance>A</pdfaid:conformance>",
        "What you keep if one of you works more",
        "/MarkInfo",
    ] {
        assert!(text.contains(part), "no {part}");
    }
}

#[test]
fn letter_paper_and_no_address() {
    let mut context = context();
    context.delivery.paper = "us-letter".to_owned();
    context.delivery.address.clear();
    let pages = words(&tenant(), &context);
    says(&pages[..1], "Statement for Ana");
    let made = typeset(&mut typesetter(), &tenant(), &context).expect("bytes");
    assert!(made.pages <= 3);
}

/// Two-page letters a second in one process: run with `--nocapture` to read the figure.
#[test]
fn a_letter_is_quick() {
    let (mut typesetter, assessment) = (typesetter(), tenant());
    let mut times: Vec<_> = (0..50)
        .map(|turn| {
            let mut context = context();
            context.number = format!("7K2Q-H-{turn:04}");
            let begin = std::time::Instant::now();
            typeset(&mut typesetter, &assessment, &context).expect("bytes");
            begin.elapsed()
        })
        .collect();
    times.sort();
    println!("median of 50 letters: {:?}", times[25]);
    assert!(
        times[25] < std::time::Duration::from_secs(1),
        "a letter took {:?}",
        times[25]
    );
}
