//! The payroll page and the file copy of the demo lists, from real assessments.

use super::real::{households, press};
use hourworth::batch::{Books, Places, prepare, rules_record, workings};
use hourworth::measures::{Assessment, Verdict};
use hourworth::statement::{
    CopyView, EmployerCost, Evidence, LetterContext, LongRow, LongWeight, PayView, RowWeight,
    TemplateSet, Typesetter, copy_view, pay_views,
};
use std::path::Path;
use std::sync::LazyLock;

/// One household with both views.
struct Printed {
    name: String,
    assessment: Assessment,
    context: LetterContext,
    evidence: Evidence,
    copy: CopyView,
    pages: Vec<(usize, PayView)>,
}

/// The employees of the payroll list, and households with benefits, partners, costs and a charge.
static PRINTED: LazyLock<Vec<Printed>> = LazyLock::new(|| {
    let mut all = printed("payroll", 30);
    all.extend(printed("harrowmere", 12));
    all.extend(printed("what_if", 1));
    all
});

fn printed(list: &str, most: usize) -> Vec<Printed> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("demo_cases")
        .join(list);
    let prepared = prepare(&path, &Places::default()).expect("the list can be read");
    let mut press = press(&prepared);
    let mut books = Books::new(prepared.pack.clone(), prepared.terms.clone());
    let files = &prepared.pack_files;
    let rules = rules_record(&files.name, &files.files, &prepared.pack, &prepared.terms);
    let mut out = vec![];
    for household in households(&prepared).into_iter().take(most) {
        let Ok(Verdict::Assessed(assessment)) = books.assess(&household) else {
            continue;
        };
        let points = workings(&mut books, &household, &assessment).expect("workings");
        let evidence = Evidence {
            points,
            rules: rules.clone(),
        };
        let context = press.context(&household).expect("a context").clone();
        let copy = copy_view(&assessment, &context, &evidence).expect("a copy");
        let pages = pay_views(&assessment, &context, &evidence, EmployerCost::Shown);
        out.push(Printed {
            name: format!("{list}, {}", household.reference),
            assessment: *assessment,
            pages: pages.expect("pages"),
            context,
            evidence,
            copy,
        });
    }
    out
}

/// Minor units of a printed sum: `−£1,234.50`, `—`.
fn pence(text: &str) -> i64 {
    let digits: String = text.chars().filter(char::is_ascii_digit).collect();
    let size: i64 = digits.parse().unwrap_or(0);
    if text.starts_with('\u{2212}') {
        -size
    } else {
        size
    }
}

/// All rows of the tables below a heading that starts so.
fn rows<'v>(copy: &'v CopyView, heading: &str) -> Vec<&'v LongRow> {
    let sections = copy.sections.iter();
    let inside = sections.flat_map(|section| {
        let all = section.heading.starts_with(heading);
        section
            .parts
            .iter()
            .filter(move |part| all || part.heading.starts_with(heading))
    });
    inside
        .flat_map(|part| &part.tables)
        .flat_map(|table| &table.rows)
        .collect()
}

fn all_words(copy: &CopyView) -> String {
    let words = serde_json::to_string(copy).expect("plain values");
    words.replace('\u{a0}', " ")
}

#[test]
fn every_item_stands_in_the_copy_and_the_sums_add_up() {
    for one in PRINTED.iter() {
        let words = all_words(&one.copy);
        for item in &one.assessment.items {
            let name = &one.context.labels[&format!("item.{}", item.name)];
            assert!(words.contains(name.as_str()), "{}: {name}", one.name);
        }
        let mut tables = 0;
        let parts = one.copy.sections.iter().flat_map(|section| &section.parts);
        for table in parts
            .filter(|part| part.heading == "Items")
            .flat_map(|part| &part.tables)
        {
            for column in 1..table.columns.len() {
                let mut sum = 0;
                for row in &table.rows {
                    match row.weight {
                        LongWeight::Plain => sum += pence(&row.cells[column]),
                        LongWeight::Total => {
                            assert_eq!(sum, pence(&row.cells[column]), "{}: {row:?}", one.name);
                            tables += 1;
                        }
                        // What follows is in no sum.
                        LongWeight::Group => break,
                        LongWeight::Worked | LongWeight::Marked => unreachable!("no such rows"),
                    }
                }
            }
        }
        assert!(tables >= 6, "{}: {tables} totals", one.name);
    }
}

