//! What one earner's section says of later: the sums once facts about past periods have settled, against those of now.

use super::Detail;
use super::steps::Step;
use super::words::{Measure, Words};
use crate::measures::{BudgetLine, EarnerResult, ItemKind, Point, Settled};
use crate::num::Money;
use crate::statement::error::StatementError;
use crate::statement::view::{Line, Part, PartKind};

/// A point now and once settled, under the name that the letter gives it.
struct Pair<'a> {
    name: String,
    now: &'a Point,
    later: &'a Point,
    place: Place,
}

/// Which point it is.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Place {
    /// All jobs of the earner ended, or no job yet.
    NoWork,
    /// Today's hours.
    Today,
    /// Where an offer leads, or four hours more where there is no offer.
    Asked,
    /// Four hours more beside an offer.
    Beside,
}

/// The part on later; none where nothing that the section speaks of changes. `place` is the section's place in the letter.
pub(super) fn later(
    words: &Words<'_>,
    earner: &EarnerResult,
    steps: &[Step<'_>],
    (measure, place): (Measure, usize),
) -> Result<Option<Part>, StatementError> {
    let Some(settled) = &words.assessment.settled else {
        return Ok(None);
    };
    let causes = causes(words, settled)?;
    let said = |key: &str| words.say(key, &[("causes", &causes)]);
    let lines = if settled.held.is_empty() {
        let Some(other) = settled.earners.iter().find(|e| e.adult == earner.adult) else {
            return Ok(None);
        };
        let pairs = pairs(words, (earner, other), steps)?;
        // Today's sums are those of both partners, and stand in the first section.
        let told = |pair: &&Pair<'_>| match (pair.place, words.detail) {
            (Place::Today, _) => place == 0,
            (Place::Asked, _) | (_, Detail::Full | Detail::Plain) => true,
            (_, Detail::Short | Detail::Bare | Detail::Brief) => false,
        };
        let changed = |pair: &Pair<'_>| pair.now.items != pair.later.items;
        if pairs.iter().filter(told).any(changed) {
            let today = Words::today(other);
            let mut lines = vec![Line::from(said("later.lead")?)];
            for pair in pairs.iter().filter(told) {
                lines.push(line(words, pair, measure, today)?);
            }
            lines
        } else if place == 0 {
            vec![Line::from(said("later.elsewhere")?)]
        } else {
            vec![]
        }
    } else if place == 0 {
        vec![Line::from(said("later.held")?)]
    } else {
        vec![]
    };
    if lines.is_empty() {
        return Ok(None);
    }
    words
        .part("later.heading", PartKind::Paragraphs, lines)
        .map(Some)
}

/// When it is so, as clauses after "once".
fn causes(words: &Words<'_>, settled: &Settled) -> Result<String, StatementError> {
    let mut said: Vec<String> = vec![];
    for fact in &settled.facts {
        let cause = match words.label(&format!("settles.{fact}")) {
            Some(label) => label.trim_end_matches('.').to_owned(),
            None => words.plain("later.cause")?,
        };
        if !said.contains(&cause) {
            said.push(cause);
        }
    }
    let last = said.pop().unwrap_or_default();
    if said.is_empty() {
        return Ok(last);
    }
    let before = words.enumerated(&said);
    words.say("later.and", &[("list", &before), ("last", &last)])
}

/// Not in work, today and each step, now and once settled.
fn pairs<'a>(
    words: &Words<'_>,
    (now, later): (&'a EarnerResult, &'a EarnerResult),
    steps: &'a [Step<'a>],
) -> Result<Vec<Pair<'a>>, StatementError> {
    let today = words.plain(if now.has_job {
        "table.today"
    } else {
        "table.today_no_work"
    })?;
    let mut pairs = vec![Pair {
        name: today,
        now: Words::today(now),
        later: Words::today(later),
        place: Place::Today,
    }];
    let offered = steps.iter().any(|step| step.offer.is_some());
    for step in steps {
        let of_step = |line: &&BudgetLine| line.terms == step.line.terms;
        let Some(line) = later.lines.iter().find(of_step) else {
            continue;
        };
        pairs.push(Pair {
            name: step.name.clone(),
            now: step.to,
            later: &line.grid[line.step_to],
            place: if step.offer.is_some() || !offered {
                Place::Asked
            } else {
                Place::Beside
            },
        });
    }
    if now.has_job {
        pairs.push(Pair {
            name: words.plain("table.no_work")?,
            now: &now.not_in_work,
            later: &later.not_in_work,
            place: Place::NoWork,
        });
    }
    Ok(pairs)
}

/// One point: its sum then, that of now, what changes; for a step also what is kept of it then.
fn line(
    words: &Words<'_>,
    pair: &Pair<'_>,
    measure: Measure,
    today: &Point,
) -> Result<Line, StatementError> {
    let sum = |point: &Point| {
        let star = words.marks.of_points(&[point], |_| true);
        format!("{}{star}", words.currency.short(measure.at(point)))
    };
    let effects = effects(words, pair)?;
    let mut text = if effects.is_empty() {
        words.say("later.same", &[("sum", &sum(pair.later))])?
    } else {
        let values = [
            ("sum", sum(pair.later)),
            ("now", sum(pair.now)),
            ("effects", words.enumerated(&effects)),
        ];
        let values: Vec<(&str, &str)> = values.iter().map(|(k, v)| (*k, v.as_str())).collect();
        words.say("later.point", &values)?
    };
    if matches!(pair.place, Place::Asked | Place::Beside) {
        let gain = measure.at(pair.later) - measure.at(today);
        let key = match gain.0 {
            0 => "later.kept_same",
            1.. => "later.kept_more",
            _ => "later.kept_less",
        };
        let gain = words.currency.short(Money(gain.0.abs()));
        text.push(' ');
        text.push_str(&words.say(key, &[("sum", &gain)])?);
    }
    Ok(Line {
        lead: words.say("later.name", &[("name", &pair.name)])?,
        text,
    })
}

/// What changes at a point: each item by its name, those of one name together.
fn effects(words: &Words<'_>, pair: &Pair<'_>) -> Result<Vec<String>, StatementError> {
    let mut changes: Vec<(String, Money, ItemKind)> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let change = pair.later.items[position] - pair.now.items[position];
        if change == Money::ZERO {
            continue;
        }
        let name = words.item(position)?;
        match changes.iter_mut().find(|(known, ..)| *known == name) {
            // Folded items have one name, whichever way they enter the sum, so nothing is said of their size.
            Some((_, sum, kind)) if *kind == item.kind => *sum += change,
            Some((_, sum, _)) => *sum = Money::ZERO,
            None => changes.push((name, change, item.kind)),
        }
    }
    changes
        .into_iter()
        .map(|(name, change, kind)| {
            let key = match (kind, change.0) {
                (_, 0) => "later.effect",
                (ItemKind::Passport, 1..) => "turns.effect_won",
                (ItemKind::Passport, _) => "turns.effect_lost",
                (_, 1..) => "turns.effect_more",
                (_, _) => "turns.effect_less",
            };
            let sum = words.currency.short(Money(change.0.abs()));
            words.say(key, &[("name", &name), ("sum", &sum)])
        })
        .collect()
}
