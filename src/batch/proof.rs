//! Running a pack's published examples. In: a pack and an example. Out: for each published value, what the pack gives.

use super::Books;
use crate::case::{ListSettings, ReadOptions, day_of, read_single};
use crate::load::{Case, Expect, Terms, What};
use crate::num::Fraction;
use crate::rules::Pack;

/// What came of one published value.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Proof {
    /// The pack's exact value lies within the tolerance.
    Met(Fraction),
    /// It does not.
    NotMet(Fraction),
    /// There is no such value: the reason.
    NoValue(String),
}

/// Runs one example: one proof for each of its values, in order.
pub fn prove(pack: &Pack, case: &Case) -> Vec<Proof> {
    let all = |reason: String| {
        case.expects
            .iter()
            .map(|_| Proof::NoValue(reason.clone()))
            .collect()
    };
    let settings = match settings(case) {
        Some(settings) => settings,
        None => return all("the date is out of range".to_owned()),
    };
    // Published examples give one day; it stands for every date of the pack.
    let terms = Terms {
        dates: vec![case.date; pack.manifest.dates.len()],
        changes: case.changes.clone(),
        grid_to: None,
        grid_step: None,
    };
    if let Err(faults) = pack.accepts(&terms.dates, &terms.changes) {
        let faults: Vec<String> = faults.iter().map(|f| f.line(&pack.sources)).collect();
        return all(faults.join("; "));
    }
    let mut books = Books::new(pack.clone(), terms);
    let options = ReadOptions::default();
    let household = match read_single(
        "example",
        &case.household,
        books.schema(),
        &settings,
        &options,
    ) {
        Ok(household) => household,
        Err(rejected) => {
            let faults: Vec<String> = rejected.faults.iter().map(ToString::to_string).collect();
            return all(faults.join("; "));
        }
    };
    case.expects
        .iter()
        .map(|expect| {
            let found = match &expect.what {
                What::Figure { name, of, period } => books
                    .figure(&household, name, of, expect.moment)
                    .and_then(|value| in_period(value, period, pack)),
                What::Metr { adult, hours } => {
                    books.metr(&household, *adult, *hours, expect.moment)
                }
            };
            judge(expect, found)
        })
        .collect()
}

fn judge(expect: &Expect, found: Result<Fraction, String>) -> Proof {
    match found {
        Err(reason) => Proof::NoValue(reason),
        Ok(value) => {
            let off = value - expect.value;
            let off = if off.is_negative() { -off } else { off };
            if off <= expect.tolerance {
                Proof::Met(value)
            } else {
                Proof::NotMet(value)
            }
        }
    }
}

/// A value of the statement period in the period of the source.
fn in_period(value: Fraction, period: &str, pack: &Pack) -> Result<Fraction, String> {
    match (pack.manifest.period.word(), period) {
        (_, "") => Ok(value),
        (own, wanted) if own == wanted => Ok(value),
        ("month", "year") => Ok(value * Fraction::whole(12)),
        ("week", "year") => Ok(value * Fraction::whole(52)),
        (own, wanted) => Err(format!("a {own} cannot be turned into a `{wanted}`")),
    }
}

fn settings(case: &Case) -> Option<ListSettings> {
    Some(ListSettings {
        title: String::new(),
        pack: String::new(),
        date: day_of(case.date)?,
        dates: vec![],
        format: crate::case::Format::default(),
        delimiter: None,
        changed: vec![],
        grid: crate::case::GridSettings::default(),
        local: vec![],
        language: None,
    })
}
