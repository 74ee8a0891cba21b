//! Rule packs of other eras and places, written to prove the language and the engine on published whole budget lines. Their amounts and
//! examples lie in `tests/packs`; nothing here holds a published value that is not in a source named beside it.

use hourworth::batch::{Books, Proof, checked, prove};
use hourworth::case::{
    Format, GridSettings, Household, ListSettings, ReadOptions, day_of, read_single,
};
use hourworth::load::{
    Asks, Case, Example, Files, PackFiles, Terms, What, read_examples, read_pack, read_pack_folder,
};
use hourworth::measures::{Assessment, BudgetLine, Point, Turn, TurnKind, Verdict};
use hourworth::num::{Fraction, Hours, Money};
use hourworth::rules::Pack;
use std::path::PathBuf;

mod schedule;

/// Each pack with the examples and the published values that it meets.
const PACKS: [(&str, usize, usize); 6] = [
    ("gb_1988", 6, 33),
    ("gb_1989", 21, 85),
    ("gb_1991", 24, 182),
    ("gb_1993", 15, 118),
    ("gb_1999", 12, 12),
    ("de_32a", 27, 30),
];

fn folder(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR"))
        .join("tests/packs")
        .join(name)
}

/// A test pack with its examples.
struct Shelf {
    pack: Pack,
    examples: Vec<Example>,
}

impl Shelf {
    fn open(name: &str) -> Shelf {
        Shelf::of(
            &read_pack_folder(&folder(name)).expect("the pack can be read"),
            None,
        )
    }

    fn of(files: &PackFiles, examples: Option<&Files>) -> Shelf {
        let pack = checked(files).unwrap_or_else(|fault| panic!("`{}`: {fault}", files.name));
        let examples = read_examples(examples.unwrap_or(&files.files))
            .unwrap_or_else(|faults| panic!("{faults:#?}"));
        Shelf { pack, examples }
    }

    /// Examples met and values met. Fails where a value is not.
    fn prove(&self) -> (usize, usize) {
        let (mut met, mut values) = (0, 0);
        for example in &self.examples {
            let Asks::Values(case) = &example.asks else {
                continue;
            };
            for (expect, proof) in case.expects.iter().zip(prove(&self.pack, case)) {
                assert!(
                    matches!(proof, Proof::Met(_)),
                    "`{}`: {:?} is {proof:?}, published {} within {}",
                    example.id,
                    expect.what,
                    expect.value.decimal(4),
                    expect.tolerance.decimal(4)
                );
                values += 1;
            }
            met += 1;
        }
        (met, values)
    }

    fn case(&self, id: &str) -> &Case {
        let example = self
            .examples
            .iter()
            .find(|e| e.id == id)
            .unwrap_or_else(|| panic!("there is no example `{id}`"));
        match &example.asks {
            Asks::Values(case) => case,
            Asks::NotExpressed(reason) => panic!("`{id}` is not expressed: {reason}"),
        }
    }

    fn books(&self, case: &Case) -> Books {
        let terms = Terms {
            dates: vec![case.date; self.pack.manifest.dates.len()],
            changes: case.changes.clone(),
            grid_to: None,
            grid_step: None,
        };
        Books::new(self.pack.clone(), terms)
    }

    /// The household of a case, with other hours and another wage where they are given.
    fn household(&self, case: &Case, books: &Books, job: Option<(&str, &str)>) -> Household {
        let mut text: toml::Table = case.household.parse().expect("the household is TOML");
        if let Some((hours, wage)) = job {
            let jobs = text
                .get_mut("job")
                .and_then(|jobs| jobs.as_array_mut())
                .expect("the household has a job");
            let first = jobs[0].as_table_mut().expect("a job is a table");
            first.insert("hours".to_owned(), hours.into());
            first.insert("wage".to_owned(), wage.into());
        }
        let settings = ListSettings {
            title: String::new(),
            pack: String::new(),
            date: day_of(case.date).expect("the date is in range"),
            dates: vec![],
            format: Format::default(),
            delimiter: None,
            changed: vec![],
            grid: GridSettings::default(),
            local: vec![],
            language: None,
        };
        read_single(
            "example",
            &text.to_string(),
            books.schema(),
            &settings,
            &ReadOptions::default(),
        )
        .unwrap_or_else(|rejected| panic!("{:?}", rejected.faults))
    }

