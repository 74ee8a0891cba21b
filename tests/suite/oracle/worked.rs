//! Small packs worked out by hand. First the oracle itself, so that it is not only compared; then what random packs once found wrong
//! in the product, each with the sums that show why.

use super::answer::{Home, Mode, Oracle, Record};
use super::book::{Book, JOB};
use super::compare::{Asked, Subject, Tally, compare};
use super::invent::files;
use super::text::{Q, day, number, q, whole};
use hourworth::case::{Delivery, FactType, Household, Instance, JobRole, Known, Need, Schema};
use hourworth::diag::Diagnostic;
use hourworth::engine::JobChoice;
use hourworth::load::{check_pack, schema_of};
use hourworth::rules::Pack;
use hourworth::source::Sources;
use num_traits::ToPrimitive;

const MANIFEST: &str = "title = \"Harrowmere\"\narea = \"Harrowmere\"\ncurrency = \"GBP\"\nperiod = \"month\"\n\
    covers = { from = 2025-04-06, to = 2027-04-05 }\n\n[dates]\nopening = \"the first date\"\nclosing = \"the second date\"\n";
const HEADER: &str = "name,from,to,value,unit,period,source,locator,status\n";

/// A pack of one part, dated by the second date.
struct Worked<'t> {
    rules: &'t str,
    amounts: &'t str,
    tables: &'t [(&'t str, &'t str)],
    /// Kind, owner and facts of each record after the household; the first job is the one that varies.
    records: &'t [(&'t str, usize, &'t str)],
}

fn value(ty: &FactType, text: &str) -> i64 {
    match ty {
        FactType::YesNo => i64::from(text == "yes"),
        FactType::Date => day(text).expect("a day"),
        FactType::Choice(words) => words
            .iter()
            .position(|w| w == text)
            .expect("a word of the choice") as i64,
        FactType::Money(_)
        | FactType::Rate
        | FactType::Hours
        | FactType::Number
        | FactType::Count => (number(text).expect("a number") * whole(i128::from(ty.units())))
            .to_integer()
            .to_i64()
            .expect("a small number"),
    }
}

fn household(schema: &Schema, records: &[(&str, usize, &str)]) -> Household {
    let mut instances: Vec<Vec<Instance>> = schema.kinds.iter().map(|_| Vec::new()).collect();
    for (name, owner, facts) in records {
        let kind = schema
            .kinds
            .iter()
            .position(|k| k.name == *name)
            .expect("a kind");
        let given: Vec<(&str, &str)> = facts
            .split(", ")
            .filter_map(|f| f.split_once(" = "))
            .collect();
        let values: Vec<i64> = schema.kinds[kind]
            .facts
            .iter()
            .map(
                |fact| match (given.iter().find(|(name, _)| *name == fact.name), fact.need) {
                    (Some((_, text)), _) => value(&fact.ty, text),
                    (None, Need::Default(value)) => value,
                    (None, Need::Required) => fact.min.max(0),
                },
            )
            .collect();
        instances[kind].push(Instance {
            label: String::new(),
            reference: String::new(),
            owner: *owner,
            known: vec![Known::Told; values.len()],
            values,
        });
    }
    let job_roles = (0..instances[JOB].len())
        .map(|at| {
            if instances[JOB][..at]
                .iter()
                .all(|j| j.owner != instances[JOB][at].owner)
            {
                JobRole::Today
            } else {
                JobRole::Further
            }
        })
        .collect();
    Household {
        reference: "R1".into(),
        delivery: Delivery::default(),
        target: None,
        instances,
        job_roles,
        offers: Vec::new(),
        row: 1,
    }
}

/// The pack as both sides read it.
fn accepted(
    rules: &str,
    amounts: &str,
    tables: &[(&str, &str)],
) -> Result<(Book, Pack), (Sources, Vec<Diagnostic>)> {
    let rules = format!(
        "part \"Worked\" dated by closing\nlaw \"The Harrowmere Act\"\n{rules}\nnote closed where closing at least 2025-04-06"
    );
    let mut texts = vec![
        ("pack.toml".to_owned(), MANIFEST.to_owned()),
        ("order.txt".to_owned(), "worked.rules\n".to_owned()),
        ("worked.rules".to_owned(), rules),
        ("amounts.csv".to_owned(), format!("{HEADER}{amounts}")),
    ];
    texts.extend(
        tables
            .iter()
            .map(|(name, text)| (format!("tables/{name}.csv"), (*text).to_owned())),
    );
    let files = files(&texts);
    let pack = check_pack(&files)?;
    Ok((Book::read(&files), pack))
}

