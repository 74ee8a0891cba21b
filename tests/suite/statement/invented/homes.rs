//! The context of invented letters, and whole invented households.

use super::*;

/// What a letter needs besides.
pub fn context() -> LetterContext {
    let labels = [
        ("item.pay", "Pay"),
        ("item.income_tax", "Income Tax"),
        ("item.contribution", "National Insurance"),
        ("item.pension_payment", "Pension payments"),
        ("item.support", "Household Support"),
        ("what.support", "Monthly help for people on low pay."),
        ("said.tenure", "home {value}"),
        ("said.birth", "born {value}"),
        ("word.private", "rented privately"),
        ("none.carer", "caring"),
        ("item.local_tax_help", "Local Tax Help"),
        ("item.school_meals", "Free school meals"),
        ("item.childcare", "Childcare"),
        ("item.rent", "Rent"),
        ("turn.income_tax", "Income Tax starts"),
        ("turn.contribution", "National Insurance starts"),
        ("turn.pension_payment", "Payments into your pension start"),
        ("turn.support", "Household Support ends"),
        ("turn.local_tax_help", "Local Tax Help ends"),
        ("turn.school_meals", "Free school meals end"),
        ("fact.rent", "rent"),
        ("fact.tenure", "home rented"),
        ("fact.birth", "born"),
        ("fact.pension_rate", "pension payment"),
        ("fact.savings", "savings"),
        ("fact.student", "student"),
        ("fact.carer", "carer"),
        ("office.support", "the Support Office"),
        ("office.local_tax_help", "the town hall"),
        ("office.income_tax", "the Tax Office"),
        ("office.contribution", "the Tax Office"),
        (
            "report.support",
            "changes in pay, hours and childcare, by the end of the month in which they happen.",
        ),
        ("report.local_tax_help", "changes in income, at once."),
        ("report.income_tax", "a wrong tax code."),
        ("report.contribution", "a second job, in its first week."),
        ("left_out.1", "travel to work"),
        ("left_out.2", "one-off payments."),
        (
            "left_out.support.1",
            "loans on account of Household Support",
        ),
        ("left_out.local_tax_help.1", "second homes"),
    ];
    let day = |year, month, day| NaiveDate::from_ymd_opt(year, month, day).expect("a day");
    LetterContext {
        number: "7K2Q-H-0042".into(),
        issued: day(2026, 6, 4),
        assessed: day(2026, 6, 1),
        rules_title: "Invented Country, core".into(),
        area: "Harrowmere".into(),
        rules_until: day(2027, 3, 31),
        currency: "GBP".into(),
        period: "month".into(),
        office: Office {
            name: "Harrowmere Advice Rooms".into(),
            lines: vec![
                "3 Linden Passage, Harrowmere".into(),
                "Telephone 01632 960 112".into(),
            ],
            next_steps: vec![],
        },
        labels: labels
            .iter()
            .map(|(key, text)| ((*key).to_owned(), (*text).to_owned()))
            .collect::<BTreeMap<_, _>>(),
        english: std::sync::Arc::default(),
        facts: [
            ("household.birth", FactShape::Date),
            ("household.tenure", FactShape::Word),
            ("household.student", FactShape::YesNo),
        ]
        .map(|(name, shape)| (name.to_owned(), shape))
        .into(),
        locals: vec![],
        texts: TemplateSet::built_in()
            .texts("en")
            .expect("the texts are sound"),
        delivery: LetterDelivery {
            address: vec![
                "Ana Petrescu-Hale".into(),
                "Flat 2".into(),
                "18 Tanners Row".into(),
                "Harrowmere".into(),
                "HX0 4ZZ".into(),
            ],
            ..LetterDelivery::default()
        },
    }
}

/// A single tenant at 16 hours.
pub fn tenant() -> Assessment {
    assessment(
        &TENANT,
        vec![earner(&TENANT, 0, "Ana", Some((1600, 127_100)), &[])],
    )
}

/// A lone parent with childcare, a fall and a trap, and an offer.
pub fn lone_parent() -> Assessment {
    let offers = [("School kitchen, term time", 2400, 134_500)];
    assessment(
        &LONE_PARENT,
        vec![earner(
            &LONE_PARENT,
            0,
            "Ana",
            Some((1600, 127_100)),
            &offers,
        )],
    )
}

/// A couple: one with two offers, one with a job.
pub fn couple() -> Assessment {
    let offers = [
        ("Bakery, mornings", 2000, 128_000),
        ("Care home, nights", 3000, 141_250),
    ];
    let first = earner(&COUPLE, 0, "Ana", None, &offers);
    let other = Home {
        partner: 0,
        award: COUPLE.award,
        ..COUPLE
    };
    let mut second = earner(&other, 1, "Ben", Some((3000, 127_100)), &[]);
    // The second earner's lines have one item fewer: the other adult's pay, which is nothing.
    for line in &mut second.lines {
        for point in &mut line.grid {
            point.items.insert(5, Money(0));
        }
        for segment in &mut line.segments {
            segment.shares.insert(5, w(0));
        }
        for effect in line.turns.iter_mut().flat_map(|turn| &mut turn.effects) {
            effect.item += usize::from(effect.item >= 5);
        }
    }
    second.not_in_work.items.insert(5, Money(0));
    assessment(&COUPLE, vec![second, first])
}

/// One adult, no benefit, one straight line.
pub fn minimal() -> Assessment {
    let pay = || {
        vec![Line {
            name: "pay",
            kind: ItemKind::Pay,
            adult: Some(0),
            part: "Pay",
            sums: Pieces::line(w(50)),
        }]
    };
    let terms = JobTerms {
        offer: String::new(),
        reference: String::new(),
        wage: 115_385,
        hours: Hours(800),
        facts: vec![],
    };
    let line = budget_line(&pay(), terms, 0, Hours(1200), 48);
    let earner = EarnerResult {
        adult: 0,
        name: String::new(),
        not_in_work: point(&pay(), Hours(0), 0),
        has_job: true,
        lines: vec![line],
        offers: vec![],
        target: None,
    };
    let mut assessment = assessment(&TENANT, vec![earner]);
    assessment.items.truncate(1);
    assessment.facts.clear();
    assessment.amounts.clear();
    assessment
}
