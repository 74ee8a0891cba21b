//! The facts that a letter rests on: seen, told, assumed, missing; in words, those of one person together.

use super::Detail;
use super::words::Words;
use crate::measures::FactUse;
use crate::statement::context::FactShape;
use crate::statement::error::StatementError;
use crate::statement::money::{Decimals, readable};
use crate::statement::view::Line;
use chrono::NaiveDate;

/// The kind of record of which a person can have several without a name.
const JOB: &str = "job";
/// The label of a fact that is not worth a word where it is no or none.
const UNSAID: &str = "-";
/// Facts that were assumed to be no or none are named up to this many.
const NAMED_NONE: usize = 12;

/// All facts, by how they are known.
pub(super) fn facts(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let shown: Vec<&FactUse> = words
        .assessment
        .facts
        .iter()
        .filter(|fact| is_shown(words, fact))
        .collect();
    let mut lines = vec![];
    for (known, key) in [('s', "seen"), ('t', "told"), ('a', "assumed")] {
        let (none, some): (Vec<&FactUse>, Vec<&FactUse>) = shown
            .iter()
            .filter(|fact| fact.known == known)
            .partition(|fact| known == 'a' && is_nothing(words, fact));
        push(words, &mut lines, key, &some)?;
        push_none(words, &mut lines, &none)?;
    }
    let missing: Vec<&FactUse> = shown
        .into_iter()
        .filter(|fact| !matches!(fact.known, 's' | 't' | 'a'))
        .collect();
    push(words, &mut lines, "missing", &missing)?;
    Ok(lines)
}

/// Whether a fact may be printed: not another adult's where the letter is for one, and none that gives a folded item away.
fn is_shown(words: &Words<'_>, fact: &FactUse) -> bool {
    let others =
        |only: usize| {
            words.assessment.earners.iter().any(|earner| {
                earner.adult != only && !earner.name.is_empty() && earner.name == fact.of
            })
        };
    let reveals = ["fact", "said"]
        .iter()
        .any(|kind| words.gives_away(&format!("{kind}.{}", fact.name)));
    !words.context.delivery.only.is_some_and(others)
        && !reveals
        && !words.reveals(&readable(&fact.name))
}

/// Adds one paragraph of facts, those of one person together.
fn push(
    words: &Words<'_>,
    lines: &mut Vec<Line>,
    key: &str,
    facts: &[&FactUse],
) -> Result<(), StatementError> {
    let mut owners: Vec<&str> = vec![];
    for fact in facts {
        if !owners.contains(&fact.of.as_str()) {
            owners.push(&fact.of);
        }
    }
    let mut groups = vec![];
    for owner in owners {
        let of_owner: Vec<&FactUse> = facts
            .iter()
            .copied()
            .filter(|fact| fact.of == owner)
            .collect();
        let list = owned(words, &of_owner)?;
        groups.push(if owner.is_empty() {
            list
        } else {
            words.say("facts.of", &[("of", owner), ("list", &list)])?
        });
    }
    if !groups.is_empty() {
        lines.push(Line {
            lead: words.plain(&format!("facts.{key}_lead"))?,
            text: words.say("facts.list", &[("list", &words.listed(&groups)?)])?,
        });
    }
    Ok(())
}

/// The facts of one person; those of each further job apart.
fn owned(words: &Words<'_>, facts: &[&FactUse]) -> Result<String, StatementError> {
    let mut list = String::new();
    let mut said: Vec<String> = vec![];
    let mut names: Vec<&str> = vec![];
    for fact in facts {
        if fact.kind == JOB && names.contains(&fact.name.as_str()) {
            list = joined(words, list, &said)?;
            said.clear();
            names.clear();
        }
        if fact.kind == JOB {
            names.push(&fact.name);
        }
        let text = fact_text(words, fact)?;
        if !said.contains(&text) {
            said.push(text);
        }
    }
    joined(words, list, &said)
}

/// What was said before, and of a further job.
fn joined(words: &Words<'_>, list: String, said: &[String]) -> Result<String, StatementError> {
    let more = words.enumerated(said);
    if list.is_empty() {
        return Ok(more);
    }
    words.say("facts.again", &[("list", &list), ("more", &more)])
}

