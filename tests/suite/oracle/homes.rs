//! Random households for any pack. In: the pack's schema, figures of the law that are worth meeting, a day, chance. Out: households with
//! facts in their ranges, weighted towards limits, ages and nothing at all; their text; and smaller ones for a failure.

use super::book::{ADULT, Book, CHILD, Cell, HOUSEHOLD, JOB, OTHER};
use super::luck::Luck;
use super::text::{Q, calendar, day_number, q, whole};
use hourworth::case::{
    Delivery, FactSpec, FactType, Household, Instance, JobRole, Known, Need, Schema,
};
use num_traits::ToPrimitive;
use std::fmt::Write;

/// What a generator of households may use.
pub struct Village<'a> {
    pub schema: &'a Schema,
    /// Figures of the law, in whole units of the currency or years.
    pub marks: Vec<Q>,
    /// The day of the list.
    pub day: i64,
    pub most_children: usize,
    /// The highest wage, in ten-thousandths.
    pub most_pay: i64,
}

/// The values of all amounts, and of those by the month, week and year.
pub fn marks(book: &Book) -> Vec<Q> {
    let mut out: Vec<Q> = Vec::new();
    for row in book.amounts.values().flatten() {
        if let Some(Cell::Number(value)) = &row.value {
            out.push(value.clone());
        }
    }
    out.extend(
        out.clone()
            .iter()
            .flat_map(|v| [v * q(1, 12), v * q(12, 52)]),
    );
    out.extend([whole(0), whole(1), whole(16), whole(25)]);
    // The order of a map is not the same twice.
    out.sort();
    out
}

impl Village<'_> {
    /// A household.
    pub fn household(&self, luck: &mut Luck) -> Household {
        let kinds = &self.schema.kinds;
        let mut instances: Vec<Vec<Instance>> = kinds.iter().map(|_| Vec::new()).collect();
        instances[HOUSEHOLD].push(self.record(luck, HOUSEHOLD, 0));
        let adults = 1 + luck.below(2);
        let children = if luck.percent(35) {
            0
        } else {
            luck.below(self.most_children + 1)
        };
        let others = if luck.percent(70) {
            0
        } else {
            1 + luck.below(2)
        };
        for (kind, many) in [(ADULT, adults), (CHILD, children), (OTHER, others)] {
            for _ in 0..many {
                let record = self.record(luck, kind, 0);
                instances[kind].push(record);
            }
        }
        let mut job_roles = Vec::new();
        for adult in 0..adults {
            for at in 0..1 + usize::from(luck.percent(20)) {
                let record = self.record(luck, JOB, adult);
                instances[JOB].push(record);
                job_roles.push(if at == 0 {
                    JobRole::Today
                } else {
                    JobRole::Further
                });
            }
        }
        for kind in JOB + 1..kinds.len() {
            let owners = instances[kinds[kind].owner.expect("a record has an owner")].len();
            if owners > 0 && luck.percent(60) {
                for _ in 0..1 + luck.below(3) {
                    let owner = luck.below(owners);
                    let record = self.record(luck, kind, owner);
                    instances[kind].push(record);
                }
            }
        }
        let mut offers = Vec::new();
        if luck.percent(30) {
            let owner = luck.below(adults);
            offers.push(self.record(luck, JOB, owner));
        }
        Household {
            reference: "R1".into(),
            delivery: Delivery::default(),
            target: None,
            instances,
            job_roles,
            offers,
            row: 1,
        }
    }

    fn record(&self, luck: &mut Luck, kind: usize, owner: usize) -> Instance {
        let values: Vec<i64> = self.schema.kinds[kind]
            .facts
            .iter()
            .map(|fact| self.value(luck, kind, fact))
            .collect();
        let known = vec![Known::Told; values.len()];
        Instance {
            label: String::new(),
            reference: String::new(),
            owner,
            values,
            known,
        }
    }

    fn value(&self, luck: &mut Luck, kind: usize, fact: &FactSpec) -> i64 {
        let drawn = match (kind, fact.name.as_str()) {
            (JOB, "hours") => match luck.below(10) {
                0..=2 => 0,
                3..=7 => luck.between(0, 200) * 25,
                8 => luck.between(1, 4800),
                _ => luck.between(0, 16_800),
            },
            (JOB, "wage") => match luck.below(12) {
                0 => 0,
                1..=7 => luck.between(500, 4000) * 100,
                8 => luck.between(50_000, 400_000),
                9 | 10 => luck.between(4000, 30_000) * 100,
                _ => self.most_pay,
            }
            .min(self.most_pay),
            _ => match (fact.need, luck.percent(50)) {
                (Need::Default(value), true) => value,
                _ => self.any(luck, kind, fact),
            },
        };
        drawn.clamp(fact.min, fact.max)
    }

    fn any(&self, luck: &mut Luck, kind: usize, fact: &FactSpec) -> i64 {
        match &fact.ty {
            FactType::YesNo => luck.between(0, 1),
            FactType::Choice(words) => luck.below(words.len()) as i64,
            FactType::Date => {
                let (year, month, day) = calendar(self.day);
                let ages: &[i64] = if kind == CHILD {
                    &[0, 1, 5, 7, 8, 11, 16, 18, 19]
                } else {
                    &[16, 18, 21, 23, 25, 30, 45, 60, 66, 67, 80]
                };
                match luck.below(6) {
                    // A birthday yesterday, today or tomorrow, or on a leap day.
                    0 | 1 => {
                        day_number(year - luck.pick(ages), month, day.min(28)) + luck.between(-1, 1)
                    }
                    2 => day_number(2004, 2, 29) + luck.between(-1, 1),
                    3 => day_number(2017, 4, 6) + luck.between(-1, 1),
                    _ => {
                        self.day - luck.between(0, if kind == CHILD { 19 * 365 } else { 60 * 365 })
                    }
                }
            }
            FactType::Money(_)
            | FactType::Rate
            | FactType::Hours
            | FactType::Number
            | FactType::Count => {
                let units = fact.ty.units();
                match luck.below(8) {
                    0 => fact.min,
                    1 => 0,
                    2 => luck.between(fact.min, fact.max),
                    3 | 4 => {
                        (luck.pick(&self.marks) * whole(i128::from(units)))
                            .round()
                            .to_integer()
                            .to_i64()
                            .unwrap_or(0)
                            + luck.between(-1, 1)
                    }
                    5 => luck.between(0, 20) * units,
                    _ => {
                        // As many small values as large ones.
                        let digits = u32::try_from(luck.between(0, 7)).expect("few digits");
                        luck.between(0, 10i64.pow(digits)).saturating_mul(units) / 100
                    }
                }
            }
        }
    }
}

