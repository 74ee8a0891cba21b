//! The closing parts: what is in the sum, the facts, unconfirmed amounts, whom to tell, next steps.
//! Only what concerns this household: items that are not zero at a point that the letter shows.

use super::Detail;
use super::facts::facts;
use super::words::Words;
use crate::measures::ItemKind;
use crate::statement::error::StatementError;
use crate::statement::money::capital;
use crate::statement::view::{Line, Part, PartKind};

/// All closing parts in order.
pub(super) fn parts(words: &Words<'_>) -> Result<Vec<Part>, StatementError> {
    let mut rests_on = counted(words)?;
    rests_on.extend(local_rules(words)?);
    rests_on.extend(facts(words)?);
    rests_on.extend(unconfirmed(words)?);
    if words.detail == Detail::Full {
        rests_on.extend(glossary(words)?);
    }
    Ok(vec![
        words.part("sum.heading", PartKind::Paragraphs, rests_on)?,
        words.part("report.heading", PartKind::Paragraphs, reports(words)?)?,
        words.part("next.heading", PartKind::Steps, next_steps(words)?)?,
    ])
}

/// What the benefits, taxes and help in kind of this household are, in the pack's words.
fn glossary(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let mut lines: Vec<Line> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let explained = match item.kind {
            ItemKind::Benefit | ItemKind::Passport | ItemKind::Tax | ItemKind::Contribution => true,
            ItemKind::Pay
            | ItemKind::Income
            | ItemKind::Pension
            | ItemKind::Loan
            | ItemKind::Cost
            | ItemKind::Housing
            | ItemKind::Employer => false,
        };
        if !explained || !words.marks.present(position) || words.folded(&item.name) {
            continue;
        }
        if let Some(what) = words.label(&format!("what.{}", item.name)) {
            let name = words.item(position)?;
            let line = Line {
                lead: words.say("glossary.lead", &[("name", &name)])?,
                text: what,
            };
            if !lines.contains(&line) {
                lines.push(line);
            }
        }
    }
    Ok(lines)
}

/// What is due and not claimed, and the pack's notes that hold for this household; at most one part.
pub(super) fn notes(words: &Words<'_>) -> Result<Vec<Part>, StatementError> {
    let mut lines = unclaimed(words)?;
    for note in &words.assessment.notes {
        let key = format!("note.{note}");
        if words.gives_away(&key) {
            continue;
        }
        lines.push(Line::from(match words.label(&key) {
            Some(text) => text,
            None => words.sentence(&words.named(&key, note)?)?,
        }));
    }
    if lines.is_empty() {
        return Ok(vec![]);
    }
    Ok(vec![words.part(
        "notes.heading",
        PartKind::Paragraphs,
        lines,
    )?])
}

/// One sentence for each benefit that looks due and is not claimed. What is folded is not named.
fn unclaimed(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let items = &words.assessment.items;
    let told = words.assessment.unclaimed.iter();
    told.filter(|due| !words.folded(&items[due.item].name))
        .map(|due| {
            let name = words.item(due.item)?;
            let sum = words.currency.short(due.due);
            Ok(Line {
                lead: words.say("unclaimed.lead", &[("name", &name)])?,
                text: words.say(
                    "unclaimed.line",
                    &[("sum", &sum), ("period", &words.period)],
                )?,
            })
        })
        .collect()
}

/// The pack's labels of one group, in the order of their keys, with what follows the group's name in the key.
fn grouped<'a>(words: &'a Words<'_>, group: &'a str) -> impl Iterator<Item = (&'a str, String)> {
    words
        .context
        .labels
        .range(group.to_owned()..)
        .take_while(move |(key, _)| key.starts_with(group))
        .filter_map(move |(key, _)| {
            Some((
                key[group.len()..].trim_start_matches('.'),
                words.label(key)?,
            ))
        })
}

/// Whether an item of this name concerns the household.
fn concerns(words: &Words<'_>, name: &str) -> bool {
    let mut items = words.assessment.items.iter().enumerate();
    items.any(|(position, item)| item.name == name && words.marks.present(position))
}