    /// The first adult's line of an example, at other hours and another wage where they are given.
    fn worked(&self, id: &str, job: Option<(&str, &str)>) -> (Assessment, BudgetLine) {
        let case = self.case(id);
        let mut books = self.books(case);
        let household = self.household(case, &books, job);
        match books.assess(&household).expect("the pack makes a program") {
            Verdict::Assessed(assessment) => {
                let line = assessment.earners[0].lines[0].clone();
                (*assessment, line)
            }
            Verdict::Held(reasons) => panic!("`{id}` is held: {reasons:?}"),
        }
    }
}

fn pence(text: &str) -> Money {
    let value = hourworth::rules::decimal(text).expect("a sum") * Fraction::whole(100);
    assert_eq!(value.denominator(), 1, "`{text}` is in whole pence");
    Money(i64::try_from(value.numerator()).expect("a small sum"))
}

fn near(found: Money, wanted: Money, by: i64, what: &str) {
    assert!(
        (found.0 - wanted.0).abs() <= by,
        "{what}: found {}, expected {}",
        found.plain(),
        wanted.plain()
    );
}

fn rate(text: &str) -> Fraction {
    hourworth::rules::decimal(text).expect("a rate")
}

fn close(found: Fraction, wanted: Fraction, by: Fraction, what: &str) {
    let off = found - wanted;
    let off = if off.is_negative() { -off } else { off };
    assert!(
        off <= by,
        "{what}: found {}, expected {}",
        found.decimal(6),
        wanted.decimal(6)
    );
}

/// The turn at these hours, where there is one.
fn turn_at(line: &BudgetLine, at: Fraction) -> &Turn {
    line.turns
        .iter()
        .find(|turn| turn.at == at)
        .unwrap_or_else(|| {
            let turns: Vec<String> = line.turns.iter().map(|t| t.at.decimal(3)).collect();
            panic!("no turn at {} hours, but at {turns:?}", at.decimal(3))
        })
}

fn effect(assessment: &Assessment, turn: &Turn, item: &str) -> Option<Money> {
    turn.effects
        .iter()
        .find(|effect| assessment.items[effect.item].name == item)
        .map(|effect| effect.jump)
}

fn point(line: &BudgetLine, hours: i64) -> &Point {
    line.grid
        .iter()
        .find(|p| p.hours == Hours::whole(hours))
        .expect("the grid holds whole hours")
}

#[test]
fn every_pack_meets_its_published_values() {
    for (name, examples, values) in PACKS {
        let (met, values_met) = Shelf::open(name).prove();
        assert!(
            met >= examples && values_met >= values,
            "`{name}`: {met} examples and {values_met} values met, expected {examples} and {values}"
        );
    }
}

/// The rows of the OECD run on the built-in pack with the amounts of their years.
#[test]
fn the_built_in_pack_meets_the_rows_of_the_oecd() {
    let text = std::fs::read_to_string(folder("uk_oecd").join("oecd.toml"))
        .expect("the examples can be read");
    let examples = Files::of_texts([("examples/oecd.toml", text.as_str())].into_iter());
    let uk = read_pack("uk", None).expect("the pack is built in");
    let (met, values) = Shelf::of(&uk, Some(&examples)).prove();
    assert!(
        met >= 22 && values >= 25,
        "{met} examples and {values} values met"
    );
}