impl Worked<'_> {
    /// Items at hours as they should be, by the oracle and the engine, and everything else that the two can be asked.
    fn gives(&self, expected: &[(&str, Q, &str)]) {
        let (book, pack) =
            accepted(self.rules, self.amounts, self.tables).unwrap_or_else(|(sources, faults)| {
                panic!(
                    "{}",
                    faults
                        .iter()
                        .map(|f| f.render(&sources, false))
                        .collect::<String>()
                );
            });
        let schema = schema_of(&pack);
        let household = household(
            &schema,
            &[&[("household", 0, self.records[0].2)], &self.records[1..]].concat(),
        );
        let days = [
            day("2025-06-01").expect("a day"),
            day("2026-06-01").expect("a day"),
        ];
        let records = household
            .instances
            .iter()
            .map(|kind| {
                kind.iter()
                    .map(|r| Record {
                        owner: r.owner,
                        values: r.values.clone(),
                    })
                    .collect()
            })
            .collect();
        let oracle = Oracle::new(
            &book,
            days.to_vec(),
            Home {
                records,
                varied_job: 0,
            },
        );
        for (item, hours, wanted) in expected {
            let items = oracle.items(hours, Mode::Law);
            let (_, found) = items
                .iter()
                .find(|((name, _, record), _)| name == item && *record == 0)
                .expect("the item is there");
            assert_eq!(
                *found,
                number(wanted).expect("a number"),
                "{item} at {hours} hours"
            );
        }
        for seed in 0..4 {
            let subject = Subject {
                book: &book,
                pack: &pack,
                days: &days,
                household: &household,
                earner: 0,
                choice: JobChoice::Today,
            };
            let asked = Asked {
                seed,
                law_points: 60,
                fractions: 20,
                most_pieces: 60,
                rationals: 60,
                bounded: 40,
            };
            compare(&subject, asked, &mut Tally::default())
                .unwrap_or_else(|fault| panic!("{fault}"));
        }
    }
}

const ONE_JOB: [(&str, usize, &str); 3] = [
    ("household", 0, ""),
    ("adult", 0, "birth = 1990-01-01"),
    ("job", 0, "hours = 20, wage = 10"),
];

#[test]
fn bands_scales_and_roundings_by_hand() {
    Worked {
        rules: "per job\nfigure pay: money a week = wage * hours\nconversion month from week to month times 52/12 see \"s.1\"\n\
            bands tax_bands of money a week\nband 10% up to money 100 a week\nband 25.5% beyond\n\
            scale support_scale of money a week gives rate\nstep 50% up to money 100 a week\nstep 20% below money 300 a week\nstep 0% beyond\n\
            item taxed: tax = pay charged by tax_bands converted by month see \"s.2\"\n\
            item supported: benefit = money 90 a month * (pay placed on support_scale) see \"s.3\"\n\
            item stairs: cost = pay rounded up to 40 as steps converted by month see \"s.4\"\n\
            item nearest: loan = (pay * 7% rounded half even to 0.5 as a slope) converted by month see \"s.5\"",
        amounts: "",
        tables: &[],
        records: &ONE_JOB,
    }
    .gives(&[
        // 200 a week: 10 + 25.5 = 35.50, times 52/12 = 153.8333…
        ("taxed", whole(20), "153.83"),
        ("taxed", whole(0), "0"),
        // Up to 100 is half, above it a fifth, from 300 nothing.
        ("supported", whole(10), "45"),
        ("supported", q(1001, 100), "18"),
        ("supported", whole(30), "0"),
        // 210 goes up to 240: 240 × 52/12 = 1040; 200 stays 200: 866.67.
        ("stairs", whole(21), "1040"),
        ("stairs", whole(20), "866.67"),
        // 250 × 7% = 17.50 stays; 275 × 7% = 19.25 lies half way between 19 and 19.5: 38 and 39 halves, so 38: 19 × 52/12 = 82.33.
        ("nearest", q(275, 10), "82.33"),
    ]);
}

#[test]
fn people_in_order_by_hand() {
    Worked {
        rules: "fact counts of child: yesno default yes ask \"Does the child count?\"\n\
            per child\nfigure place_here: count = place by birth with (counts)\n\
            figure sum_here: money a month = where place_here at most 2 and counts give money 10 a month otherwise 0\n\
            per household\nitem children: benefit = sum over child of sum_here see \"s.1\"\n\
            item members: benefit = money 1 a month * (count of member with (birth below 2020-01-01)) see \"s.2\"\n\
            per adult\nitem other_age: income = money 1 a month * (age of partner failing 99) see \"s.3\"\nfigure age: count = years from birth to closing\n\
            item eldest: income = first child by birth with (not counts) give money 5 a month failing money 7 a month see \"s.4\"",
        amounts: "",
        tables: &[],
        records: &[
            ("household", 0, ""),
            ("adult", 0, "birth = 1990-01-01"),
            ("adult", 0, "birth = 1992-06-02"),
            ("child", 0, "birth = 2021-05-05"),
            ("child", 0, "birth = 2019-05-05, counts = no"),
            ("child", 0, "birth = 2021-05-05"),
            ("child", 0, "birth = 2015-05-05"),
            ("job", 0, "hours = 20, wage = 10"),
            ("job", 1, "hours = 20, wage = 10"),
        ],
    }
    .gives(&[
        // The one of 2015 and the first of the twins take the two places; the one of 2019 does not count and takes none.
        ("children", whole(1), "20"),
        ("members", whole(1), "4"),
        // On 2026-06-01 somebody born on 1992-06-02 is 33.
        ("other_age", whole(1), "33"),
        ("eldest", whole(1), "5"),
    ]);
}

