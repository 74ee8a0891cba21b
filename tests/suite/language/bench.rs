//! A checked pack and a section's records: what each figure and item comes to.

use super::section::{Record, Section, name_and_kind};
use chrono::NaiveDate;
use hourworth::case::{
    ADULT, Delivery, FactSpec, FactType, Household, Instance, JOB, JobRole, Known, Need, Schema,
};
use hourworth::engine::{JobChoice, Machine, Setting, working};
use hourworth::load::schema_of;
use hourworth::num::{Fraction, Hours};
use hourworth::program::Moment;
use hourworth::rules::{Pack, day, decimal};

/// What stands where a section leaves out a fact that is always there.
const ALWAYS: [(&str, &str); 3] = [("birth", "1990-01-01"), ("hours", "0"), ("wage", "10")];

fn value(spec: &FactSpec, given: Option<&str>) -> i64 {
    let text = given.or_else(|| {
        ALWAYS
            .iter()
            .find(|(name, _)| *name == spec.name)
            .map(|(_, text)| *text)
    });
    let Some(text) = text else {
        return match spec.need {
            Need::Default(value) => value,
            Need::Required => panic!("the section does not give `{}`", spec.name),
        };
    };
    let units = |text: &str, units: i64| {
        let scaled = decimal(text).expect("a number") * Fraction::whole(i128::from(units));
        assert_eq!(
            scaled.denominator(),
            1,
            "`{text}` is too fine for `{}`",
            spec.name
        );
        i64::try_from(scaled.floor()).expect("a small number")
    };
    match &spec.ty {
        FactType::YesNo => i64::from(text == "yes"),
        FactType::Choice(words) => words
            .iter()
            .position(|w| w == text)
            .expect("a word of the choice") as i64,
        FactType::Date => day(text).expect("a day"),
        FactType::Rate => units(text.trim_end_matches('%'), 100),
        FactType::Money(_) | FactType::Hours | FactType::Number | FactType::Count => {
            units(text, spec.ty.units())
        }
    }
}

pub fn household(schema: &Schema, records: &[Record]) -> Household {
    let mut instances: Vec<Vec<Instance>> = vec![vec![]; schema.kinds.len()];
    let mut add = |kind: usize, owner: usize, facts: &[(String, String)]| {
        for (name, _) in facts {
            assert!(
                schema.kinds[kind].facts.iter().any(|f| f.name == *name),
                "the pack has no fact `{name}`"
            );
        }
        let given = |name: &str| {
            facts
                .iter()
                .find(|(n, _)| n == name)
                .map(|(_, v)| v.as_str())
        };
        let values: Vec<i64> = schema.kinds[kind]
            .facts
            .iter()
            .map(|spec| value(spec, given(&spec.name)))
            .collect();
        let known = vec![Known::Told; values.len()];
        instances[kind].push(Instance {
            label: String::new(),
            reference: String::new(),
            owner: owner - 1,
            values,
            known,
        });
    };
    let some = |kind: &str| records.iter().filter(|r| r.kind == kind).count();
    for (kind, spec) in schema.kinds.iter().enumerate() {
        for record in records.iter().filter(|r| r.kind == spec.name) {
            add(kind, record.owner, &record.facts);
        }
        if kind < JOB.min(ADULT + 1) && some(&spec.name) == 0 {
            add(kind, 1, &[]);
        }
    }
    for adult in 1..=some("adult").max(1) {
        if !records.iter().any(|r| r.kind == "job" && r.owner == adult) {
            add(JOB, adult, &[]);
        }
    }
    let mut roles: Vec<JobRole> = vec![];
    for (at, job) in instances[JOB].iter().enumerate() {
        let further = instances[JOB][..at]
            .iter()
            .any(|before| before.owner == job.owner);
        roles.push(if further {
            JobRole::Further
        } else {
            JobRole::Today
        });
    }
    for record in records {
        assert!(
            schema.kinds.iter().any(|k| k.name == record.kind),
            "the pack has no kind `{}`",
            record.kind
        );
    }
    Household {
        reference: "test".into(),
        delivery: Delivery::default(),
        target: None,
        instances,
        job_roles: roles,
        offers: vec![],
        row: 0,
    }
}

/// Why the pack does not give what the section expects: one line for each difference.
pub fn differences(section: &Section, pack: &Pack) -> Vec<String> {
    let schema = schema_of(pack);
    let household = household(&schema, &section.records);
    section
        .expects
        .iter()
        .filter_map(|expect| difference(expect, pack, &schema, &household))
        .collect()
}

/// `NAME [of KIND N] [once settled] [at H hours] [on DAY] = VALUE`; `note` and `held` stand for the notes and the reasons to hold.
fn difference(expect: &str, pack: &Pack, schema: &Schema, household: &Household) -> Option<String> {
    let (head, wanted) = expect.split_once(" = ").unwrap_or((expect, ""));
    let words: Vec<&str> = head.split(' ').collect();
    let after = |word: &str, by: usize| {
        words
            .iter()
            .position(|w| *w == word)
            .and_then(|at| words.get(at + by))
            .copied()
    };
    let on = after("on", 1).map_or(20_500, |d| day(d).expect("a day"));
    let moment = match after("once", 1) {
        Some(_) => Moment::Settled,
        None => Moment::Now,
    };
    let setting = Setting::new(household, 0, JobChoice::Today)
        .expect("the first adult")
        .at_moment(moment);
    let dates = vec![on; pack.manifest.dates.len()];
    let program = match pack.program(&dates, &[], &setting.shape) {
        Ok(program) => program,
        Err(faults) => return Some(format!("no program: {faults:?}")),
    };
    let machine = Machine::new(program);
    let special = machine.special(&setting.facts(machine.program()));
    let hours = after("at", 1).map_or(setting.own_hours(), |h| {
        Hours(
            i64::try_from((decimal(h).expect("hours") * Fraction::whole(100)).floor())
                .expect("hours of a week"),
        )
    });
    match words[0] {
        "note" => {
            return (special.standing(hours).notes.join(", ") != wanted)
                .then(|| format!("notes: {:?}", special.standing(hours).notes));
        }
        "held" => {
            return (special.standing(hours).holds.join(", ") != wanted)
                .then(|| format!("holds: {:?}", special.standing(hours).holds));
        }
        _ => {}
    }
    let (name, kind) = name_and_kind(head);
    let kind = schema
        .kinds
        .iter()
        .position(|k| k.name == kind)
        .expect("a kind of the pack");
    let instance = after("of", 2)
        .and_then(|n| n.parse::<usize>().ok())
        .unwrap_or(1)
        - 1;
    let lines = working(&special, hours);
    let found = lines
        .iter()
        .find(|l| l.name == name && l.of == (kind, instance))
        .map_or("nothing", |l| l.value.as_str());
    (found != wanted).then(|| format!("{head} = {found}, expected {wanted}"))
}

/// The first day that a section's expectations may mean, as text, so that the default above can be read.
#[test]
fn the_day_of_sections_is_in_the_year_that_they_cover() {
    let day = NaiveDate::from_epoch_days(20_500).expect("a day");
    assert_eq!(day.to_string(), "2026-02-16");
}