/// The packs state the tables' totals as figures; the measures must come to the same published sums by themselves.
#[test]
fn the_printed_totals_are_the_measures() {
    let mut compared = 0;
    for (name, _, _) in PACKS {
        let shelf = Shelf::open(name);
        for example in &shelf.examples {
            let Asks::Values(case) = &example.asks else {
                continue;
            };
            if !case.household.contains("[[job]]") {
                continue;
            }
            let (_, line) = shelf.worked(&example.id, None);
            let own = &line.grid[line.own];
            for expect in &case.expects {
                let What::Figure { name: figure, .. } = &expect.what else {
                    continue;
                };
                let found = match figure.as_str() {
                    "take_home" => own.take_home,
                    "total_net_income" => own.net,
                    "disposable_income" => own.after_housing,
                    "earnings_after_costs" => own.take_home - (own.net - own.after_housing),
                    _ => continue,
                };
                close(
                    found.in_units(),
                    expect.value,
                    expect.tolerance,
                    &format!("`{}`: {figure}", example.id),
                );
                compared += 1;
            }
        }
    }
    assert!(compared >= 120, "{compared} totals compared");
}

/// A cliff at an hours limit: the sum after it is a published row.
struct Limit {
    pack: &'static str,
    id: &'static str,
    limit: i64,
    wage: &'static str,
    /// The benefit that ends there.
    ends: &'static str,
    /// Net income just before, by hand: where it ends, Income Support, its disregard, the whole rent and the local charge's part.
    before: &'static str,
    /// Net income at the limit.
    after: &'static str,
}

const LIMITS: [Limit; 4] = [
    // At 24 hours the pay is 60: the row of 60 a week. Before: 68.80 + 15 + 21.50 + 7.20.
    Limit {
        pack: "gb_1989",
        id: "gb_hansard_1989_jul_lp_60",
        limit: 24,
        wage: "2.5",
        ends: "income_support",
        before: "112.50",
        after: "123.54",
    },
    // 109.80 left after 35.22 for rent and charge. Before: 96.90 + 5 + 25.60 + 7.70.
    Limit {
        pack: "gb_1991",
        id: "gb_hansard_1991_may_grid_60",
        limit: 24,
        wage: "2.5",
        ends: "income_support",
        before: "135.20",
        after: "145.02",
    },
    // From April 1992 the limit is 16 hours. Before: 101.45 + 5 + 27.96 + 8.43.
    Limit {
        pack: "gb_1991",
        id: "gb_hansard_1992_jun_couple_child_16_at_school_40",
        limit: 16,
        wage: "2.5",
        ends: "income_support",
        before: "142.84",
        after: "147.97",
    },
    // The published row of 16 hours. Before, the pay, two thirds of 75.10 for four days, 18.85, 36.42 and 11.00 add up to 172.34.
    Limit {
        pack: "gb_1993",
        id: "gb_hansard_1995_may_couple_children_4_6_16h",
        limit: 16,
        wage: "3.5",
        ends: "unemployment_benefit",
        before: "172.34",
        after: "175.21",
    },
];

#[test]
fn the_walk_finds_the_cliff_at_the_hours_limit() {
    for Limit {
        pack,
        id,
        limit,
        wage,
        ends,
        before,
        after,
    } in LIMITS
    {
        let shelf = Shelf::open(pack);
        let hours = limit.to_string();
        let (assessment, line) = shelf.worked(id, Some((&hours, wage)));
        let turn = turn_at(&line, Fraction::whole(i128::from(limit)));
        assert_eq!(turn.kind, TurnKind::Cliff, "`{id}`");
        assert!(
            turn.causes.iter().any(|cause| cause.line == "full_time"),
            "`{id}`: {:?}",
            turn.causes
        );
        near(turn.net_after, pence(after), 2, id);
        near(point(&line, limit).net, pence(after), 2, id);
        // A penny of pay less is a penny less in pay, and nothing else.
        near(turn.net_before, pence(before), 2, id);
        assert_eq!(turn.size, turn.net_after - turn.net_before, "`{id}`");
        assert!(
            effect(&assessment, turn, "family_credit").expect("Family Credit starts") > Money::ZERO,
            "`{id}`"
        );
        assert!(
            effect(&assessment, turn, ends).expect("the other benefit ends") < Money::ZERO,
            "`{id}`"
        );
        let effects: Money = turn
            .effects
            .iter()
            .filter(|e| assessment.items[e.item].name != "short_of_costs")
            .map(|e| e.jump)
            .sum();
        near(effects, turn.size, 3, id);
    }
}