/// What is counted and what is left out.
fn counted(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let mut names: Vec<String> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let in_sum = match item.kind {
            ItemKind::Pay
            | ItemKind::Income
            | ItemKind::Tax
            | ItemKind::Contribution
            | ItemKind::Pension
            | ItemKind::Loan
            | ItemKind::Benefit
            | ItemKind::Cost => true,
            ItemKind::Passport | ItemKind::Housing | ItemKind::Employer => false,
        };
        let name = words.item(position)?;
        if words.marks.present(position) && in_sum && !names.contains(&name) {
            names.push(name);
        }
    }
    let mut lines = vec![Line {
        lead: words.plain("sum.in_lead")?,
        text: words.say("sum.in", &[("list", &words.enumerated(&names))])?,
    }];
    let mut left_out: Vec<String> = vec![];
    for (key, text) in grouped(words, "left_out") {
        let item = key.split_once('.').map(|(item, _)| item);
        if item.is_none_or(|name| concerns(words, name)) {
            left_out.push(text.trim_end_matches('.').to_owned());
        }
    }
    if !left_out.is_empty() {
        lines.push(Line {
            lead: words.plain("sum.out_lead")?,
            text: words.say("sum.out", &[("list", &words.listed(&left_out)?)])?,
        });
    }
    Ok(lines)
}

/// The schemes and tables of the household's own place, each with its source; none that gives a folded item away.
fn local_rules(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let shown = words.locals().filter(|local| {
        !local.items.iter().any(|item| words.folded(item))
            && !words.reveals(&local.title)
            && !words.reveals(&local.source)
    });
    let mut lines = vec![];
    for local in shown {
        let values = [("title", local.title.as_str()), ("source", &local.source)];
        lines.push(Line {
            lead: words.plain("sum.local_lead")?,
            text: words.say("sum.local", &values)?,
        });
    }
    Ok(lines)
}

/// Amounts whose source nobody has checked, counted by instrument.
fn unconfirmed(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let mut folded = 0;
    let mut groups: Vec<(String, usize)> = vec![];
    for (name, count) in &words.marks.instruments {
        if words.reveals(name) {
            folded += count;
        } else {
            groups.push((words.instrument(name)?, *count));
        }
    }
    if folded > 0 {
        groups.push((words.plain("sum.folded")?, folded));
    }
    if groups.is_empty() {
        return Ok(vec![]);
    }
    let mut said = vec![];
    for (name, count) in groups {
        let count = count.to_string();
        said.push(words.say("unconfirmed.group", &[("name", &name), ("count", &count)])?);
    }
    Ok(vec![Line {
        lead: words.plain("unconfirmed.lead")?,
        text: words.say("unconfirmed.line", &[("list", &words.enumerated(&said))])?,
    }])
}

/// Whom to tell what by when: each office once, in the order of the statement's items.
fn reports(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let mut offices: Vec<(String, Vec<String>)> = vec![];
    let mut seen: Vec<&str> = vec![];
    for (position, item) in words.assessment.items.iter().enumerate() {
        let name = item.name.as_str();
        if seen.contains(&name) || !words.marks.present(position) || words.folded(name) {
            continue;
        }
        seen.push(name);
        let own = words
            .locals()
            .find(|local| !local.office.is_empty() && local.items.iter().any(|item| item == name));
        let office = match own {
            Some(local) => Some(local.office.clone()),
            None => words.label(&format!("office.{name}")),
        };
        let report = words.label(&format!("report.{name}"));
        let (Some(office), Some(report)) = (office, report) else {
            continue;
        };
        let (office, report) = (capital(&office), report.trim_end_matches('.').to_owned());
        match offices.iter_mut().find(|(known, _)| *known == office) {
            Some((_, said)) if said.contains(&report) => {}
            Some((_, said)) => said.push(report),
            None => offices.push((office, vec![report])),
        }
    }
    let mut lines = vec![];
    for (office, said) in offices {
        lines.push(Line {
            lead: words.say("report.lead", &[("office", &office)])?,
            text: words.ended(&words.listed(&said)?)?,
        });
    }
    if lines.is_empty() {
        lines.push(Line::from(words.plain("report.general")?));
    }
    Ok(lines)
}

/// The fixed next steps, then the office's own.
fn next_steps(words: &Words<'_>) -> Result<Vec<Line>, StatementError> {
    let until = words.day(words.rules_until())?;
    let keys = words.context.texts.keys("next.");
    let mut lines = vec![];
    for key in keys.filter(|key| *key != "next.heading") {
        lines.push(Line::from(words.say(key, &[("until", &until)])?));
    }
    let own = words.context.office.next_steps.iter().cloned();
    lines.extend(own.map(Line::from));
    Ok(lines)
}
