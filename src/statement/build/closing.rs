//! The closing parts: what is in the sum, the facts, unconfirmed amounts, what to report, next steps.

use super::Detail;
use super::words::{Words, listed};
use crate::measures::{FactUse, ItemKind};
use crate::statement::error::StatementError;
use crate::statement::money::{capital, readable};
use crate::statement::view::{Part, PartKind};

/// All closing parts in order.
pub(super) fn parts(words: &Words<'_>) -> Result<Vec<Part>, StatementError> {
    let mut parts = vec![];
    let notes: Vec<String> = words
        .assessment
        .notes
        .iter()
        .map(|note| {
            let text = words.label(&format!("note.{note}"));
            text.unwrap_or_else(|| format!("{}.", capital(&readable(note))))
        })
        .collect();
    add(
        words,
        &mut parts,
        "notes.heading",
        PartKind::Paragraphs,
        notes,
    )?;
    add(
        words,
        &mut parts,
        "sum.heading",
        PartKind::Paragraphs,
        counted(words)?,
    )?;
    add(
        words,
        &mut parts,
        "facts.heading",
        PartKind::Paragraphs,
        facts(words)?,
    )?;
    add(
        words,
        &mut parts,
        "unconfirmed.heading",
        PartKind::Paragraphs,
        unconfirmed(words)?,
    )?;
    let mut report = grouped(words, "report.");
    if report.is_empty() {
        report.push(words.plain("report.general")?);
    }
    add(
        words,
        &mut parts,
        "report.heading",
        PartKind::Points,
        report,
    )?;
    let offices = grouped(words, "office.");
    add(
        words,
        &mut parts,
        "offices.heading",
        PartKind::Points,
        offices,
    )?;
    add(
        words,
        &mut parts,
        "next.heading",
        PartKind::Steps,
        next_steps(words)?,
    )?;
    Ok(parts)
}

/// Adds a part unless it is empty.
fn add(
    words: &Words<'_>,
    parts: &mut Vec<Part>,
    heading: &str,
    kind: PartKind,
    lines: Vec<String>,
) -> Result<(), StatementError> {
    if !lines.is_empty() {
        parts.push(words.part(heading, kind, lines)?);
    }
    Ok(())
}

/// The pack's labels of one group, in the order of their keys.
fn grouped(words: &Words<'_>, start: &str) -> Vec<String> {
    words
        .context
        .labels
        .range(start.to_owned()..)
        .take_while(|(key, _)| key.starts_with(start))
        .map(|(_, text)| text.clone())
        .collect()
}

/// What is counted and what is left out.
fn counted(words: &Words<'_>) -> Result<Vec<String>, StatementError> {
    let mut names: Vec<String> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let used = words.assessment.earners.iter().any(|earner| {
            std::iter::once(&earner.not_in_work)
                .chain(earner.lines.iter().flat_map(|line| &line.grid))
                .any(|point| point.items[position].0 != 0)
        });
        let in_sum = match item.kind {
            ItemKind::Pay
            | ItemKind::Income
            | ItemKind::Tax
            | ItemKind::Contribution
            | ItemKind::Pension
            | ItemKind::Loan
            | ItemKind::Benefit
            | ItemKind::Cost => true,
            ItemKind::Passport | ItemKind::Housing => false,
        };
        let name = words.item(position)?;
        if used && in_sum && !names.contains(&name) {
            names.push(name);
        }
    }
    let mut lines = vec![words.say("sum.in", &[("list", &listed(&names))])?];
    if let Some(out) = words.label("left_out") {
        lines.push(words.say("sum.out", &[("list", &out)])?);
    }
    Ok(lines)
}