/// Income Support takes all pay above the disregard: net income is flat up to the limit.
#[test]
fn income_support_leaves_a_stretch_without_gain_up_to_the_limit() {
    for (pack, id, wage, disregard, limit) in [
        ("gb_1989", "gb_hansard_1989_jul_lp_60", "2.5", 15, 24),
        ("gb_1991", "gb_hansard_1991_may_grid_60", "2.5", 5, 24),
    ] {
        let (_, line) = Shelf::open(pack).worked(id, Some(("24", wage)));
        let from = Fraction::whole(disregard) / rate(wage);
        let to = Fraction::whole(limit);
        assert!(
            line.no_gain
                .iter()
                .any(|stretch| stretch.from == from && stretch.to == to),
            "`{id}`: {:?}",
            line.no_gain
        );
    }
}

/// The rows of 15 May 1995 fall from 16 to 24 hours for the couple without children: the benefit for days without work ends where pay
/// reaches the lower earnings limit of 58.
#[test]
fn the_fall_between_16_and_24_hours_in_1995_is_a_cliff_and_a_trap() {
    let (assessment, line) =
        Shelf::open("gb_1993").worked("gb_hansard_1995_may_couple_no_children_16h", None);
    let at = Fraction::whole(58) / rate("3.5");
    let turn = turn_at(&line, at);
    assert_eq!((turn.kind, turn.pay), (TurnKind::Cliff, pence("58")));
    // Three of six days are without work there: half of 75.10.
    assert_eq!(
        effect(&assessment, turn, "unemployment_benefit"),
        Some(-pence("37.55"))
    );
    assert_eq!(
        effect(&assessment, turn, "national_insurance"),
        Some(-pence("1.16"))
    );
    assert!(turn.size < Money::ZERO);
    let trap = line
        .traps
        .iter()
        .find(|trap| trap.from <= at && trap.to.is_none_or(|to| to > at))
        .expect("the cliff starts a trap");
    assert_eq!(trap.peak, pence("125.97"), "the published sum at 16 hours");
    assert!(
        trap.to.is_none_or(|to| to > Fraction::whole(24)),
        "it is not regained at 24 hours"
    );
    near(point(&line, 24).net, pence("119.75"), 2, "24 hours");
    assert!(trap.depth >= pence("125.97") - point(&line, 24).net);
    // Each further day of work costs a sixth of the weekly benefit; on the limit of eight hours the day before still counts.
    for day in [8, 16] {
        let turn = turn_at(&line, Fraction::whole(day));
        assert_eq!(turn.kind, TurnKind::Cliff);
        near(
            effect(&assessment, turn, "unemployment_benefit").expect("the benefit falls"),
            -pence("12.52"),
            1,
            "a day",
        );
    }
}

/// Until October 1989 the contribution's rate was that of the bracket, on the whole pay: three cliffs.
#[test]
fn contributions_of_1988_jump_at_each_bracket() {
    let (assessment, line) =
        Shelf::open("gb_1988").worked("gb_hansard_1989_feb_lp_100", Some(("80", "1.5")));
    // The wage is low so that all three lie above 24 hours: below, Income Support makes up for the contribution.
    for (pay, jump) in [("41", "2.05"), ("70", "1.40"), ("105", "2.10")] {
        let turn = turn_at(&line, rate(pay) / rate("1.5"));
        assert_eq!((turn.kind, turn.pay), (TurnKind::Cliff, pence(pay)));
        assert_eq!(
            effect(&assessment, turn, "national_insurance"),
            Some(-pence(jump)),
            "at {pay}"
        );
        assert!(
            turn.size < Money::ZERO && turn.size > -pence(jump),
            "help makes up a part: {}",
            turn.size.plain()
        );
    }
}