#[test]
fn every_turning_point_stands_in_the_copy() {
    let mut counted = 0;
    for one in PRINTED.iter() {
        let wanted: usize = one
            .assessment
            .earners
            .iter()
            .flat_map(|earner| {
                let first = &earner.lines[0];
                earner
                    .lines
                    .iter()
                    .enumerate()
                    .filter(move |(place, line)| {
                        *place == 0 || line.grid != first.grid || line.turns != first.turns
                    })
            })
            .map(|(_, line)| line.turns.len())
            .sum();
        assert_eq!(
            rows(&one.copy, "Turning points").len(),
            wanted,
            "{}",
            one.name
        );
        counted += wanted;
    }
    assert!(counted > 100, "{counted} turning points");
}

#[test]
fn every_fact_and_every_amount_stands_in_the_copy() {
    for one in PRINTED.iter() {
        let facts = rows(&one.copy, "Facts");
        let facts = facts.iter().filter(|row| row.weight != LongWeight::Group);
        let offers = one
            .assessment
            .earners
            .iter()
            .flat_map(|earner| &earner.lines);
        let offered: usize = offers
            .filter(|line| !line.terms.reference.is_empty() || !line.terms.offer.is_empty())
            .map(|line| line.terms.facts.len())
            .sum();
        assert_eq!(
            facts.clone().count(),
            one.assessment.facts.len() + offered,
            "{}",
            one.name
        );
        for row in facts {
            let known = row.cells.last().expect("a cell");
            assert!(
                ["seen", "told", "assumed"].contains(&known.as_str()),
                "{row:?}"
            );
        }
        let amounts = rows(&one.copy, "Amounts of the law");
        for amount in &one.assessment.amounts {
            let star = if amount.confirmed { "" } else { "*" };
            let name = format!("{}{star}", amount.name);
            let row = amounts.iter().find(|row| row.cells[0] == name);
            let row = row.unwrap_or_else(|| panic!("{}: {name}", one.name));
            let status = match (amount.changed_because.is_empty(), amount.confirmed) {
                (false, _) => "Changed for this list",
                (true, true) => "Seen in its source",
                (true, false) => "Not confirmed",
            };
            assert!(
                row.under[0].lead.starts_with(status),
                "{}: {row:?}",
                one.name
            );
            assert!(
                row.under[0].text.contains(&amount.source),
                "{}: {row:?}",
                one.name
            );
        }
        // What the working names is in the table too.
        for row in rows(&one.copy, "The working") {
            for line in &row.under {
                for (_, name) in line.text.match_indices("* = ").map(|(at, _)| {
                    (
                        at,
                        line.text[..at]
                            .rsplit([' ', ';'])
                            .next()
                            .unwrap_or_default(),
                    )
                }) {
                    let starred = format!("{name}*");
                    assert!(
                        amounts.iter().any(|row| row.cells[0] == starred),
                        "{starred}"
                    );
                }
            }
        }
    }
}

#[test]
fn the_copy_names_its_rules_and_carries_its_cautions() {
    for one in PRINTED.iter() {
        let words = all_words(&one.copy);
        let hash: String = one.evidence.rules.hash.chars().take(8).collect();
        for said in [
            "uk",
            hash.as_str(),
            "It does not advise.",
            "8 April 2024 to 31 March 2027",
            "Checked by a second person",
        ] {
            assert!(words.contains(said), "{}: {said}", one.name);
        }
        for note in &one.assessment.notes {
            let text = &one.context.labels[&format!("note.{note}")];
            let text = serde_json::to_string(text).expect("a text");
            assert!(
                words.contains(text.trim_matches('"')),
                "{}: {note}",
                one.name
            );
        }
    }
}