#[test]
fn tables_are_read_on_the_date_of_their_part() {
    Worked {
        rules: "fact rooms of household: count from 0 to 9 default 3 ask \"How many rooms?\"\ntable limit by count gives money a month\n\
            item help: benefit = limit[rooms] + money 0.50 a month * ratio see \"s.1\"",
        amounts: "ratio,2025-04-06,2026-04-05,1,number,,a book,p. 1,read\nratio,2026-04-06,,2,number,,a book,p. 1,read\n",
        tables: &[(
            "limit",
            "rooms,from,to,value,source,locator,status\n1,2025-04-06,2026-04-05,10,a book,p. 1,read\n2,2025-04-06,2026-04-05,20,a book,p. 1,read\n\
             1,2026-04-06,,11,a book,p. 1,read\n2,2026-04-06,,22,a book,p. 1,read\n",
        )],
        records: &ONE_JOB,
    }
    // The second date lies in 2026; three rooms take the row of two.
    .gives(&[("help", whole(5), "23")]);
}

#[test]
fn a_band_below_nothing_is_empty() {
    Worked {
        rules: "fact costs of household: money a month from 0 to 1000 default 0 ask \"How much?\"\nfigure end: money a month = money 100 a month - costs\n\
            bands charge of money a month\nband 10% up to end\nband 20% up to end + money 200 a month\nband 30% up to money 150 a month\nband 40% beyond\n\
            per adult\nconversion month from week to month times 4 see \"s.1\"\n\
            item levy: tax = sum over job of (wage * hours) converted by month charged by charge see \"s.1\"",
        amounts: "",
        tables: &[],
        records: &[("household", 0, "costs = 250"), ONE_JOB[1], ONE_JOB[2]],
    }
    .gives(&[
        // The first band ends at −150 and holds nothing; the second goes from nothing to 50, the third to 150.
        ("levy", whole(0), "0"),
        ("levy", whole(1), "8"),
        // 10 + 30 + 0.40 × 50.
        ("levy", whole(5), "60"),
    ]);
    Worked {
        rules: "fact costs of household: money a month from 0 to 1000 default 0 ask \"How much?\"\n\
            bands charge of money a month\nband 10% up to costs\nband 20% up to money 100 a month\nband 40% beyond\n\
            per adult\nconversion month from week to month times 4 see \"s.1\"\n\
            item levy: tax = sum over job of (wage * hours) converted by month charged by charge see \"s.1\"",
        amounts: "",
        tables: &[],
        records: &[("household", 0, "costs = 300"), ONE_JOB[1], ONE_JOB[2]],
    }
    // The second limit lies below the first: its band is empty. 30 + 0.40 × 100.
    .gives(&[("levy", whole(5), "20"), ("levy", whole(10), "70")]);
}

#[test]
fn stairs_under_a_value_that_stands_on_an_edge() {
    Worked {
        rules: "per job\nfigure pay: money a week = wage * hours\nfigure held: money a week = pay rounded down to 100 as steps\n\
            conversion month from week to month times 1 see \"s.1\"\n\
            item to_even: cost = held * 2.5% rounded half even to 5 as steps converted by month see \"s.1\"\n\
            item to_upper: cost = held * 2.5% rounded half up to 5 as steps converted by month see \"s.1\"\n\
            item to_lower: cost = held * 2.5% rounded half down to 5 as steps converted by month see \"s.1\"",
        amounts: "",
        tables: &[],
        records: &ONE_JOB,
    }
    .gives(&[
        // From 10 to 20 hours the value stands at 2.50, half way between 0 and 5; from 30 to 40 at 7.50, between 5 and 10.
        ("to_even", whole(15), "0"),
        ("to_upper", whole(15), "5"),
        ("to_lower", whole(15), "0"),
        ("to_even", whole(35), "10"),
        ("to_upper", whole(35), "10"),
        ("to_lower", whole(35), "5"),
    ]);
}