/// "Family credit runs out at 182 a week" for a couple with children aged 13 and 16 (Family benefits, 23 October 1989, closing notes).
#[test]
fn family_credit_of_1989_ends_where_the_answer_says() {
    let (_, line) = Shelf::open("gb_1989").worked("gb_hansard_1989_oct_co_1", Some(("40", "4.5")));
    let turn = line
        .turns
        .iter()
        .find(|turn| {
            turn.pay > pence("100")
                && turn
                    .causes
                    .iter()
                    .any(|cause| cause.line == "family_credit")
        })
        .expect("it ends");
    near(turn.pay, pence("182"), 50, "end of Family Credit");
}

/// The worst case of 25 November 1987: of one more pound 27, 9, 45 and 16 pence go, 97 in all.
#[test]
fn the_extreme_trap_of_1987_has_its_published_parts() {
    let (assessment, line) = Shelf::open("gb_1988").worked("gb_hansard_1987_extreme_trap", None);
    let own = Hours::whole(40).as_fraction();
    let segment = line
        .segments
        .iter()
        .find(|s| s.from <= own && own < s.to)
        .expect("40 hours lie on the line");
    let share = |names: &[&str]| -> Fraction {
        (0..assessment.items.len())
            .filter(|item| names.contains(&assessment.items[*item].name.as_str()))
            .map(|item| -segment.shares[item])
            .fold(Fraction::ZERO, |sum, part| sum + part)
    };
    let penny = rate("0.005");
    for (items, published) in [
        (&["income_tax"][..], "0.27"),
        (&["national_insurance"], "0.09"),
        (&["family_credit"], "0.45"),
        (&["rent_rebate", "rate_rebate"], "0.16"),
    ] {
        close(share(items), rate(published), penny, items[0]);
    }
    close(
        segment.metr.expect("pay rises"),
        rate("0.97"),
        penny,
        "total",
    );
}

/// The grid of 13 May 1991 prints net income in steps of 10 a week: where both rows lie on one stretch, its rate is the walk's.
#[test]
fn the_steps_of_the_grid_of_1991_are_the_rates_of_the_walk() {
    let shelf = Shelf::open("gb_1991");
    let printed = |pay: u32| -> Fraction {
        let case = shelf.case(&format!("gb_hansard_1991_may_grid_{pay}"));
        let total = |expect: &&hourworth::load::Expect| matches!(&expect.what, What::Figure { name, .. } if name == "disposable_income");
        case.expects
            .iter()
            .find(total)
            .expect("the row has a total")
            .value
    };
    for (pay, wage) in [
        (70, "1.75"),
        (80, "2"),
        (110, "2.75"),
        (120, "3"),
        (130, "3.25"),
        (140, "3.5"),
        (150, "3.75"),
    ] {
        let (_, line) = shelf.worked(&format!("gb_hansard_1991_may_grid_{pay}"), None);
        let (from, to) = (
            Fraction::whole(40),
            Fraction::whole(i128::from(pay) + 10) / rate(wage),
        );
        let stretch = line
            .segments
            .iter()
            .find(|s| s.from <= from && to <= s.to)
            .unwrap_or_else(|| panic!("a turn between {pay} and {}", pay + 10));
        let step = Fraction::ONE - (printed(pay + 10) - printed(pay)) / Fraction::whole(10);
        // Two totals of parts rounded to a penny each.
        close(
            stretch.metr.expect("pay rises"),
            step,
            rate("0.003"),
            &format!("from {pay}"),
        );
    }
}