#[test]
fn pay_adds_up_line_by_line() {
    let mut premiums = 0;
    for one in PRINTED.iter() {
        for (_, page) in &one.pages {
            for table in &page.tables {
                let columns: usize = table.groups.iter().map(|group| group.columns.len()).sum();
                for column in 0..columns {
                    let mut sum = 0;
                    for row in &table.rows {
                        match row.weight {
                            RowWeight::Plain => sum += pence(&row.cells[column]),
                            RowWeight::Total => {
                                assert_eq!(sum, pence(&row.cells[column]), "{}: {row:?}", one.name);
                            }
                        }
                    }
                }
                premiums += table
                    .rows
                    .iter()
                    .filter(|row| row.name == "Premium pay")
                    .count();
            }
        }
    }
    assert!(premiums >= 10, "{premiums} lines of premium pay");
}

#[test]
fn premium_pay_has_a_line_of_its_own() {
    // E-01: 37.5 hours at 12.95, and 6.5 hours at 19.425 in the offer; a month is 52/12 weeks (S.I. 2013/376 reg. 73(2)(a)). That is
    // 2104.375 and 547.1375, together 2651.5125. The pay is one item, rounded once; basic pay is rounded, the premium is the rest.
    let one = &PRINTED[0];
    let table = &one.pages[0].1.tables[0];
    let row = |name: &str| {
        let row = table.rows.iter().find(|row| row.name == name);
        row.unwrap_or_else(|| panic!("no row {name}")).cells.clone()
    };
    assert_eq!(pence(&row("Basic pay")[0]), 210_438);
    assert_eq!(pence(&row("Basic pay")[1]), 210_438);
    assert_eq!(pence(&row("Premium pay")[0]), 0);
    assert_eq!(pence(&row("Premium pay")[1]), 54_713);
    assert_eq!(pence(&row("Gross pay")[1]), 265_151);
}

#[test]
fn a_page_an_employee() {
    let mut typesetter = Typesetter::new(&TemplateSet::built_in()).expect("sound templates");
    let mut pages = 0;
    for one in PRINTED.iter().filter(|one| one.name.starts_with("payroll")) {
        let views = pay_views(
            &one.assessment,
            &one.context,
            &one.evidence,
            EmployerCost::LeftOut,
        );
        for (_, view) in views.expect("pages") {
            let identity = (view.number.as_str(), one.context.issued);
            let made = typesetter.pay_page(&view, &one.context.texts, identity);
            // Four or more notes are more than a page holds.
            let most = if one.assessment.notes.len() < 4 { 1 } else { 2 };
            assert!(made.expect("a page").pages <= most, "{}", one.name);
            pages += 1;
        }
    }
    assert!(pages >= 15, "{pages} pages");
}

#[test]
fn a_tax_that_is_not_taken_from_pay_is_named_and_never_taken_off() {
    let mut charged = 0;
    for one in PRINTED.iter() {
        let charge = "High Income Child Benefit Charge";
        for (adult, page) in &one.pages {
            for table in &page.tables {
                assert!(
                    table.rows.iter().all(|row| !row.name.contains(charge)),
                    "{}",
                    one.name
                );
            }
            let words = serde_json::to_string(page).expect("plain values");
            assert!(words.contains(charge), "{}", one.name);
            assert!(words.contains("may differ by pence"), "{}", one.name);
            let due =
                one.assessment.items.iter().position(|item| {
                    item.name == "high_income_charge" && item.adult == Some(*adult)
                });
            let mut lines = one
                .assessment
                .earners
                .iter()
                .flat_map(|earner| &earner.lines);
            if lines.any(|line| due.is_some_and(|due| line.grid[line.step_to].items[due].0 > 0)) {
                charged += 1;
            }
        }
    }
    assert!(charged >= 1, "nobody is charged");
}

#[test]
fn benefits_are_in_figures_only_where_the_household_has_them() {
    let mut general = 0;
    for one in PRINTED.iter() {
        for (_, page) in &one.pages {
            let words = serde_json::to_string(page).expect("plain values");
            if words.contains("help in kind can fall or end") {
                assert!(!words.contains("Universal Credit: £"), "{}", one.name);
                general += 1;
            }
            // No address.
            for line in &one.context.delivery.address {
                let own = page.whose.contains(line.as_str());
                assert!(own || !words.contains(line.as_str()), "{}", one.name);
            }
        }
    }
    assert!(general >= 10, "{general} pages in general words");
}