#[test]
fn claims_and_facts_taken_otherwise() {
    Worked {
        rules: "choice way = by_voucher, by_credit\nfact chosen of household: way default by_voucher ask \"Which way?\"\n\
            fact claimed_here of household: yesno default no ask \"Is it claimed?\"\n\
            per household\nfigure pay: money a month = sum over job of (wage * hours) converted by month\n\
            conversion month from week to month times 4 see \"s.1\"\n\
            figure help: money a month = where chosen is by_credit give pay * 10% otherwise money 30 a month\n\
            item best: benefit = larger of (help as if (chosen is by_voucher), help as if (chosen is by_credit)) see \"s.1\"\n\
            item due: benefit = help claimed where claimed_here or pay above money 600 a month see \"s.2\"\n\
            item after: income = money 1 a month * (where due above 0 give 1 otherwise 2) see \"s.3\"",
        amounts: "",
        tables: &[],
        records: &ONE_JOB,
    }
    .gives(&[
        // 400 a month: a tenth is 40. 200 a month: 30 by voucher is more.
        ("best", whole(10), "40"),
        ("best", whole(5), "30"),
        ("due", whole(15), "0"),
        ("due", whole(16), "30"),
        ("after", whole(15), "2"),
        ("after", whole(16), "1"),
    ]);
}

/// What stands in for a fact is bound by what the fact is bound by: its range, and that it does not vary where facts may not.
#[test]
fn facts_taken_otherwise_keep_their_bounds() {
    let before = "fact people of household: count from 1 to 9 default 1 ask \"How many?\"\nfact born of household: date default 1990-01-01 ask \"When?\"\n\
        fact share of household: rate from 10% to 50% default 20% ask \"Which share?\"\n\
        fact costs of household: money a month from 0 to 1000 default 0 ask \"How much?\"\n\
        table limit by count gives money a month\nfigure by_people: money a month = (costs / people rounded half up to 0.01)\n\
        figure looked_up: money a month = limit[people]\nfigure aged: money a month = money 1 a month * (years from born to closing)\n\
        figure shared: money a month = costs * share\n\
        figure works: yesno = any job with (hours above 10 hours)\nfigure plain: money a month = by_people + looked_up + aged + shared\n\
        item kept: benefit = plain see \"s.1\"\nnote at_work where works or nobody at least 1\n";
    let table = (
        "limit",
        "rooms,from,to,value,source,locator,status\n1,2020-01-01,,10,a book,p. 1,read\n2,2020-01-01,,20,a book,p. 1,read\n",
    );
    let outside = |fact: &str, range: &str| {
        format!("this may lie outside the range of `{fact}`; a value from {range}")
    };
    let varies =
        "this varies with hours; something that does not, as it stands in for a fact".to_owned();
    let refused = [
        ("by_people as if (people is 0)", outside("people", "1 to 9")),
        (
            "by_people as if (people is 10)",
            outside("people", "1 to 9"),
        ),
        (
            "by_people as if (people is count of child)",
            outside("people", "1 to 9"),
        ),
        (
            "by_people as if (people is ((where works give 1 otherwise 2) raised to 1))",
            varies.clone(),
        ),
        (
            "looked_up as if (people is ((where works give 1 otherwise 2) raised to 1))",
            varies.clone(),
        ),
        (
            "aged as if (born is (where works give 1990-01-01 otherwise 1980-01-01))",
            varies,
        ),
        (
            "shared as if (share is 60%)",
            outside("share", "10% to 50%"),
        ),
        (
            "shared as if (costs is money -1 a month)",
            outside("costs", "0 to 1000"),
        ),
        (
            "by_people as if (people is nobody)",
            "this divides by nothing; an amount above zero".to_owned(),
        ),
    ];
    for (expr, why) in refused {
        let (_, faults) = accepted(
            &format!("{before}item otherwise_worked: benefit = {expr} see \"s.2\""),
            NOBODY,
            &[table],
        )
        .expect_err(expr);
        let found: Vec<String> = faults
            .iter()
            .map(|f| format!("{}; {}", f.message, f.expected.as_deref().unwrap_or("")))
            .collect();
        assert_eq!(found, [why], "{expr}");
    }
    for expr in [
        "by_people as if (people is 9)",
        "looked_up as if (people is (count of child raised to 1))",
        "shared as if (share is 50%)",
    ] {
        let rules = format!("{before}item otherwise_worked: benefit = {expr} see \"s.2\"");
        Worked {
            rules: &rules,
            amounts: NOBODY,
            tables: &[table],
            records: &ONE_JOB,
        }
        .gives(&[]);
    }
}

/// An amount that is nothing.
const NOBODY: &str = "nobody,2020-01-01,,0,count,,a book,p. 1,read\n";
