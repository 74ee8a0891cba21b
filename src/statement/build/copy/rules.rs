//! The rules that the copy rests on: the pack's name, hash and days, and the program.

use super::Copy;
use crate::statement::copy_view::{CopyPart, CopySection};
use crate::statement::error::StatementError;
use crate::statement::view::Line;

/// Letters of a hash that stand together, so that it can be read aloud and can break over lines.
const GROUP: usize = 8;

pub(super) fn section(copy: &Copy<'_>) -> Result<CopySection, StatementError> {
    let words = &copy.words;
    let (context, rules) = (words.context, &copy.evidence.rules);
    let mut lines = vec![];
    let mut add = |key: &str, text: String| -> Result<(), StatementError> {
        if !text.is_empty() {
            lines.push(Line {
                lead: words.plain(&format!("copy.rules.{key}"))?,
                text,
            });
        }
        Ok(())
    };
    add("pack", rules.name.clone())?;
    add("title", context.rules_title.clone())?;
    add("area", context.area.clone())?;
    let (from, to) = (words.day(rules.from)?, words.day(context.rules_until)?);
    add(
        "days",
        words.say("copy.amounts.days", &[("from", &from), ("to", &to)])?,
    )?;
    let letters: Vec<char> = rules.hash.chars().collect();
    let groups: Vec<String> = letters
        .chunks(GROUP)
        .map(|group| group.iter().collect())
        .collect();
    add("hash", groups.join(" "))?;
    for (what, day) in &rules.dates {
        let day = words.day(*day)?;
        lines.push(Line {
            lead: words.say(
                "copy.rules.date",
                &[("what", &crate::statement::money::capital(what))],
            )?,
            text: day,
        });
    }
    lines.push(Line {
        lead: words.plain("copy.rules.version")?,
        text: rules.version.clone(),
    });
    for local in &context.locals {
        let until = words.day(local.until)?;
        let values = [("source", local.source.as_str()), ("until", &until)];
        lines.push(Line {
            lead: words.say("copy.rules.local", &[("title", &local.title)])?,
            text: words.say("copy.rules.local_source", &values)?,
        });
    }
    lines.push(words.plain("copy.rules.record")?.into());
    let formulas: Vec<&str> = copy
        .evidence
        .points
        .iter()
        .flat_map(|point| &point.lines)
        .filter(|line| line.counts)
        .map(|line| line.formula.as_str())
        .collect();
    let named = |name: &str| {
        let mut words = formulas
            .iter()
            .flat_map(|rule| rule.split(|sign: char| !sign.is_alphanumeric() && sign != '_'));
        words.any(|word| word == name)
    };
    let steps = rules.steps.iter().filter(|(name, _)| named(name));
    let steps: Vec<Line> = steps.map(|(_, text)| text.clone().into()).collect();
    let mut parts = vec![];
    if !steps.is_empty() {
        parts.push(CopyPart {
            heading: words.plain("copy.rules.steps")?,
            lines: steps,
            tables: vec![],
        });
    }
    Ok(CopySection {
        heading: words.plain("copy.rules.heading")?,
        parts: std::iter::once(CopyPart {
            heading: String::new(),
            lines,
            tables: vec![],
        })
        .chain(parts)
        .collect(),
    })
}