/// A household as text, with the names of its facts.
pub fn shown(schema: &Schema, household: &Household) -> String {
    let mut out = String::new();
    let mut record = |name: &str, facts: &[FactSpec], one: &Instance| {
        let _ = writeln!(out, "[[{name}]]  # owner {}", one.owner);
        for (fact, value) in facts.iter().zip(&one.values) {
            if fact.need != Need::Default(*value) {
                let _ = writeln!(
                    out,
                    "{} = {}",
                    fact.name,
                    hourworth::engine::fact_text(&fact.ty, *value)
                );
            }
        }
    };
    for (kind, records) in schema.kinds.iter().zip(&household.instances) {
        for (at, one) in records.iter().enumerate() {
            let further = kind.name == "job" && household.job_roles[at] == JobRole::Further;
            record(
                if further { "job.further" } else { &kind.name },
                &kind.facts,
                one,
            );
        }
    }
    for offer in &household.offers {
        record("offer", &schema.kinds[JOB].facts, offer);
    }
    out
}

/// Households with one record less, or one fact at its default or least value.
pub fn smaller(schema: &Schema, household: &Household) -> Vec<Household> {
    let mut out = Vec::new();
    let mut add = |change: &dyn Fn(&mut Household)| {
        let mut copy = household.clone();
        change(&mut copy);
        out.push(copy);
    };
    for at in 0..household.offers.len() {
        add(&|h| {
            h.offers.remove(at);
        });
    }
    for kind in (CHILD..schema.kinds.len()).rev() {
        let owned = schema.kinds.iter().any(|k| k.owner == Some(kind));
        for at in 0..household.instances[kind].len() {
            if owned || (kind == JOB && household.job_roles[at] == JobRole::Today) {
                continue;
            }
            add(&|h| {
                h.instances[kind].remove(at);
                if kind == JOB {
                    h.job_roles.remove(at);
                }
            });
        }
    }
    for (kind, spec) in schema.kinds.iter().enumerate() {
        for at in 0..household.instances[kind].len() {
            for (place, fact) in spec.facts.iter().enumerate() {
                let value = household.instances[kind][at].values[place];
                let plain = match fact.need {
                    Need::Default(value) => value,
                    Need::Required => fact.min.max(0).min(fact.max),
                };
                if value != plain && fact.ty != FactType::Date {
                    add(&|h| h.instances[kind][at].values[place] = plain);
                    let round = value - value % fact.ty.units();
                    if round != value && round >= fact.min {
                        add(&|h| h.instances[kind][at].values[place] = round);
                    }
                }
            }
        }
    }
    out
}

/// A household for a schema that lacks some of the facts or kinds.
pub fn project(from: &Schema, to: &Schema, household: &Household) -> Household {
    let mut copy = household.clone();
    copy.instances = to
        .kinds
        .iter()
        .map(|kind| {
            let old = from
                .kinds
                .iter()
                .position(|k| k.name == kind.name)
                .expect("no kind is new");
            let place = |fact: &FactSpec| {
                from.kinds[old]
                    .facts
                    .iter()
                    .position(|f| f.name == fact.name)
                    .expect("no fact is new")
            };
            let records = household.instances[old].iter();
            records
                .map(|r| Instance {
                    values: kind.facts.iter().map(|f| r.values[place(f)]).collect(),
                    ..r.clone()
                })
                .collect()
        })
        .collect();
    let place = |fact: &FactSpec| {
        from.kinds[JOB]
            .facts
            .iter()
            .position(|f| f.name == fact.name)
            .expect("no fact is new")
    };
    for offer in &mut copy.offers {
        offer.values = to.kinds[JOB]
            .facts
            .iter()
            .map(|f| offer.values[place(f)])
            .collect();
    }
    copy
}