/// Adds the facts that were assumed to be no or none: the names of some, people's own first, each once; and how many more.
fn push_none(
    words: &Words<'_>,
    lines: &mut Vec<Line>,
    facts: &[&FactUse],
) -> Result<(), StatementError> {
    let (own, others): (Vec<&FactUse>, Vec<&FactUse>) =
        facts.iter().partition(|fact| !fact.of.is_empty());
    let mut names: Vec<String> = vec![];
    for fact in own.into_iter().chain(others) {
        let labels = &words.context.labels;
        let keys = [
            format!("none.{}.{}", fact.name, figure(fact)),
            format!("none.{}", fact.name),
        ];
        let found = keys.iter().find(|key| labels.contains_key(*key));
        if found.is_some_and(|key| words.gives_away(key)) {
            continue;
        }
        let name = match found {
            Some(key) => labels[key].clone(),
            None => fact_name(words, fact)?,
        };
        if name != UNSAID && !words.reveals(&name) && !names.contains(&name) {
            names.push(name);
        }
    }
    let most = match words.detail {
        Detail::Full => NAMED_NONE,
        Detail::Plain | Detail::Short | Detail::Bare | Detail::Brief => NAMED_NONE / 2,
    };
    let more = names.len().saturating_sub(most);
    if more > 1 {
        names.truncate(most);
    }
    let list = words.enumerated(&names);
    if !names.is_empty() {
        lines.push(Line {
            lead: words.plain("facts.assumed_none_lead")?,
            text: match more {
                0 | 1 => words.say("facts.list", &[("list", &list)])?,
                _ => {
                    let count = more.to_string();
                    words.say("facts.some", &[("list", &list), ("count", &count)])?
                }
            },
        });
    }
    Ok(())
}

/// A fact as it is said.
fn fact_text(words: &Words<'_>, fact: &FactUse) -> Result<String, StatementError> {
    let value = value(words, fact)?;
    match words.label(&format!("said.{}", fact.name)) {
        Some(pattern) => Ok(pattern.replace("{value}", &value)),
        None => {
            let name = fact_name(words, fact)?;
            words.say("facts.fact", &[("name", &name), ("value", &value)])
        }
    }
}

/// The name of a fact.
pub(super) fn fact_name(words: &Words<'_>, fact: &FactUse) -> Result<String, StatementError> {
    words.named(&format!("fact.{}", fact.name), &fact.name)
}

/// The value without its unit.
fn figure(fact: &FactUse) -> &str {
    fact.value.strip_suffix(" hours").unwrap_or(&fact.value)
}

/// What is not there where a fact has this value, if the pack says so: 168 hours before a premium are no premium.
fn none_of_value(words: &Words<'_>, fact: &FactUse) -> Option<String> {
    let key = format!("none.{}.{}", fact.name, figure(fact));
    words.context.labels.get(&key).cloned()
}

/// A value in words.
pub(super) fn value(words: &Words<'_>, fact: &FactUse) -> Result<String, StatementError> {
    if let Some(word) = words.label(&format!("word.{}.{}", fact.name, figure(fact))) {
        return Ok(word);
    }
    let raw = fact.value.as_str();
    let shape = words
        .context
        .facts
        .get(&format!("{}.{}", fact.kind, fact.name));
    match shape.unwrap_or(&FactShape::Plain) {
        FactShape::Money(period) => {
            let decimals = if period == "hour" {
                Decimals::Always
            } else {
                Decimals::WhereNeeded
            };
            let Some(sum) = words.currency.typed(raw, decimals) else {
                return Ok(raw.to_owned());
            };
            if period.is_empty() {
                return Ok(sum);
            }
            words.say(&format!("per.{period}"), &[("sum", &sum)])
        }
        FactShape::Hours => words.say("facts.hours", &[("hours", figure(fact))]),
        FactShape::Date => match NaiveDate::parse_from_str(raw, "%Y-%m-%d") {
            Ok(day) => words.day(day),
            Err(_) => Ok(raw.to_owned()),
        },
        FactShape::YesNo => match raw {
            "yes" => words.plain("facts.yes"),
            "no" => words.plain("facts.no"),
            other => Ok(other.to_owned()),
        },
        FactShape::Word => words.named(&format!("word.{raw}"), raw),
        FactShape::Plain => match raw.strip_suffix('%') {
            Some(figure) => words.say("write.percent", &[("number", figure)]),
            None => Ok(words.number(raw)),
        },
    }
}

/// Whether a value says no, none or nothing.
fn is_nothing(words: &Words<'_>, fact: &FactUse) -> bool {
    if none_of_value(words, fact).is_some() {
        return true;
    }
    let figure = fact
        .value
        .trim_start_matches(|c: char| !c.is_ascii_digit())
        .split(' ')
        .next()
        .unwrap_or("");
    let zero = !figure.is_empty() && figure.chars().all(|c| matches!(c, '0' | '.' | '%'));
    zero || matches!(fact.value.as_str(), "no" | "none" | "")
}