/// The facts, by how they are known.
fn facts(words: &Words<'_>) -> Result<Vec<String>, StatementError> {
    let hidden: Vec<&str> = words
        .assessment
        .earners
        .iter()
        .filter(|earner| {
            words
                .context
                .delivery
                .only
                .is_some_and(|only| only != earner.adult)
        })
        .map(|earner| earner.name.as_str())
        .filter(|name| !name.is_empty())
        .collect();
    let shown = || {
        words
            .assessment
            .facts
            .iter()
            .filter(|fact| !hidden.contains(&fact.of.as_str()))
    };
    let mut lines = vec![];
    for (known, key) in [('s', "facts.seen"), ('t', "facts.told")] {
        let group: Vec<&FactUse> = shown().filter(|fact| fact.known == known).collect();
        push_facts(words, &mut lines, key, &group)?;
    }
    let assumed: Vec<&FactUse> = shown().filter(|fact| fact.known == 'a').collect();
    let (none, some): (Vec<&FactUse>, Vec<&FactUse>) = assumed
        .into_iter()
        .partition(|fact| is_nothing(&fact.value));
    push_facts(words, &mut lines, "facts.assumed", &some)?;
    let mut names: Vec<String> = vec![];
    for fact in none {
        let name = fact_name(words, fact);
        if !names.contains(&name) {
            names.push(name);
        }
    }
    match words.detail {
        _ if names.is_empty() => {}
        Detail::Full => {
            lines.push(words.say("facts.assumed_none", &[("list", &listed(&names))])?);
        }
        Detail::Brief => {
            let count = names.len().to_string();
            lines.push(words.say("facts.assumed_count", &[("count", &count)])?);
        }
    }
    let missing: Vec<&FactUse> = shown()
        .filter(|fact| !matches!(fact.known, 's' | 't' | 'a'))
        .collect();
    push_facts(words, &mut lines, "facts.missing", &missing)?;
    Ok(lines)
}

/// Adds one paragraph of facts, those of one person together.
fn push_facts(
    words: &Words<'_>,
    lines: &mut Vec<String>,
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
        let mut said = vec![];
        for fact in facts.iter().filter(|fact| fact.of == owner) {
            let name = fact_name(words, fact);
            said.push(words.say("facts.fact", &[("name", &name), ("value", &fact.value)])?);
        }
        let list = said.join(", ");
        groups.push(if owner.is_empty() {
            list
        } else {
            words.say("facts.of", &[("of", owner), ("list", &list)])?
        });
    }
    if !groups.is_empty() {
        lines.push(words.say(key, &[("list", &listed(&groups))])?);
    }
    Ok(())
}

/// The name of a fact.
fn fact_name(words: &Words<'_>, fact: &FactUse) -> String {
    words
        .label(&format!("fact.{}", fact.name))
        .unwrap_or_else(|| readable(&fact.name))
}

/// Whether a value says no, none or nothing.
fn is_nothing(value: &str) -> bool {
    let figure = value
        .trim_start_matches(|c: char| !c.is_ascii_digit())
        .split(' ')
        .next()
        .unwrap_or("");
    let zero = !figure.is_empty() && figure.chars().all(|c| matches!(c, '0' | '.' | '%'));
    zero || matches!(value, "no" | "none" | "")
}

/// Amounts whose source nobody has checked.
fn unconfirmed(words: &Words<'_>) -> Result<Vec<String>, StatementError> {
    let mut names: Vec<String> = vec![];
    for amount in words
        .assessment
        .amounts
        .iter()
        .filter(|amount| !amount.confirmed)
    {
        let name = words
            .label(&format!("amount.{}", amount.name))
            .unwrap_or_else(|| readable(&amount.name));
        let said = words.say("facts.fact", &[("name", &name), ("value", &amount.value)])?;
        if !names.contains(&said) {
            names.push(said);
        }
    }
    if names.is_empty() {
        return Ok(vec![]);
    }
    Ok(vec![
        words.say("unconfirmed.line", &[("list", &listed(&names))])?,
    ])
}

/// The fixed next steps, then the office's own.
fn next_steps(words: &Words<'_>) -> Result<Vec<String>, StatementError> {
    let until = words.day(words.context.rules_until);
    let mut lines = vec![];
    let keys: Vec<&str> = words
        .context
        .texts
        .keys("next.")
        .filter(|key| *key != "next.heading")
        .collect();
    for key in keys {
        lines.push(words.say(key, &[("until", &until)])?);
    }
    lines.extend(words.context.office.next_steps.iter().cloned());
    Ok(lines)
}
